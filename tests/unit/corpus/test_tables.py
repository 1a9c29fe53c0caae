"""Parquet and Arrow: columns, types and damage."""

from __future__ import annotations

import datetime as dt
import io
import random

import pyarrow as pa
import pyarrow.feather
import pyarrow.parquet as pq
import pytest

from auditor.corpus import ReadOptions, find_sources, read, resolve_fields
from auditor.errors import CorpusError
from tests.unit.corpus.writing import arrow, parquet, read_back, read_bytes

ROWS = [{"text": f"buoy {n}"} for n in range(9)]
STREAM, FILE = arrow(pa.ipc.new_stream), arrow(pa.ipc.new_file)


def write(path, columns):
    pq.write_table(pa.table(columns), path)
    return path


def test_null_text_is_set_aside_and_empty_text_is_not(tmp_path):
    """The place of a row is its number in the table, from 1."""
    found = read_back(write(tmp_path / "a.parquet", {"text": ["a", None, ""]}))
    assert (found.texts, found.lines) == (["a", ""], [1, 3])
    assert found.places == [(2, "field is null")]


def test_structures_are_reached_by_dots(tmp_path):
    """A dot reaches into a structure of a table as into an object."""
    path = write(tmp_path / "a.parquet", {"meta": [{"lang": "pt", "body": "boia"}], "n": [7]})
    found = read_back(path, text=("meta.body",), by=("meta.lang", "n"))
    assert found.texts == ["boia"]
    assert (found.column("meta.lang"), found.column("n")) == (["meta.lang=pt"], ["n=7"])


def test_a_column_of_another_type_is_set_aside_row_by_row(tmp_path):
    """The reason names the type."""
    found = read_back(write(tmp_path / "a.parquet", {"text": [1, 2]}), text=("text",))
    assert found.places == [(1, "field is a number"), (2, "field is a number")]


def test_bytes_that_are_no_text_are_set_aside(tmp_path):
    """A column of bytes is read where it holds UTF-8."""
    path = write(tmp_path / "a.parquet", {"text": pa.array([b"buoy", b"\xff\xd8"], pa.binary())})
    found = read_back(path, text=("text",))
    assert found.texts == ["buoy"]
    assert found.places == [(2, "field is no text")]


@pytest.mark.parametrize("kind", [pa.string(), pa.large_string()], ids=str)
@pytest.mark.parametrize("write_table", ["parquet", "stream"])
def test_invalid_utf_8_in_a_column_of_text_is_mended(write_table, kind, tmp_path):
    """Writers do not check it; the row is read with U+FFFD and told."""
    raw = pa.array([b"buoy", b"m\xe4st", None], pa.large_binary())
    column = pa.Array.from_buffers(pa.large_string(), 3, raw.buffers())
    if kind == pa.string():
        raw = pa.array([b"buoy", b"m\xe4st", None], pa.binary())
        column = pa.Array.from_buffers(pa.string(), 3, raw.buffers())
    out, table = io.BytesIO(), pa.table({"text": column})
    if write_table == "parquet":
        pq.write_table(table, out)
    else:
        with pa.ipc.new_stream(out, table.schema) as writer:
            writer.write_table(table)
    found = read_bytes(tmp_path, "a.parquet", out.getvalue())
    assert found.texts == ["buoy", "m\ufffdst"]
    assert [(f.line, f.reason, f.detail) for f in found.mended] == [(2, "invalid UTF-8", "byte 2")]


def test_dates_and_decimals_make_slice_keys(tmp_path):
    """Values that JSON has not are spelled as text."""
    path = write(tmp_path / "a.parquet", {"text": ["a"], "day": [dt.date(2031, 5, 4)]})
    assert read_back(path, by=("day",)).column("day") == ['day="2031-05-04"']


def test_the_suffix_does_not_decide(tmp_path):
    """A table under another table's suffix, or under that of text, is read as what it is."""
    for name in ("a.arrow", "a.txt", "a.jsonl"):
        assert read_bytes(tmp_path, name, parquet(ROWS)).texts == [r["text"] for r in ROWS]
    assert read_bytes(tmp_path, "a.parquet", STREAM(ROWS)).texts == [r["text"] for r in ROWS]


