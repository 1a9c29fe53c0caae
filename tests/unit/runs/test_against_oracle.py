"""Whole runs against the slow oracle, which shares no code with the package."""

from __future__ import annotations

import jsonschema
import orjson
import pytest

import auditor.encoding.documents as encoding
from auditor.report import contract
from auditor.runs.auditing import assess
from tests import oracle
from tests.differences import differences
from tests.unit.runs.conftest import DEMO, VOCABULARIES, plan

LIMITS = {"harbour-bytelevel": 512, "harbour-wordpiece": 128, "harbour-sentencepiece": 2048}


def by_oracle(corpus, name, **settings):
    """Return the oracle's slices of one demo vocabulary on a JSON lines file."""
    folder = DEMO / "vocabularies" / name
    model = folder / "tokenizer.model"
    vocabulary = (
        oracle.open_sentencepiece(model)
        if model.exists()
        else oracle.open_tokenizers(folder / "tokenizer.json")
    )
    rows = [orjson.loads(line) for line in corpus.read_bytes().splitlines()]
    documents = [oracle.Document(row.pop("text"), row) for row in rows]
    return oracle.measure(documents, vocabulary, by=["lang"], limit=LIMITS.get(name), **settings)


@pytest.mark.parametrize("by_pieces", [True, False], ids=["pieces", "whole"])
@pytest.mark.parametrize("name", VOCABULARIES)
def test_every_number_equals_the_oracles(trouble, tmp_path, monkeypatch, name, by_pieces):
    """Troublesome texts: counts, intervals, lengths, whitespace and usage, whole and sliced."""
    monkeypatch.setattr(encoding, "_TOO_DIVERSE", 9.0)
    ours = assess(plan(trouble, name, whole=not by_pieces), tmp_path / "a").audit
    slices = ours["vocabularies"][0]["slices"]
    assert list(differences(slices, by_oracle(trouble, name))) == []


@pytest.mark.parametrize("name", VOCABULARIES)
def test_notices_by_pieces_equal_the_oracles(tmp_path, monkeypatch, name):
    """480 notices in eight languages, encoded piece by piece where that is proved."""
    monkeypatch.setattr(encoding, "_TOO_DIVERSE", 9.0)
    corpus = DEMO / "safety_notices.jsonl"
    ours = assess(plan(corpus, name), tmp_path / "a").audit["vocabularies"][0]["slices"]
    run = orjson.loads((tmp_path / "a" / "run.json").read_bytes())
    assert (run["documents"]["by_pieces"] > 0) is (name != "harbour-unigram")
    assert list(differences(ours, by_oracle(corpus, name))) == []


def test_origins_widen_the_intervals_as_the_oracle_says(trouble, tmp_path):
    """With ``--origin`` the sampling units are origins, for ratios and proportions alike."""
    name = "harbour-wordpiece"
    ours = assess(plan(trouble, name, origin="trip"), tmp_path / "a").audit
    slices = ours["vocabularies"][0]["slices"]
    assert list(differences(slices, by_oracle(trouble, name, origin="trip"))) == []


@pytest.mark.parametrize("setting", ["icu", "whitespace"])
def test_both_word_rules_equal_the_oracles(trouble, tmp_path, setting):
    """Words by UAX #29 and words by whitespace."""
    name = "harbour-bytelevel"
    ours = assess(plan(trouble, name, words=setting), tmp_path / "a").audit
    slices = ours["vocabularies"][0]["slices"]
    assert list(differences(slices, by_oracle(trouble, name, words=setting))) == []


def test_the_schema_holds(trouble, tmp_path):
    """Every audit is valid against the schema that ships with the package."""
    audit = assess(plan(trouble, *VOCABULARIES, graphemes=True, repeats=True), tmp_path / "a").audit
    jsonschema.Draft202012Validator(contract.schema()).validate(audit)
    assert audit["corpus"]["documents"] == 216


def test_repeats_are_counted(trouble, tmp_path):
    """216 documents hold 17 distinct texts: 199 are repeated (counted by hand)."""
    audit = assess(plan(trouble, "harbour-bytelevel", repeats=True), tmp_path / "a").audit
    found = audit["vocabularies"][0]["slices"]["all"]["figures"]["repeated_documents"]
    assert (found["numerator"], found["denominator"]) == (199, 216)
