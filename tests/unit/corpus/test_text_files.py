"""Plain text: lines, marks and bytes that are no UTF-8."""

from __future__ import annotations

import codecs

import pytest

from auditor.errors import CorpusError, SettingsError
from tests.unit.corpus.writing import read_bytes


def test_only_the_line_feed_ends_a_line(tmp_path):
    """U+2028, U+0085, vertical tab and form feed stay inside a document."""
    text = "one\u2028two\x85three\x0bfour\x0cfive\nsix"
    assert read_bytes(tmp_path, "a.txt", text.encode()).texts == text.split("\n")


def test_lines_are_numbered_as_in_the_file(tmp_path):
    """Blank lines are skipped and counted, so that a place can be found again."""
    found = read_bytes(tmp_path, "a.txt", b"\nbuoy\n \t\r\n\nmast\n")
    assert (found.texts, found.lines) == (["buoy", "mast"], [2, 5])
    assert not found.set_aside


def test_a_carriage_return_at_the_line_end_is_no_text(tmp_path):
    """Exactly one is taken off each line, and nothing counts as mended."""
    found = read_bytes(tmp_path, "a.txt", b"buoy\r\nlight\r\r\nmast\r")
    assert found.texts == ["buoy", "light\r", "mast"]
    assert not found.mended


def test_paragraphs_keep_their_inner_line_ends(tmp_path):
    """Inside a paragraph a carriage return stays; its place is its first line."""
    found = read_bytes(tmp_path, "a.txt", b"a\r\nb\r\n\r\nc\n", unit="paragraph")
    assert (found.texts, found.lines) == (["a\r\nb", "c"], [1, 4])


def test_a_byte_order_mark_is_stripped_at_the_start_only(tmp_path):
    """A second mark, and one in a later line, are characters of the text."""
    mark = codecs.BOM_UTF8
    found = read_bytes(tmp_path, "a.txt", mark + mark + b"buoy\n" + mark + b"mast\n")
    assert found.texts == ["\ufeffbuoy", "\ufeffmast"]


def test_a_file_of_nothing_but_a_mark_holds_no_line(tmp_path):
    """The mark is not taken for a document."""
    assert read_bytes(tmp_path, "a.txt", codecs.BOM_UTF8, unit="line").texts == []


def test_invalid_utf_8_is_replaced_measured_and_told(tmp_path):
    """The flaw gives the line and the byte, counted from 1 in the line."""
    found = read_bytes(tmp_path, "a.txt", b"buoy\nli\xe9ght\xff\nmast\n")
    assert found.texts == ["buoy", "li\ufffdght\ufffd", "mast"]
    [flaw] = found.mended
    assert (flaw.line, flaw.reason, flaw.detail) == (2, "invalid UTF-8", "byte 3")


def test_a_nul_is_kept(tmp_path):
    """NUL is a character like any other."""
    assert read_bytes(tmp_path, "a.txt", b"a\0b\n").texts == ["a\0b"]


@pytest.mark.parametrize("encoding", ["utf-16", "utf-16-le", "utf-32", "utf-8-sig"])
def test_a_named_encoding_is_that_of_whole_files(encoding, tmp_path):
    """Line feeds are found in the decoded text, not in its bytes."""
    content = "żuraw ਊ\nmast\n".encode(encoding)
    assert read_bytes(tmp_path, "a.txt", content, encoding=encoding).texts == ["żuraw ਊ", "mast"]


def test_what_a_named_encoding_cannot_decode_is_mended(tmp_path):
    """Each undecodable place becomes one U+FFFD in the document it lies in."""
    found = read_bytes(tmp_path, "a.txt", b"buoy\nma\x81st\n", encoding="cp1252")
    assert found.texts == ["buoy", "ma\ufffdst"]
    assert [flaw.line for flaw in found.mended] == [2]


def test_utf_16_is_not_taken_for_utf_8(tmp_path):
    """Its mark gives an error that names the option."""
    with pytest.raises(CorpusError, match="--encoding utf-16"):
        read_bytes(tmp_path, "a.txt", "buoy\n".encode("utf-16"))


def test_an_unknown_encoding_is_refused(tmp_path):
    """So is a codec that is no encoding of text."""
    for name in ("utf-61", "hex"):
        with pytest.raises(SettingsError, match="no encoding"):
            read_bytes(tmp_path, "a.txt", b"buoy\n", encoding=name)


def test_an_empty_file_has_no_line_but_is_a_document(tmp_path):
    """Units of lines find nothing; a file is one document, empty as it is."""
    assert read_bytes(tmp_path, "a.txt", b"").texts == []
    assert read_bytes(tmp_path, "a.txt", b"", unit="file").texts == [""]


def test_units_are_for_plain_text(tmp_path):
    """Where a format has records another unit is refused."""
    with pytest.raises(SettingsError, match="plain text"):
        read_bytes(tmp_path, "a.jsonl", b'{"text": "buoy"}\n', unit="line")


def test_a_long_line_is_one_document(tmp_path):
    """A line far over the block size comes whole, and so does what follows it."""
    found = read_bytes(tmp_path, "a.txt", b"x" * 3_000_001 + b"\nmast")
    assert [len(text) for text in found.texts] == [3_000_001, 4]