def test_a_parquet_file_that_was_cut_short_is_told(tmp_path):
    """Its directory lies at the end: nothing can be read, one record is set aside."""
    found = read_bytes(tmp_path, "a.parquet", parquet(ROWS)[:-10])
    assert found.texts == []
    assert found.places == [(1, "table is damaged")]


def test_a_parquet_file_damaged_in_the_middle_gives_what_came_before(tmp_path):
    """The row groups before the damage are measured."""
    rows = [{"text": "%064x" % (n * 7919**9)} for n in range(9)]
    content = bytearray(parquet(rows))
    facts = pq.ParquetFile(io.BytesIO(content)).metadata
    start = facts.row_group(1).column(0).dictionary_page_offset
    content[start : start + 40] = b"\xff" * 40
    found = read_bytes(tmp_path, "a.parquet", bytes(content), batch_bytes=64)
    assert found.texts == [row["text"] for row in rows[:3]]
    assert [(f.line, f.reason, f.detail) for f in found.set_aside] == [
        (4, "table is damaged", "after row 3")
    ]


@pytest.mark.parametrize("write_table", [STREAM, FILE], ids=["stream", "file"])
def test_an_arrow_table_cut_anywhere_gives_whole_batches(write_table, tmp_path):
    """Never a row that was not there, never a row lost before the cut, always told."""
    content = write_table(ROWS)
    whole = [row["text"] for row in ROWS]
    for cut in range(16, len(content) - 10, 7):
        found = read_bytes(tmp_path, "a.arrow", content[:cut])
        assert found.texts == whole[: len(found.texts)]
        assert len(found.texts) % 3 == 0
        assert len(found.set_aside) == 1 or write_table is STREAM


def test_offsets_outside_the_data_are_damage(tmp_path):
    """A file may hold anything: offsets are checked before they are followed."""
    content = bytearray(STREAM([{"text": "mast"}] * 6))
    offsets = b"".join(n.to_bytes(4, "little") for n in (0, 4, 8, 12))
    second = content.rindex(offsets) + 4
    content[second : second + 4] = (1 << 30).to_bytes(4, "little")
    found = read_bytes(tmp_path, "a.arrow", bytes(content))
    assert found.texts == ["mast"] * 3
    assert found.places == [(4, "table is damaged")]


def test_an_empty_table_file_is_damaged_and_not_unknown(tmp_path):
    """A failed copy is told as a record that was set aside, beside files that are whole."""
    (tmp_path / "a.parquet").write_bytes(b"")
    (tmp_path / "b.arrow").write_bytes(b"")
    found = read_bytes(tmp_path, "c.parquet", parquet(ROWS))
    assert found.texts == [row["text"] for row in ROWS]
    found = read_back(tmp_path)
    assert found.places == [(1, "table is damaged")] * 2


def test_the_first_version_of_feather_is_refused(tmp_path):
    """The error says what to write instead."""
    with pytest.raises(CorpusError, match="Parquet or Arrow"):
        read_bytes(tmp_path, "a.feather", b"FEA1" + bytes(20) + b"FEA1")


def test_feather_of_the_second_version_is_read(tmp_path):
    """The library's own writer compresses by default."""
    pyarrow.feather.write_feather(pa.table({"text": ["a", "b"]}), str(tmp_path / "a.feather"))
    assert read_back(tmp_path / "a.feather").texts == ["a", "b"]


def test_a_table_without_the_field_sets_its_rows_aside(tmp_path):
    """In a corpus of several files one may lack the field."""
    write(tmp_path / "a.parquet", {"text": ["a"]})
    write(tmp_path / "b.parquet", {"note": ["b", "c"]})
    found = read_back(tmp_path)
    assert found.texts == ["a"]
    assert found.places == [(1, "field missing"), (2, "field missing")]


def test_a_row_group_is_not_held_whole(tmp_path):
    """Files of a single row group are common: only its pages at hand are in memory."""
    texts = [random.Random(n).randbytes(1500).hex() for n in range(10_000)]
    pq.write_table(pa.table({"text": texts}), tmp_path / "a.parquet", use_dictionary=False)
    [source] = find_sources([str(tmp_path / "a.parquet")])
    fields = resolve_fields([source], ReadOptions())
    before = pa.total_allocated_bytes()
    batches = read([source], ReadOptions(batch_bytes=1 << 19), fields)
    held = [pa.total_allocated_bytes() - before for _ in batches]
    assert len(held) > 25
    assert max(held) < 8_000_000
