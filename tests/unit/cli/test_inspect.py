"""Inspecting vocabularies from the command line."""

from __future__ import annotations

import csv
from pathlib import Path

import jsonschema
import orjson
import pytest

from auditor.report import contract
from tests.unit.cli.conftest import DEMO, VOCABULARY

OTHER = str(DEMO / "vocabularies" / "harbour-wordpiece")


def test_it_writes_the_inspection_and_says_where(run):
    """Sentences within 80 columns; every entry in the table."""
    said = run("inspect", VOCABULARY, "--width", "64")
    folder = Path("reports/harbour-bytelevel--inspection")
    assert said.code == 0
    assert {path.name for path in folder.iterdir()} == {
        "inspection.json", "entries.csv", "unreachable.csv", "report.html",
    }  # fmt: skip
    assert max(map(len, said.out.splitlines())) <= 80
    held = orjson.loads((folder / "inspection.json").read_bytes())["vocabularies"][0]
    assert held["price"]["tied"] == 64 * held["ids"] == 384_000
    assert sum(held["kinds"].values()) == held["entries"] == 6000
    with (folder / "entries.csv").open(encoding="utf-8", newline="") as stream:
        assert len(list(csv.DictReader(stream))) == 6000


def test_two_vocabularies_are_compared(run):
    """What one has and the other lacks adds up to each one's entries."""
    said = run("inspect", VOCABULARY, OTHER, "--out", "i", "--json")
    held = orjson.loads(said.out)
    assert held == orjson.loads(Path("i/inspection.json").read_bytes())
    row = held["differences"][0]
    first, second = (own["entries"] for own in held["vocabularies"])
    assert row["only_in_second"]["entries"] + row["shared"] <= second
    assert row["only_in_first"]["entries"] + row["shared"] <= first


@pytest.mark.parametrize("names", [(VOCABULARY,), (OTHER, VOCABULARY)])
def test_the_document_keeps_its_schema(run, names):
    """`inspection.json` against the schema that ships, with and without differences."""
    said = run("inspect", *names, "--out", "i", "--json")
    jsonschema.validate(orjson.loads(said.out), contract.schema("inspection"))


def test_the_model_gives_the_share_of_the_embedding(run):
    """One layer of width 8 by hand: 12·8² + 13·8 = 872 parameters (Devlin et al. 2019)."""
    said = run("inspect", VOCABULARY, "--out", "i", "--json",
               "--model", "layers=1,width=8,heads=1,inner=32")  # fmt: skip
    price = orjson.loads(said.out)["vocabularies"][0]["price"]
    assert price["layers"] == 872
    assert price["share_of_model"] == 48_000 / 48_872


def test_what_is_no_vocabulary_is_refused(run):
    """Exit code 2, nothing written."""
    said = run("inspect", str(DEMO / "everyday.txt"), "--out", "i")
    assert said.code == 2
    assert "no [UNK] entry" in said.err
    assert not Path("i").exists()
