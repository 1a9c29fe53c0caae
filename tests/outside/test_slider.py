"""The length plan's page in a browser: its slider says what `plan.json` says."""

from __future__ import annotations

from pathlib import Path

import pytest
from selenium.webdriver import Keys
from selenium.webdriver.common.by import By

from auditor.planning.model import parse_model
from auditor.planning.plan import Wishes
from auditor.runs.lengths import plan_from_corpus
from tests.unit.runs.conftest import DEMO, plan

pytestmark = pytest.mark.outside

LENGTHS = (64, 128, 300, 512, 2048)


@pytest.fixture(scope="module", params=[None, "layers=2,width=64,heads=2,inner=256"])
def page(request, browser, tmp_path_factory):
    """Return a plan of five lengths whose page is open, with costs in positions or operations."""
    folder: Path = tmp_path_factory.mktemp("page") / "p"
    model = parse_model(request.param) if request.param else None
    wishes = Wishes(lengths=LENGTHS, model=model)
    settings = plan(DEMO / "inspection_notes.jsonl", "harbour-bytelevel")
    made = plan_from_corpus(settings, wishes, out=folder).plan
    browser.get((folder / "report.html").as_uri())
    return made


def typed(browser, length):
    """Type ``length`` into the field, and return the numbers that the page then holds."""
    field = browser.find_element(By.CSS_SELECTOR, "#try input[type=number]")
    field.send_keys(Keys.CONTROL, "a")
    field.send_keys(str(length))
    held = browser.find_element(By.ID, "try")
    names = ("length", "documents", "beyond", "padding", "cost")
    return {name: float(held.get_attribute(f"data-{name}")) for name in names}


def test_it_says_what_the_plan_says_at_five_lengths(browser, page):
    """Documents and tokens cut, padding, and cost: to the integer."""
    for own in page["candidates"]:
        said = typed(browser, own["length"])
        fixed, model = own["padding"]["fixed"], own["cost"]["model"]
        assert said == {
            "length": own["length"],
            "documents": own["truncated_documents"]["numerator"],
            "beyond": own["truncated_tokens"]["numerator"],
            "padding": fixed["padded"] - fixed["positions"],
            "cost": model["forward_flops_per_sequence"] if model else own["length"],
        }
        shown = browser.find_element(By.CSS_SELECTOR, "[data-said=documents]").text
        figure = own["truncated_documents"]
        assert shown.startswith(f"{figure['numerator']:,} of {figure['denominator']:,} (")


def test_the_keyboard_moves_it_along_the_drawing(browser, page):
    """An arrow to the right makes it longer, the line in the drawing follows."""
    slider = browser.find_element(By.CSS_SELECTOR, "#try input[type=range]")
    line = browser.find_element(By.CSS_SELECTOR, "#drawn line.tried")
    typed(browser, page["candidates"][1]["length"])
    before = float(line.get_attribute("x1").rstrip("%"))
    for _ in range(20):
        slider.send_keys(Keys.ARROW_RIGHT)
    field = browser.find_element(By.CSS_SELECTOR, "#try input[type=number]")
    assert int(field.get_attribute("value")) > page["candidates"][1]["length"]
    assert float(line.get_attribute("x1").rstrip("%")) > before
    assert slider.get_attribute("aria-valuetext").endswith("positions")


def test_nothing_is_refused_and_nothing_fetched(browser, page):
    """No message of the browser, whose policy for the page allows its own script alone."""
    assert page["format"] == "auditor/length-plan"
    assert browser.get_log("browser") == []


@pytest.mark.parametrize("width", [360, 800, 1920])
def test_it_fits_the_window(browser, page, width):
    """Only tables scroll by themselves, never the page."""
    assert page["candidates"]
    browser.execute_cdp_cmd(
        "Emulation.setDeviceMetricsOverride",
        {"width": width, "height": 800, "deviceScaleFactor": 1, "mobile": False},
    )
    assert browser.execute_script("return document.documentElement.scrollWidth") <= width
    browser.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})
