"""When pieces and whole differ, the run is done again whole and says so; it is never wrong."""

from __future__ import annotations

import io
import sys
from types import SimpleNamespace

import orjson
import pytest

from auditor.encoding.documents import Documents, SeparationError
from auditor.runs.auditing import assess
from tests.unit.runs.conftest import plan


def run_of(folder):
    return orjson.loads((folder / "run.json").read_bytes())


@pytest.fixture
def disagreeing(monkeypatch):
    """Let every comparison of pieces with the whole fail."""
    monkeypatch.setattr(Documents, "_agrees", lambda *_: False)


def test_the_check_is_told(trouble, tmp_path):
    """`run.json` says how many documents were encoded both ways, and that none differed."""
    assess(plan(trouble, "harbour-bytelevel"), tmp_path / "a")
    check = run_of(tmp_path / "a")["check"]
    assert check["documents_encoded_both_ways"] > 0
    assert check["fault"] is None


@pytest.mark.usefixtures("disagreeing")
def test_a_difference_leads_to_whole_encoding(trouble, tmp_path):
    """The figures are those of `--whole`; the fault, with its place, stands in `run.json`."""
    found = assess(plan(trouble, "harbour-bytelevel"), tmp_path / "a").audit
    whole = assess(plan(trouble, "harbour-bytelevel", whole=True), tmp_path / "b").audit
    told = run_of(tmp_path / "a")
    assert found["vocabularies"] == whole["vocabularies"]
    assert told["documents"]["by_pieces"] == 0
    assert "differ under harbour-bytelevel" in told["check"]["fault"]


@pytest.mark.usefixtures("disagreeing")
def test_standard_input_cannot_be_read_again(trouble, tmp_path, monkeypatch):
    """There the difference is an error with a remedy, and nothing is written."""
    data = SimpleNamespace(buffer=io.BytesIO(trouble.read_bytes()))
    monkeypatch.setattr(sys, "stdin", data)
    with pytest.raises(SeparationError, match="--whole"):
        assess(plan("-", "harbour-bytelevel"), tmp_path / "a")
    assert not (tmp_path / "a").exists()
