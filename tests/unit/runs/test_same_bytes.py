"""The same corpus and settings give the same bytes, however the work was done."""

from __future__ import annotations

import orjson
import pytest

from auditor.runs.auditing import assess
from tests.unit.runs.conftest import VOCABULARIES, plan

COMPARED = (
    "audit.json",
    "figures.csv",
    "lengths.csv",
    "words.csv",
    "characters.csv",
    "report.html",
)


def files(folder) -> dict[str, bytes]:
    """Return what must be equal; nothing else may differ from run to run."""
    return {name: (folder / name).read_bytes() for name in COMPARED}


@pytest.fixture
def expected(trouble, tmp_path):
    assess(plan(trouble, *VOCABULARIES, workers=1), tmp_path / "one")
    return files(tmp_path / "one")


@pytest.mark.parametrize("batch_bytes", [1, 700, 1 << 20])
@pytest.mark.parametrize("workers", [1, 2])
def test_workers_and_batches_change_nothing(trouble, tmp_path, expected, workers, batch_bytes):
    """One or two processes, batches of one document or of all: the same files."""
    sought = plan(trouble, *VOCABULARIES, workers=workers, batch_bytes=batch_bytes)
    assess(sought, tmp_path / "other")
    assert files(tmp_path / "other") == expected


def test_a_changed_document_changes_the_bytes(trouble, tmp_path, expected):
    """The comparison above is not blind: one letter more in one document is seen."""
    trouble.write_bytes(trouble.read_bytes().replace(b"holds.", b"holds.s", 1))
    assess(plan(trouble, *VOCABULARIES), tmp_path / "other")
    assert files(tmp_path / "other")["audit.json"] != expected["audit.json"]


def test_made_with_is_the_only_thing_that_names_versions(trouble, tmp_path):
    """Without ``made_with`` no version of a library stands in the audit."""
    audit = assess(plan(trouble, "harbour-wordpiece"), tmp_path / "a").audit
    versions = {v for v in audit.pop("made_with").values() if v and v.count(".") == 2}
    text = orjson.dumps(audit).decode()
    assert not [version for version in versions if version in text]
