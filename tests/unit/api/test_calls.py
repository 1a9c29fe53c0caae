"""The public functions: every kind of corpus, every result, and nothing left behind."""

from __future__ import annotations

import gc
import re
from pathlib import Path

import orjson
import pandas as pd
import pyarrow as pa
import pytest

import auditor
from auditor.runs.auditing import assess
from auditor.runs.plan import Plan
from auditor.vocabulary import VocabularySpec
from tests.unit.runs.conftest import DEMO

NOTICES = DEMO / "safety_notices.jsonl"
VOCABULARY = DEMO / "vocabularies" / "harbour-wordpiece"
BYTELEVEL = DEMO / "vocabularies" / "harbour-bytelevel"
ROWS = [orjson.loads(line) for line in NOTICES.read_bytes().splitlines()]
FRAME = pd.DataFrame(ROWS)

KINDS = {
    "path": lambda: str(NOTICES),
    "Path": lambda: NOTICES,
    "glob": lambda: str(DEMO / "safety_*.jsonl"),
    "paths": lambda: [NOTICES],
    "pandas": lambda: FRAME,
    "arrow": lambda: pa.Table.from_pylist(ROWS),
    "batches": lambda: pa.Table.from_pylist(ROWS).to_reader(7),
    "records": lambda: iter(ROWS),
    "list of records": lambda: ROWS,
}


@pytest.fixture(scope="module")
def expected(tmp_path_factory):
    """The audit of the file by the run that the command line makes."""
    from auditor.corpus import ReadOptions

    specs = (VocabularySpec(str(VOCABULARY)),)
    plan = Plan((str(NOTICES),), specs, ReadOptions(by=("lang",)))
    return assess(plan, tmp_path_factory.mktemp("e") / "a").audit


@pytest.mark.parametrize("kind", KINDS)
def test_every_kind_of_corpus_gives_the_same_figures(expected, kind):
    """A path, a table of either library, batches, records: one audit."""
    found = auditor.assess(KINDS[kind](), VOCABULARY, by="lang")
    assert found.document["vocabularies"] == expected["vocabularies"]
    same = ("digest", "documents", "bytes", "characters", "words", "set_aside")
    assert all(found.document["corpus"][n] == expected["corpus"][n] for n in same)


@pytest.mark.parametrize("texts", [FRAME["text"], FRAME["text"].to_list(), iter(FRAME["text"])])
def test_texts_are_documents(expected, texts):
    """A column, a list or an iterator of texts; the corpus is called by what it was."""
    found = auditor.assess(texts, VOCABULARY)
    whole = expected["vocabularies"][0]["slices"]["all"]["figures"]
    assert found.document["vocabularies"][0]["slices"]["all"]["figures"] == whole
    assert found.document["corpus"]["sources"] == ["the records given"]


def test_what_is_no_text_is_set_aside_and_counted():
    """None, a number, a record without text, a lone surrogate: as in a file."""
    items = ["one buoy", None, 7, {"lang": "en"}, {"text": None}, {"text": "mended \ud800"}]
    found = auditor.assess(items, VOCABULARY)
    corpus = found.document["corpus"]
    assert (corpus["documents"], corpus["set_aside"]["records"]) == (2, 4)
    assert corpus["mended"]["records"] == 1


def test_a_column_of_mixed_values_is_read_row_by_row():
    """Arrow has no such column; the text is read, the number set aside."""
    mixed = pd.DataFrame({"text": ["one buoy", 7], "lang": ["en", "en"]})
    corpus = auditor.assess(mixed, VOCABULARY).document["corpus"]
    assert (corpus["documents"], corpus["set_aside"]["records"]) == (1, 1)
    assert corpus["sources"] == ["the table given"]


@pytest.mark.parametrize("source", [7, b"bytes", {"text": "one record"}, None])
def test_what_is_no_corpus_is_refused(source):
    """With what may be given instead."""
    with pytest.raises(auditor.AuditError, match="nothing that can be read as a corpus") as refused:
        auditor.assess(source, VOCABULARY)
    assert "pandas or Arrow table" in refused.value.hint


def test_frames_hold_what_the_files_hold(tmp_path):
    """Figures, lengths, words, characters, documents: rows and types."""
    found = auditor.assess(NOTICES, [VOCABULARY, BYTELEVEL], by="lang", out=tmp_path / "a")
    assert found.folder == tmp_path / "a"
    figures = found.figures
    held = found.document["vocabularies"][1]["slices"]["lang=ja"]["figures"]["fertility"]
    row = figures[
        (figures["vocabulary"] == "harbour-bytelevel")
        & (figures["slice"] == "lang=ja")
        & (figures["figure"] == "fertility")
    ]
    assert row["value"].item() == held["value"]
    assert found.lengths["documents"].sum() == 2 * 480 * 2
    assert len(found.documents) == 480
    assert found.words["count"].dtype.kind == "i"
    assert (tmp_path / "a" / "words.csv").read_text(encoding="utf-8").count("\n") == 1 + len(
        found.words
    )
    assert set(found.characters["fate"]) <= {"unknown", "byte-spelled", "dropped"}


def test_the_word_null_stays_a_word():
    """A table that is read back does not take words for missing values."""
    found = auditor.assess(["null NaN NA nullnull"] * 3, BYTELEVEL)
    assert {"NaN", "NA", "null"} & set(found.words["word"])
    assert found.words["word"].notna().all()


