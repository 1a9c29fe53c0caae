"""Every kind of page in a browser: silent, self-contained, whole at any width, open to all."""

from __future__ import annotations

import json
from itertools import pairwise

import orjson
import pytest
from selenium.webdriver import Keys
from selenium.webdriver.common.by import By

from auditor.corpus import ReadOptions
from auditor.planning.plan import Wishes
from auditor.runs.auditing import assess
from auditor.runs.audits import audit_at
from auditor.runs.lengths import plan_from_audit
from auditor.runs.plan import Plan
from auditor.vocabulary import VocabularySpec
from tests.outside.material import fetch_axe
from tests.unit.runs.conftest import DEMO

pytestmark = pytest.mark.outside

SAMPLES = DEMO.parent / "reports" / "samples"
PAGES = sorted(path.parent.name for path in SAMPLES.glob("*/report.html"))
VOCABULARIES = ("harbour-bytelevel", "harbour-wordpiece", "harbour-unigram")
HOSTILE = (
    "<script>document.title='taken'</script> </style></script><img src=x onerror=alert(1)>"
    ' \u202eevil\u202c =HYPERLINK("x") \x1b[31mred --> ]]> {{ 7*7 }} &amp;lt;'
)

CUT = """
const bad = [];
const scrolls = (e) => e.closest('.wide');
for (const e of document.querySelectorAll('body *')) {
  const box = e.getBoundingClientRect();
  if (!box.width || e.closest('.skip')) continue;
  if (!scrolls(e) && box.right > innerWidth + 1)
    bad.push(e.tagName + ' ' + e.textContent.slice(0, 40));
}
for (const text of document.querySelectorAll('svg text')) {
  const own = text.ownerSVGElement, box = text.getBoundingClientRect();
  const edge = own.getBoundingClientRect();
  const beside = box.right > edge.right + 1 || box.left < edge.left - 1;
  if (box.width && (beside || box.bottom > edge.bottom + 2))
    bad.push('svg ' + text.textContent);
}
return bad;
"""


def opened(browser, path, *, width=1440, scheme="light", medium="screen"):
    """Open a page at a width, in light or dark, on the screen or for print."""
    browser.execute_cdp_cmd(
        "Emulation.setEmulatedMedia",
        {"media": medium, "features": [{"name": "prefers-color-scheme", "value": scheme}]},
    )
    browser.execute_cdp_cmd(
        "Emulation.setDeviceMetricsOverride",
        {"width": width, "height": 900, "deviceScaleFactor": 1, "mobile": False},
    )
    browser.get_log("browser")
    browser.get_log("performance")
    browser.get(path.as_uri())
    return browser


def fetched(browser):
    """Return the addresses that the page asked for."""
    messages = [json.loads(row["message"])["message"] for row in browser.get_log("performance")]
    return [
        message["params"]["request"]["url"]
        for message in messages
        if message["method"] == "Network.requestWillBeSent"
    ]


@pytest.fixture(scope="module")
def axe(tmp_path_factory):
    return fetch_axe(tmp_path_factory.mktemp("axe"))


@pytest.mark.parametrize("name", PAGES)
def test_a_page_says_nothing_and_fetches_nothing(browser, name):
    """No message of the browser; the only address asked for is the page's own."""
    path = SAMPLES / name / "report.html"
    opened(browser, path)
    assert browser.get_log("browser") == []
    assert fetched(browser) == [path.as_uri()]


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("name", PAGES)
def test_a_page_hinders_nobody(browser, axe, name, scheme):
    """axe-core finds no violation that it calls serious or critical."""
    opened(browser, SAMPLES / name / "report.html", scheme=scheme)
    browser.execute_script(axe)
    found = browser.execute_async_script("axe.run().then(arguments[0])")
    assert found["passes"]
    assert [
        (own["id"], own["nodes"][0]["html"])
        for own in found["violations"]
        if own["impact"] in {"serious", "critical"}
    ] == []


