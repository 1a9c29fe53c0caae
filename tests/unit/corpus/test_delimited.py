"""CSV and TSV: everything is text, and broken quoting costs one row only."""

from __future__ import annotations

import pytest

from auditor.errors import CorpusError
from tests.unit.corpus.writing import read_bytes

HEAD = b"lang,text\n"


def test_nothing_is_taken_for_a_missing_value(tmp_path):
    """NA, null, empty cells and numbers are the text they are."""
    cells = ["NA", "null", "NaN", "", "007", "1e5", "TRUE"]
    content = HEAD + "".join(f"en,{cell}\n" for cell in cells).encode()
    assert read_bytes(tmp_path, "a.csv", content).texts == cells


def test_line_ends_inside_quotes_belong_to_the_text(tmp_path):
    """The place of a row is the physical line it begins in."""
    content = HEAD + b'en,"a\r\nb\n\nc"\r\nen,d\r\n\nen,e'
    found = read_bytes(tmp_path, "a.csv", content)
    assert (found.texts, found.lines) == (["a\r\nb\n\nc", "d", "e"], [2, 6, 8])


def test_rows_of_another_width_are_set_aside(tmp_path):
    """The detail gives both numbers; blank lines are no rows."""
    found = read_bytes(tmp_path, "a.csv", HEAD + b"en,a\nen\n\nen,b,c\nen,d\n")
    assert found.texts == ["a", "d"]
    assert found.places == [(3, "wrong number of columns"), (5, "wrong number of columns")]
    assert found.set_aside[0].detail == "1 instead of 2"


def test_a_quote_that_is_never_closed_costs_no_other_row(tmp_path):
    """Its line is read without quoting where the columns fit, and told as mended."""
    content = HEAD + b'en,a\nen,"b\n' + b"en,c\n" * 50
    found = read_bytes(tmp_path, "a.csv", content)
    assert found.texts == ["a", '"b'] + ["c"] * 50
    assert found.lines == list(range(2, 54))
    assert [(f.line, f.reason) for f in found.mended] == [(3, "broken quoting read as text")]


def test_text_after_a_closing_quote_is_not_dropped(tmp_path):
    """Where the columns fit the row is read as it stands, else it is set aside alone."""
    content = HEAD + b'en,"b"c\nen,"d, "e", f"\nen,g\n'
    found = read_bytes(tmp_path, "a.csv", content)
    assert found.texts == ['"b"c', "g"]
    assert found.places == [(3, "quoting is broken")]


def test_broken_quoting_after_several_lines_goes_back_to_the_second(tmp_path):
    """The lines that a stray quote swallowed are parsed again."""
    content = HEAD + b'en,"a\nen,b\nen,c" d\nen,"e\n\nf"\n'
    found = read_bytes(tmp_path, "a.csv", content)
    assert (found.texts, found.lines) == (['"a', "b", 'c" d', "e\n\nf"], [2, 3, 4, 5])


def test_quotes_inside_a_cell_are_literal(tmp_path):
    """Only a quote at the beginning of a cell opens a quoted one."""
    assert read_bytes(tmp_path, "a.tsv", b'lang\ttext\nen\t5" mast\n').texts == ['5" mast']


@pytest.mark.parametrize("delimiter", [";", "\t"])
def test_the_delimiter_is_found_where_the_header_has_no_comma(delimiter, tmp_path):
    """So that a whole row is not taken for the text of a single column."""
    content = f"lang{delimiter}text\nen{delimiter}a, b\n".encode()
    assert read_bytes(tmp_path, "a.csv", content).texts == ["a, b"]


def test_invalid_utf_8_in_a_row_is_mended(tmp_path):
    """The byte is counted from 1 in the row; rows before and after are as they were."""
    found = read_bytes(tmp_path, "a.csv", HEAD + b"en,a\nen,b\xff\nen,\xc3\xa9\n")
    assert found.texts == ["a", "b\ufffd", "é"]
    [flaw] = found.mended
    assert (flaw.line, flaw.reason, flaw.detail) == (3, "invalid UTF-8", "byte 5")


def test_a_byte_order_mark_is_no_part_of_the_first_name(tmp_path):
    """Spreadsheets write one (common practice, no source)."""
    assert read_bytes(tmp_path, "a.csv", b"\xef\xbb\xbftext\nbuoy\n").texts == ["buoy"]


def test_a_nul_and_a_large_cell_are_kept(tmp_path):
    """The parser's own limit of 131,072 characters does not hold here."""
    long = "x" * 200_000
    content = f'lang,text\nen,"{long}"\nen,a\0b\n'.encode()
    assert read_bytes(tmp_path, "a.csv", content).texts == [long, "a\0b"]


def test_a_header_that_cannot_be_read_is_an_error(tmp_path):
    """Without it the cells have no names."""
    with pytest.raises(CorpusError, match=r"a\.csv:1: the first row"):
        read_bytes(tmp_path, "a.csv", b'lang,"text\nen,a\n')


def test_a_carriage_return_alone_inside_a_row_is_text(tmp_path):
    """The parser refuses it; the row is read as it stands and told as mended."""
    found = read_bytes(tmp_path, "a.csv", HEAD + b"en,a\rb\nen,c\n")
    assert found.texts == ["a\rb", "c"]
    assert [flaw.line for flaw in found.mended] == [2]
