"""Runs the command line in this process and keeps what it says."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import pytest

from auditor.cli import main

DEMO = Path(__file__).parents[3] / "corpora_demo"
VOCABULARY = str(DEMO / "vocabularies" / "harbour-bytelevel")
NOTICES = str(DEMO / "safety_notices.jsonl")


@dataclass(frozen=True)
class Said:
    """The exit code, and what went to standard output and standard error."""

    code: int
    out: str
    err: str


@pytest.fixture
def run(capsys, tmp_path, monkeypatch) -> Callable[..., Said]:
    """Return a function that runs `auditor` with arguments, in an empty folder."""
    monkeypatch.chdir(tmp_path)

    def call(*arguments: str) -> Said:
        with pytest.raises(SystemExit) as ended:
            main(list(arguments))
        said = capsys.readouterr()
        return Said(int(ended.value.code or 0), said.out, said.err)

    return call