@pytest.mark.parametrize("medium", ["screen", "print"])
@pytest.mark.parametrize("width", [360, 800, 1440])
@pytest.mark.parametrize("name", PAGES)
def test_nothing_is_cut_or_stands_out(browser, name, width, medium):
    """Only tables and wide drawings scroll by themselves; no word of a drawing is cut."""
    for scheme in ("light", "dark") if medium == "screen" else ("light",):
        opened(browser, SAMPLES / name / "report.html", width=width, scheme=scheme, medium=medium)
        assert browser.execute_script("return document.documentElement.scrollWidth") <= width
        assert browser.execute_script(CUT) == []


@pytest.fixture
def page(browser):
    return opened(browser, SAMPLES / "inspection-notes" / "report.html")


def test_ten_facts_of_the_audit_stand_in_the_text(page):
    """Counts and figures of the JSON beside it, as a reader finds them."""
    audit = orjson.loads((SAMPLES / "inspection-notes" / "audit.json").read_bytes())
    text = page.execute_script("return document.body.textContent")
    corpus, first = audit["corpus"], audit["vocabularies"][0]
    whole = first["slices"]["all"]
    facts = [
        f"{corpus['documents']:,} documents",
        f"{corpus['words']:,} words",
        f"{corpus['characters']:,} characters",
        f"{first['entries']:,} entries",
        f"limit {first['limit']['value']:,}",
        f"{whole['figures']['fertility']['value']:.2f}",
        f"{whole['counts']['tokens']:,} / {corpus['words']:,}",
        f"{whole['lengths']['maximum']:,}",
        f"{whole['lengths']['quantiles']['p95']['value']:,}",
        corpus["digest"],
    ]
    assert [fact for fact in facts if fact not in text] == []


def test_the_length_that_is_tried_gives_the_numbers_of_a_plan(page, tmp_path):
    """Documents and tokens cut at five lengths, under each of three vocabularies."""
    audit = audit_at(str(SAMPLES / "inspection-notes"))
    wishes = Wishes(lengths=(16, 64, 128, 500, 4000))
    plans = [
        plan_from_audit(audit, wishes, vocabulary=name, out=tmp_path / name).plan
        for name in VOCABULARIES
    ]
    field = page.find_element(By.CSS_SELECTOR, "#try input[type=number]")
    for place, length in enumerate(wishes.lengths):
        field.send_keys(Keys.CONTROL, "a")
        field.send_keys(str(length))
        lines = page.find_elements(By.CSS_SELECTOR, "#try li")
        for line, made in zip(lines, plans, strict=True):
            own = made["candidates"][place]
            assert (
                int(line.get_attribute("data-documents")) == own["truncated_documents"]["numerator"]
            )
            assert int(line.get_attribute("data-tokens")) == own["truncated_tokens"]["numerator"]
    slider = page.find_element(By.CSS_SELECTOR, "#try input[type=range]")
    slider.send_keys(Keys.HOME)
    assert field.get_attribute("value") == "1"


def column(table, place):
    rows = table.find_elements(By.CSS_SELECTOR, "tbody tr")
    return [
        row.find_elements(By.CSS_SELECTOR, "th, td")[place].text.split("\n")[0]
        for row in rows
        if row.is_displayed()
    ]


