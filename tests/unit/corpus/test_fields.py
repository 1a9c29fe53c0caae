"""Which fields hold the text: named or found by rules, never guessed."""

from __future__ import annotations

import pytest

from auditor.corpus import ReadOptions, find_sources, resolve_fields
from auditor.errors import CorpusError
from tests.unit.corpus.writing import json_lines, read_bytes


def resolve(folder, record, name="a.jsonl", **options):
    (folder / name).write_bytes(record if isinstance(record, bytes) else json_lines([record]))
    return resolve_fields(find_sources([str(folder / name)]), ReadOptions(**options))


@pytest.mark.parametrize(
    "name",
    ["text", "content", "raw_content", "document", "body", "sentence", "abstract", "review"],
)
def test_the_usual_names_are_found_among_others(name, tmp_path):
    """One of them that holds text is enough, whatever else there is."""
    assert resolve(tmp_path, {"title": "A", name: "b", "lang": "pt"}).text == (name,)


def test_a_usual_name_without_text_does_not_count(tmp_path):
    """A number called text leaves the one that holds a text."""
    assert resolve(tmp_path, {"text": 7, "body": "b"}).text == ("body",)


def test_several_usual_names_are_listed(tmp_path):
    """The error names them and the option."""
    with pytest.raises(CorpusError, match=r"text, body\. Name one with --text"):
        resolve(tmp_path, {"text": "a", "body": "b"})


def test_the_named_field_wins(tmp_path):
    """Even when usual names are there."""
    record = {"text": "a", "body": "b", "meta": {"note": "c"}}
    assert resolve(tmp_path, record, text=("meta.note",)).text == ("meta.note",)


def test_the_only_field_of_text_is_taken(tmp_path):
    """Whatever its name."""
    assert resolve(tmp_path, {"remark": "a", "depth": 7}).text == ("remark",)


def test_unknown_names_are_listed(tmp_path):
    """All that is there is told."""
    with pytest.raises(CorpusError, match="There: remark, author, depth"):
        resolve(tmp_path, {"remark": "a", "author": "b", "depth": 7})


@pytest.mark.parametrize(
    ("one", "other"),
    [
        ("premise", "hypothesis"), ("question", "context"), ("query", "passage"),
        ("source", "target"),
    ],
)  # fmt: skip
def test_pairs_are_not_joined_unasked(one, other, tmp_path):
    """The error gives the option that joins them."""
    with pytest.raises(CorpusError, match=f"--text {one},{other}"):
        resolve(tmp_path, {one: "a", other: "b"})


def test_named_fields_are_joined_in_their_order(tmp_path):
    """By a line feed; a record that lacks one is set aside."""
    rows = [{"query": "a", "passage": "b"}, {"query": "c"}, {"query": "d", "passage": ""}]
    found = read_bytes(tmp_path, "a.jsonl", json_lines(rows), text=("passage", "query"))
    assert found.texts == ["b\na", "\nd"]
    [flaw] = found.set_aside
    assert (flaw.line, flaw.reason, flaw.detail) == (2, "field missing", "passage")


@pytest.mark.parametrize("option", ["text", "by", "origin", "identifier"])
def test_a_named_field_that_is_nowhere_is_an_error(option, tmp_path):
    """With the list of those there."""
    value = ("land",) if option in {"text", "by"} else "land"
    with pytest.raises(CorpusError, match=r"a\.jsonl: there is no field land\. There: text, lang"):
        resolve(tmp_path, {"text": "a", "lang": "pt"}, **{option: value})


def test_plain_text_has_the_file_name_only(tmp_path):
    """Slices by the file are possible, by another field or with --text not."""
    assert resolve(tmp_path, b"buoy\n", "a.txt", by=("source",)).text == ()
    with pytest.raises(CorpusError, match="only the pseudo-field source"):
        resolve(tmp_path, b"buoy\n", "a.txt", by=("lang",))
    with pytest.raises(CorpusError, match="no fields"):
        resolve(tmp_path, b"buoy\n", "a.txt", text=("text",))


@pytest.mark.parametrize("name", ["id", "_id", "uid", "guid"])
def test_the_identifier_is_found(name, tmp_path):
    """By the usual names, the first of them."""
    assert resolve(tmp_path, {"text": "a", name: "n-1"}).identifier == name


def test_identifiers_are_read_as_text(tmp_path):
    """One that is missing or null is empty; a named field wins."""
    rows = [{"text": "a", "id": 17, "n": "x"}, {"text": "b", "id": None}, {"text": "c"}]
    found = read_bytes(tmp_path, "a.jsonl", json_lines(rows))
    assert found.batches[0].identifiers == ["17", "", ""]
    found = read_bytes(tmp_path, "a.jsonl", json_lines(rows), identifier="n")
    assert found.batches[0].identifiers == ["x", "", ""]


def test_records_are_looked_for_behind_damaged_ones(tmp_path):
    """The first look does not end at a hundred damaged lines."""
    found = read_bytes(tmp_path, "a.jsonl", b"no\n" * 500 + b'{"remark": "a"}\n')
    assert found.texts == ["a"]
    assert len(found.set_aside) == 500


def test_without_a_single_record_all_is_set_aside(tmp_path):
    """Reading goes on, so that every reason is told."""
    found = read_bytes(tmp_path, "a.jsonl", b"no\n7\n")
    assert found.places == [(1, "not valid JSON"), (2, "not an object")]


def test_fields_are_told_for_the_settings(tmp_path):
    """As JSON values."""
    told = resolve(tmp_path, {"text": "a", "id": 1}).as_json()
    assert told == {"text": ["text"], "conversation": False, "identifier": "id"}
