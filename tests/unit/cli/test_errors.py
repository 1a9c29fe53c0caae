"""Bad input: one clear message with place and remedy, exit code 2, nothing written."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.unit.cli.conftest import NOTICES, VOCABULARY

# What was wrong: the arguments, and what the message must name (the place, then the remedy).
WRONG = {
    "missing file": (["gone.jsonl", "--vocab", VOCABULARY], ["gone.jsonl"]),
    "unknown format": (["data.xyz", "--vocab", VOCABULARY], ["data.xyz", ".jsonl"]),
    "no such field": (
        [NOTICES, "--text", "body", "--vocab", VOCABULARY],
        ["body", "notice", "lang"],
    ),
    "no such slice": ([NOTICES, "--by", "language", "--vocab", VOCABULARY], ["language", "lang"]),
    "missing vocabulary": ([NOTICES, "--vocab", "gone"], ["gone"]),
    "no vocabulary there": ([NOTICES, "--vocab", "empty"], ["empty", "tokenizer.json", "notes.md"]),
    "broken vocabulary": ([NOTICES, "--vocab", "broken"], ["broken", "JSON"]),
    "not in the cache": ([NOTICES, "--vocab", "hub:buoys/none"], ["hub:buoys/none", "cache"]),
    "limit below the overhead": ([NOTICES, "--vocab", VOCABULARY, "--limit", "2"], ["2", "limit"]),
    "ranks without a pattern": ([NOTICES, "--vocab", "r.tiktoken"], ["r.tiktoken", "--pattern"]),
    "empty corpus": (["none.jsonl", "--vocab", VOCABULARY], ["none.jsonl"]),
    "nothing readable": (["bad.jsonl", "--vocab", VOCABULARY], ["bad.jsonl", "not valid JSON"]),
    "strict": (["bad.jsonl", "--vocab", VOCABULARY, "--strict"], ["bad.jsonl:1"]),
    "named twice": ([NOTICES, "--vocab", VOCABULARY, "--vocab", VOCABULARY], ["twice"]),
    "remote": (["s3://bucket/notes.jsonl", "--vocab", VOCABULARY], ["s3://bucket/notes.jsonl"]),
}


@pytest.fixture
def clutter(tmp_path):
    """Lay out files that are wrong in their own ways."""
    (tmp_path / "data.xyz").write_bytes(bytes(range(256)))
    (tmp_path / "empty").mkdir()
    (tmp_path / "empty" / "notes.md").write_text("no vocabulary here")
    (tmp_path / "broken").mkdir()
    (tmp_path / "broken" / "tokenizer.json").write_text('{"model": {"type": "BPE", "vocab": {"a"')
    (tmp_path / "r.tiktoken").write_text("YQ== 0\nYg== 1\n")
    (tmp_path / "none.jsonl").write_text("")
    (tmp_path / "bad.jsonl").write_text('{"text": "cut\n[1]\n')


@pytest.mark.usefixtures("clutter")
@pytest.mark.parametrize("case", list(WRONG))
def test_the_message_names_place_and_remedy(run, case):
    """Each wrong call ends with exit code 2, a message that helps, and no report."""
    arguments, named = WRONG[case]
    said = run("assess", *arguments)
    assert said.code == 2
    assert said.out == ""
    assert [word for word in named if word not in said.err] == []
    assert not Path("reports").exists()
    assert "Traceback" not in said.err


def test_an_unknown_option_is_told_as_click_tells_it(run):
    """A wrong call is exit code 2 too."""
    said = run("assess", NOTICES, "--vocab", VOCABULARY, "--colour")
    assert said.code == 2
    assert "--colour" in said.err


def test_a_damaged_record_never_stops_a_run(run):
    """The rest is measured; the record is set aside with source, line and reason."""
    Path("mixed.jsonl").write_text('{"text": "one"}\n{"text": 12}\n{"text": "two"}\n')
    said = run("assess", "mixed.jsonl", "--vocab", VOCABULARY, "--out", "a")
    assert said.code == 0
    aside = Path("a/set_aside.jsonl").read_text()
    assert '"line":2' in aside
    assert "number" in aside