def test_an_audit_feeds_a_length_plan_and_a_vetting(expected):
    """What comes of the result comes of its file."""
    audit = auditor.assess(NOTICES, VOCABULARY, by="lang")
    plan = auditor.plan_length(audit)
    assert plan.document["measured"] == "audit"
    assert plan.length == plan.document["recommended"]["length"]
    assert set(plan.candidates["length"]) >= {plan.length}
    vetted = auditor.domain(DEMO / "inspection_notes.jsonl", VOCABULARY, general=audit)
    assert vetted.document["general"]["documents"] == expected["corpus"]["documents"]
    texts = auditor.domain(ROWS[:50], VOCABULARY, general=[row["text"] for row in ROWS])
    assert texts.document["general"]["sources"] == ["the records given"]
    assert set(texts.penalty["figure"]) >= {"fertility"}


def test_plans_of_a_corpus_and_languages():
    """The same documents as the command line's, by their settings."""
    plan = auditor.plan_length(FRAME, VOCABULARY, candidates=[32, 64], accept_truncated=0.05)
    assert [own["length"] for own in plan.document["candidates"]] == [32, 64]
    assert plan.document["settings"]["accept_truncated"] == 0.05
    found = auditor.languages(FRAME, VOCABULARY, by="lang", parallel="notice", reference="en")
    assert set(found.languages["language"]) == {row["lang"] for row in ROWS}
    assert not found.scripts.empty


def test_a_policy_gives_verdicts(tmp_path):
    """The document of `policy.json` beside the audit; without a policy there is none."""
    path = tmp_path / "bounds.toml"
    path.write_text("[all]\nfertility = {max = 0.1}\n")
    found = auditor.assess(NOTICES, VOCABULARY, policy=path)
    assert [own["verdict"] for own in found.verdicts["verdicts"]] == ["fail"]
    assert auditor.assess(NOTICES, VOCABULARY).verdicts is None


def test_a_vocabulary_is_looked_into_without_a_corpus():
    """Every entry in the frame; the same document as the command's."""
    found = auditor.inspect([VOCABULARY, BYTELEVEL], width=8)
    first, second = (own["entries"] for own in found.document["vocabularies"])
    assert len(found.entries) == first + second
    assert found.entries["entry"].notna().all()
    assert len(found.unreachable) == 0
    assert "<table" in found._repr_html_()


def test_two_audits_are_compared(tmp_path):
    """Results and paths alike; the frame holds what the file holds."""
    before = auditor.assess(NOTICES, VOCABULARY)
    after = auditor.assess(DEMO / "inspection_notes.jsonl", VOCABULARY, out=tmp_path / "a")
    found = auditor.compare(before, after)
    again = auditor.compare(before, tmp_path / "a" / "audit.json", vocab="harbour-wordpiece")
    assert found.document["differences"] == again.document["differences"]
    assert set(found.differences["figure"]) >= {"fertility"}
    assert "<table" in found._repr_html_()


def test_progress_is_told_after_every_batch():
    """Documents read so far, up to all."""
    told = []
    auditor.assess(NOTICES, VOCABULARY, progress=told.append)
    assert told[-1].documents == 480


def test_a_result_shows_itself_in_a_notebook():
    """Sentences and a table, with text of the corpus and of file names escaped."""
    from xml.etree import ElementTree as ET

    results = [
        auditor.assess(["<b>bold</b> words"] * 3, VOCABULARY),
        auditor.plan_length(NOTICES, VOCABULARY),
        auditor.languages(FRAME, VOCABULARY, by="lang"),
        auditor.domain(NOTICES, [VOCABULARY, BYTELEVEL], general=DEMO / "everyday.txt"),
    ]
    for result in results:
        shown = result._repr_html_()
        assert "<table" in shown
        assert "<li>" in shown
        assert "<b>bold" not in shown
        ET.fromstring(f"<div>{shown.replace('&nbsp;', ' ')}</div>")  # noqa: S314 - ours


def test_results_are_written_and_kept_as_long_as_they_live(tmp_path):
    """The page and the JSON text; `save` copies all; a temporary folder ends with its result."""
    found = auditor.assess(NOTICES, VOCABULARY)
    folder = found.folder
    assert orjson.loads(found.to_json()) == found.document
    assert found.to_html().startswith("<!DOCTYPE html>")
    kept = found.save(tmp_path / "kept")
    assert {path.name for path in kept.iterdir()} == {path.name for path in folder.iterdir()}
    with pytest.raises(auditor.AuditError):
        found.save(tmp_path / "kept")
    del found
    gc.collect()
    assert not folder.exists()


def test_nothing_is_left_behind_when_a_run_fails(tmp_path, monkeypatch):
    """No temporary folder of a corpus or of a result."""
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))
    with pytest.raises(auditor.AuditError):
        auditor.assess(iter(["one"]), tmp_path / "no-vocabulary")
    assert list(tmp_path.iterdir()) == []


def test_names_that_are_not_there_are_no_attributes():
    """And those that are, are listed."""
    with pytest.raises(AttributeError, match="has no attribute 'evaluate'"):
        auditor.evaluate  # noqa: B018
    assert {"assess", "plan_length", "languages", "domain", "AuditError"} <= set(dir(auditor))


def test_the_example_of_the_readme_runs(tmp_path, monkeypatch, capsys):
    """The five lines under "From Python", as they stand, in a checkout."""
    monkeypatch.chdir(DEMO.parent)
    readme = Path("README.md").read_text(encoding="utf-8")
    example = re.search(r"## From Python\n.*?```python\n(.*?)```", readme, re.DOTALL)[1]
    assert len(list(filter(None, example.splitlines()))) == 5
    exec(compile(example, "README.md", "exec"), {})  # noqa: S102 - our own text
    assert capsys.readouterr().out.strip()