def test_tables_sort_and_find(page):
    """By numbers downwards, then upwards, and by words; rows that hold what is typed remain."""
    words = next(
        table
        for table in page.find_elements(By.CSS_SELECTOR, "table.sorts")
        if "cost most" in table.find_element(By.TAG_NAME, "caption").text
    )
    times = words.find_element(By.CSS_SELECTOR, "button[aria-label='Sort by times']")
    page.execute_script("arguments[0].scrollIntoView({block: 'center'})", times)
    times.send_keys(Keys.ENTER)
    numbers = [int(text.replace(",", "")) for text in column(words, 1)]
    assert numbers == sorted(numbers, reverse=True)
    assert len(set(numbers)) > 3
    times.send_keys(Keys.SPACE)
    numbers = [int(text.replace(",", "")) for text in column(words, 1)]
    assert numbers == sorted(numbers)
    head = times.find_element(By.XPATH, "..")
    assert head.get_attribute("aria-sort") == "ascending"
    field = words.find_element(
        By.XPATH, "ancestor::div[@class='wide']/preceding-sibling::label[1]//input"
    )
    word = column(words, 0)[3]
    field.send_keys(word)
    found = column(words, 0)
    assert 1 <= len(found) < len(numbers)
    assert word in found


def test_the_keyboard_goes_through_the_page_in_reading_order(page):
    """The first stop leads to the answers; every stop lies after the one before."""
    page.find_element(By.TAG_NAME, "body").send_keys(Keys.TAB)
    assert page.switch_to.active_element.text == "To the answers"
    page.execute_script(
        "window.stops = []; document.addEventListener('focusin', (e) => stops.push(e.target))"
    )
    for _ in range(60):
        page.switch_to.active_element.send_keys(Keys.TAB)
    count = page.execute_script("return stops.length")
    assert count >= 50
    ordered = page.execute_script(
        "return stops.map((stop, i) => !i || Boolean(stops[i - 1].compareDocumentPosition(stop)"
        " & Node.DOCUMENT_POSITION_FOLLOWING))"
    )
    assert all(ordered)


def test_hostile_text_stays_text(browser, tmp_path):
    """Markup, closing tags, turned writing and escapes in the corpus, a slice and an id."""
    rows = [{"id": HOSTILE, "lang": HOSTILE, "text": f"{HOSTILE} {n}"} for n in range(9)]
    path = tmp_path / "hostile.jsonl"
    path.write_bytes(b"".join(orjson.dumps(row) + b"\n" for row in rows))
    specs = tuple(VocabularySpec(str(DEMO / "vocabularies" / name)) for name in VOCABULARIES)
    assess(Plan((str(path),), specs, ReadOptions(by=("lang",))), tmp_path / "a")
    opened(browser, tmp_path / "a" / "report.html")
    assert browser.get_log("browser") == []
    assert "taken" not in browser.title
    assert browser.execute_script("return document.images.length") == 0
    assert browser.execute_script("return document.scripts.length") == 2
    text = browser.execute_script("return document.body.textContent")
    assert "⟨U+202E⟩" in text
    assert "\u202e" not in text
    assert "\x1b" not in text


def test_a_large_page_is_small_and_quick(browser, tmp_path):
    """100 slices and 3 vocabularies: under 3 MB, and open in under a second."""
    rows = [
        {"lang": f"l{n % 100}", "text": f"The buoy at berth {n} holds; reading {n * 7 % 91} m."}
        for n in range(2000)
    ]
    path = tmp_path / "slices.jsonl"
    path.write_bytes(b"".join(orjson.dumps(row) + b"\n" for row in rows))
    specs = tuple(VocabularySpec(str(DEMO / "vocabularies" / name)) for name in VOCABULARIES)
    assess(Plan((str(path),), specs, ReadOptions(by=("lang",))), tmp_path / "a")
    page = tmp_path / "a" / "report.html"
    assert page.stat().st_size < 3e6
    taken = []
    for _ in range(3):
        opened(browser, page)
        taken.append(
            browser.execute_script(
                "const [n] = performance.getEntriesByType('navigation'); return n.loadEventEnd"
            )
        )
    assert 0 < sorted(taken)[1] < 1000


def test_headings_come_in_order(page):
    """No level is left out on the way down."""
    levels = [
        int(head.tag_name[1]) for head in page.find_elements(By.CSS_SELECTOR, "h1, h2, h3, h4")
    ]
    assert levels[0] == 1
    assert all(after <= before + 1 for before, after in pairwise(levels))
