"""JSON lines: every flaw costs its own record only."""

from __future__ import annotations

import json

import pytest

from auditor.errors import CorpusError
from tests.unit.corpus.writing import read_bytes

GOOD = b'{"text": "buoy"}\n'
FLAWED = [
    (b'{"text": "mast"', "not valid JSON"),
    (b'{"text": "ma\tst"}', "not valid JSON"),
    (b"\x0c", "not valid JSON"),
    (b"[" * 100_000, "not valid JSON"),
    (b'{"text": "a", "n": ' + b"9" * 5000 + b"} x", "not valid JSON"),
    (b"null", "not an object"),
    (b"17", "not an object"),
    (b'"mast"', "not an object"),
    (b'["mast"]', "not an object"),
    (b'{"note": "mast"}', "field missing"),
    (b'{"text": null}', "field is null"),
    (b'{"text": 4.5}', "field is a number"),
    (b'{"text": true}', "field is a boolean"),
    (b'{"text": ["mast"]}', "field is a list"),
    (b'{"text": {"en": "mast"}}', "field is an object"),
]


@pytest.mark.parametrize(("line", "reason"), FLAWED, ids=lambda value: str(value)[:24])
def test_a_flawed_record_is_set_aside_alone(line, reason, tmp_path):
    """It is told with its line and reason; its neighbours are read."""
    found = read_bytes(tmp_path, "a.jsonl", GOOD + line + b"\n" + GOOD)
    assert (found.texts, found.lines) == (["buoy", "buoy"], [1, 3])
    assert found.places == [(2, reason)]


def test_blank_lines_are_no_flaws(tmp_path):
    """Blank lines and carriage returns at line ends are JSON's own whitespace."""
    found = read_bytes(tmp_path, "a.jsonl", b'\r\n{"text": "buoy"}\r\n \t\n\n{"text": ""}')
    assert (found.texts, found.lines) == (["buoy", ""], [2, 5])
    assert not found.set_aside


def test_escapes_and_line_separators_stay_in_the_text(tmp_path):
    """Escaped line ends and an unescaped U+2028 do not part a record."""
    line = '{"text": "a\\r\\nb\\u0000\u2028c"}\n'
    assert read_bytes(tmp_path, "a.jsonl", line.encode()).texts == ["a\r\nb\0\u2028c"]


def test_of_a_repeated_key_the_last_counts(tmp_path):
    """Common practice, no source: RFC 8259 leaves it open and most parsers do so."""
    assert read_bytes(tmp_path, "a.jsonl", b'{"text": "a", "text": "b"}\n').texts == ["b"]


@pytest.mark.parametrize(
    ("escaped", "text"),
    [
        (r"a\ud83db", "a\ufffdb"),
        (r"a\udca1", "a\ufffd"),
        (r"\ud83d\ud83d\ude00", "\ufffd\U0001f600"),
        (r"\\ud83d\ud83d", "\\ud83d\ufffd"),
    ],
)
def test_a_lone_surrogate_becomes_a_replacement(escaped, text, tmp_path):
    """Pairs stay, escaped backslashes are no escapes, and the record is told as mended."""
    content = GOOD + b'{"text": "' + escaped.encode() + b'"}\n'
    found = read_bytes(tmp_path, "a.jsonl", content)
    assert found.texts == ["buoy", text]
    assert [(flaw.line, flaw.reason) for flaw in found.mended] == [(2, "lone surrogate")]


def test_a_lone_surrogate_in_a_slice_key_harms_nothing(tmp_path):
    """Keys of slices can be written as UTF-8 too."""
    found = read_bytes(tmp_path, "a.jsonl", rb'{"text": "a", "lang": "\ud800"}', by=("lang",))
    assert found.column("lang") == ["lang=\ufffd"]


def test_invalid_utf_8_in_a_record_is_mended(tmp_path):
    """The detail gives the byte in the line, counted from 1."""
    found = read_bytes(tmp_path, "a.jsonl", GOOD + b'{"text": "m\xe4st"}\n')
    assert found.texts == ["buoy", "m\ufffdst"]
    [flaw] = found.mended
    assert (flaw.line, flaw.reason, flaw.detail) == (2, "invalid UTF-8", "byte 12")


def test_a_number_that_json_has_not_loses_no_record(tmp_path):
    """NaN in another field is let through and told."""
    found = read_bytes(tmp_path, "a.jsonl", b'{"text": "buoy", "depth": NaN}\n')
    assert found.texts == ["buoy"]
    assert [flaw.detail for flaw in found.mended] == ["NaN"]


def test_a_record_that_is_set_aside_is_not_told_as_mended_too(tmp_path):
    """Each flawed record is counted once."""
    found = read_bytes(tmp_path, "a.jsonl", GOOD + b'{"note": "m\xe4st"}\n')
    assert (len(found.set_aside), found.mended) == (1, [])


def test_strict_ends_at_the_first_flaw_with_its_place(tmp_path):
    """A record that could only be mended counts as damaged as well."""
    for line in (b'{"text": null}\n', b'{"text": "m\xe4st"}\n'):
        with pytest.raises(CorpusError, match=r"a\.jsonl:2: "):
            read_bytes(tmp_path, "a.jsonl", GOOD + line, strict=True)


def test_a_row_over_64_mebibytes_is_read(tmp_path):
    """Block readers of JSON fail there; lines have no limit here."""
    text = "x" * (65 << 20)
    found = read_bytes(tmp_path, "a.jsonl", GOOD + json.dumps({"text": text}).encode() + b"\n")
    assert found.texts[1] == text


def test_a_file_that_is_one_array_is_read_as_one(tmp_path):
    """The content wins over the suffix."""
    found = read_bytes(tmp_path, "a.jsonl", b'[{"text": "buoy"}, {"text": "mast"}]\n')
    assert found.texts == ["buoy", "mast"]


def test_rows_that_are_arrays_are_set_aside(tmp_path):
    """Lines that each hold an array are not one array."""
    found = read_bytes(tmp_path, "a.jsonl", b'[{"text": "buoy"}]\n' + GOOD)
    assert found.texts == ["buoy"]
    assert found.places == [(1, "not an object")]
