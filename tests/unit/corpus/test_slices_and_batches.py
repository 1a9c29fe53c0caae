"""Slice keys, origins, and where batches are cut."""

from __future__ import annotations

import pytest

from auditor.errors import SettingsError
from tests.unit.corpus.writing import json_lines, read_back, read_bytes


@pytest.mark.parametrize(
    ("value", "key"),
    [
        ("pt", "pt"), ("", ""), (7, "7"), (1.0, "1.0"), (True, "true"), (None, "(none)"),
        (["a", "é"], '["a","é"]'), ({"a": 1}, '{"a":1}'),
    ],
)  # fmt: skip
def test_slice_keys_spell_the_value(value, key, tmp_path):
    """Text as it is, everything else as compact JSON, null as (none)."""
    content = json_lines([{"text": "a", "x": value}])
    assert read_bytes(tmp_path, "a.jsonl", content, by=("x",)).column("x") == [f"x={key}"]


def test_a_missing_value_is_none(tmp_path):
    """A record without the field has its slice."""
    content = json_lines([{"text": "a", "x": "b"}, {"text": "c"}])
    assert read_bytes(tmp_path, "a.jsonl", content, by=("x",)).column("x") == ["x=b", "x=(none)"]


def test_dots_reach_into_objects_where_no_field_has_the_name(tmp_path):
    """The flat name wins, level by level."""
    rows = [
        {"text": "a", "meta": {"lang": "pt"}},
        {"text": "b", "meta.lang": "de", "meta": {"lang": "pt"}},
        {"text": "c", "meta": "x"},
    ]
    found = read_bytes(tmp_path, "a.jsonl", json_lines(rows), by=("meta.lang",))
    assert found.column("meta.lang") == ["meta.lang=pt", "meta.lang=de", "meta.lang=(none)"]


def test_the_source_is_the_file_unless_it_is_a_field(tmp_path):
    """A pseudo-field never hides a field."""
    content = json_lines([{"text": "a", "x": 1}])
    found = read_bytes(tmp_path, "a.jsonl", content, by=("source",))
    assert found.column("source") == [f"source={tmp_path / 'a.jsonl'}"]
    content = json_lines([{"text": "a", "source": "log"}])
    found = read_bytes(tmp_path, "a.jsonl", content, by=("source",))
    assert found.column("source") == ["source=log"]


def test_a_document_without_an_origin_is_its_own(tmp_path):
    """It was drawn by itself: no other document shares its origin."""
    content = json_lines([{"text": "a", "notice": 7}, {"text": "b", "notice": None}, {"text": "c"}])
    [batch] = read_bytes(tmp_path, "a.jsonl", content, origin="notice").batches
    path = tmp_path / "a.jsonl"
    assert batch.origins == ["7", f"{path}:2", f"{path}:3"]


def test_text_beside_records_has_no_fields(tmp_path):
    """Its documents go into the slice of those without the field."""
    (tmp_path / "a.jsonl").write_bytes(json_lines([{"text": "a", "lang": "pt", "id": 3}]))
    (tmp_path / "b.txt").write_text("buoy\n")
    found = read_back(tmp_path, by=("lang",))
    assert found.column("lang") == ["lang=pt", "lang=(none)"]
    assert [batch.identifiers for batch in found.batches] == [["3"], [""]]


def test_batches_are_cut_at_their_bytes(tmp_path):
    """A batch is full once it holds that many UTF-8 bytes; the last document may exceed them."""
    found = read_bytes(tmp_path, "a.txt", "é\né\nabcdefgh\na\n".encode(), batch_bytes=4)
    assert [batch.texts for batch in found.batches] == [["é", "é"], ["abcdefgh"], ["a"]]


def test_batches_are_cut_at_their_documents_and_at_the_file(tmp_path):
    """They are numbered through, and none mixes two sources."""
    (tmp_path / "a.txt").write_text("1\n2\n3\n")
    (tmp_path / "b.txt").write_text("4\n")
    found = read_back(tmp_path, batch_documents=2)
    assert [batch.texts for batch in found.batches] == [["1", "2"], ["3"], ["4"]]
    assert [batch.number for batch in found.batches] == [0, 1, 2]
    named = [str(tmp_path / name) for name in ("a.txt", "a.txt", "b.txt")]
    assert [batch.source for batch in found.batches] == named


def test_flaws_travel_with_the_documents_around_them(tmp_path):
    """Those behind the last document come in a batch of their own."""
    content = b'no\n{"text": "a"}\n{"text": "b"}\n7\n'
    found = read_bytes(tmp_path, "a.jsonl", content, batch_documents=2)
    held = [(batch.texts, [flaw.line for flaw in batch.set_aside]) for batch in found.batches]
    assert held == [(["a", "b"], [1]), ([], [4])]


def test_flaws_alone_do_not_gather_without_end(tmp_path):
    """A corpus of nothing but flaws comes in batches too."""
    found = read_bytes(tmp_path, "a.jsonl", b"no\n" * 10, batch_documents=4)
    assert [len(batch.set_aside) for batch in found.batches] == [4, 4, 2]


def test_an_empty_file_between_others_takes_no_number(tmp_path):
    """Numbers stay without gaps."""
    for name, text in (("a.txt", "1\n"), ("b.txt", ""), ("c.txt", "2\n")):
        (tmp_path / name).write_text(text)
    assert [batch.number for batch in read_back(tmp_path).batches] == [0, 1]


def test_a_batch_must_hold_something(tmp_path):
    """Zero is refused."""
    for options in ({"batch_bytes": 0}, {"batch_documents": 0}):
        with pytest.raises(SettingsError, match="at least one"):
            read_bytes(tmp_path, "a.txt", b"a\n", **options)


def test_reading_is_lazy(tmp_path):
    """The first batch comes before the rest of the file is read."""
    content = "".join(f"buoy {n}\n" for n in range(400_000)).encode()
    found = read_bytes(tmp_path, "a.txt", content, batch_documents=1000)
    assert found.batches[0].read_bytes < len(content) / 4
    assert found.batches[-1].read_bytes == len(content)
