"""Comparing languages from the command line."""

from __future__ import annotations

import csv
from pathlib import Path

import orjson
import pytest

from tests.unit.cli.conftest import NOTICES, VOCABULARY

PAIRED = ("--by", "lang", "--parallel", "notice", "--reference", "en")


def test_it_writes_the_comparison_and_says_where(run):
    """Costliest language first; no line is wider than 80; the caution is said."""
    said = run("languages", NOTICES, "--vocab", VOCABULARY, *PAIRED)
    folder = Path("reports/safety_notices--harbour-bytelevel--languages")
    assert said.code == 0
    assert {path.name for path in folder.iterdir()} == {
        "languages.json", "languages.csv", "scripts.csv", "label_mismatches.jsonl", "report.html",
    }  # fmt: skip
    assert f"Written to {folder}" in said.out
    assert "people who speak it" in " ".join(said.out.split())
    assert max(map(len, said.out.splitlines())) <= 80


def test_without_parallel_content_the_evidence_is_called_weaker(run):
    """In the terminal and on the page."""
    said = run("languages", NOTICES, "--vocab", VOCABULARY, "--by", "lang", "--out", "l")
    assert "weaker evidence" in " ".join(said.out.split())
    assert "weaker evidence" in Path("l/report.html").read_text(encoding="utf-8")


def test_json_is_alone_on_standard_output(run):
    """`--json` prints `languages.json` and nothing else."""
    said = run("languages", NOTICES, "--vocab", VOCABULARY, *PAIRED, "--out", "l", "--json")
    assert orjson.loads(said.out) == orjson.loads(Path("l/languages.json").read_bytes())


def test_the_tables_hold_what_the_document_holds(run):
    """A row a figure and reference; a row a script."""
    run("languages", NOTICES, "--vocab", VOCABULARY, *PAIRED, "--out", "l", "--quiet")
    document = orjson.loads(Path("l/languages.json").read_bytes())
    tables = {}
    for name in ("languages", "scripts"):
        with Path(f"l/{name}.csv").open(encoding="utf-8", newline="") as stream:
            tables[name] = list(csv.DictReader(stream))
    totals = {
        row["language"]: row for row in tables["languages"] if row["figure"] == "ratio_of_totals"
    }
    for own in document["vocabularies"][0]["languages"]:
        figure = own["premium"]["ratio_of_totals"]
        row = totals[own["language"]]
        assert (row["reference"], int(row["numerator"])) == ("en", figure["numerator"])
        scripts = [row for row in tables["scripts"] if row["language"] == own["language"]]
        assert [int(row["tokens"]) for row in scripts] == [row["tokens"] for row in own["scripts"]]


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        ((), "--by"),
        (("--by", "lang", "--by", "notice"), "one field"),
        (("--by", "lang", "--parallel", "notice"), "--reference"),
        (("--by", "lang", "--reference", "fi"), "no record is labelled fi"),
        (("--by", "tongue"), "no field tongue"),
        (("--by", "lang", "--parallel", "leaflet", "--reference", "en"), "no field leaflet"),
    ],
)
def test_what_cannot_be_done_is_said_and_nothing_written(run, arguments, told):
    """Each message names the option or the labels there are; the exit code is 2."""
    said = run("languages", NOTICES, "--vocab", VOCABULARY, *arguments, "--out", "l")
    assert (said.code, Path("l").exists()) == (2, False)
    assert told in " ".join(said.err.split())
