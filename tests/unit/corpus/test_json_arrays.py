"""JSON files: an array, an object that holds one, or single records."""

from __future__ import annotations

import json

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.corpus.json_arrays import json_rows
from auditor.corpus.rows import Damage
from auditor.errors import CorpusError
from tests.unit.corpus.writing import read_bytes

LEAVES = st.none() | st.booleans() | st.integers(-9, 9) | st.text('a"\\{}[],:é\n', max_size=6)
KEYS = st.text("ab{", max_size=3)
VALUES = st.recursive(
    LEAVES,
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(KEYS, inner, max_size=3),
)
RECORDS = st.lists(st.dictionaries(KEYS, VALUES), min_size=1)


class Dribble:
    """Hands out a few bytes at a time, whatever is asked for."""

    damage = None

    def __init__(self, content, step):
        self._content = content
        self._step = step

    def read(self, _size):
        found, self._content = self._content[: self._step], self._content[self._step :]
        return found


@given(st.lists(VALUES, max_size=6), st.integers(1, 9), st.sampled_from([None, 1]))
def test_any_array_is_taken_apart_as_the_library_does(values, step, indent):
    """Brackets, commas and quotes inside strings part nothing, wherever blocks end."""
    content = json.dumps(values, indent=indent, ensure_ascii=False).encode()
    rows = list(json_rows(Dribble(content, step), "a.json"))
    assert [row[1] for row in rows] == values
    assert [row[0] for row in rows] == list(range(1, len(values) + 1))


@given(RECORDS, VALUES, st.integers(1, 9))
def test_an_object_that_holds_one_array_gives_its_records(records, other, step):
    """Whatever stands beside the array, before or behind it, is passed over."""
    kept = {} if isinstance(other, list) and other and isinstance(other[0], dict) else {"x": other}
    content = json.dumps({**kept, "notes": records, "count": 2}).encode()
    assert [row[1] for row in json_rows(Dribble(content, step), "a.json")] == records


def test_a_single_record_is_read(tmp_path):
    """An object that holds no array of objects is a record, spread over lines or not."""
    for indent in (None, 2):
        content = json.dumps({"text": "buoy", "tags": ["a"]}, indent=indent).encode()
        assert read_bytes(tmp_path, "a.json", content).texts == ["buoy"]


def test_a_single_conversation_is_no_array_of_records(tmp_path):
    """The messages of a record are its text."""
    content = json.dumps({"messages": [{"role": "user", "content": "buoy"}]}).encode()
    assert read_bytes(tmp_path, "a.json", content).texts == ["buoy"]


def test_json_lines_under_the_suffix_json_are_read(tmp_path):
    """Also when the records are spread over lines without commas between them."""
    for content in (b'{"text": "a"}\n{"text": "b"}\n', b'{\n"text": "a"\n}\n{\n"text": "b"\n}\n'):
        assert read_bytes(tmp_path, "a.json", content).texts == ["a", "b"]


def test_a_bad_record_in_an_array_loses_no_other(tmp_path):
    """Its place is its number in the array."""
    content = b'[{"text": "a"}, {"text": bad}, 7, {"text": "\\ud800"},, {"text": "b"},]'
    found = read_bytes(tmp_path, "a.json", content)
    assert (found.texts, found.lines) == (["a", "\ufffd", "b"], [1, 4, 6])
    assert found.places == [(2, "not valid JSON"), (3, "not an object"), (5, "not valid JSON")]


ENDS = {'{"text": "b': ["a"], '{"text": "b"}': ["a"], "": ["a"], '{"text": "b"},': ["a", "b"]}


@pytest.mark.parametrize("end", ENDS)
def test_an_array_that_ends_early_gives_what_came_before(end, tmp_path):
    """One record is set aside for all that is not there, the one before the cut included."""
    found = read_bytes(tmp_path, "a.json", ('[{"text": "a"},' + end).encode())
    assert found.texts == ENDS[end]
    assert [flaw.reason for flaw in found.set_aside] == ["JSON ends early"]


def test_text_behind_an_array_is_told(tmp_path):
    """It cannot be read, but it is not passed over in silence."""
    found = read_bytes(tmp_path, "a.json", b'[{"text": "a"}] and more')
    assert found.texts == ["a"]
    assert found.places == [(2, "not valid JSON")]


def test_several_arrays_of_records_are_refused(tmp_path):
    """Which one is the corpus is not guessed."""
    with pytest.raises(CorpusError, match="several arrays"):
        read_bytes(tmp_path, "a.json", b'{"old": [{"text": "a"}], "new": [{"text": "b"}]}')


def test_deep_and_bracketed_strings_do_not_confuse(tmp_path):
    """A record of 70,000 nested lists is set aside alone."""
    deep = b'{"text": "a", "x": ' + b"[" * 70_000 + b"]" * 70_000 + b"}"
    found = read_bytes(tmp_path, "a.json", b"[" + deep + b', {"text": "]},{"}]')
    assert found.texts == ["]},{"]
    assert found.places == [(1, "not valid JSON")]


def test_damage_rows_carry_their_number():
    """A record that cannot be parsed still takes a number."""
    rows = list(json_rows(Dribble(b"[1, x, 2]", 2), "a.json"))
    assert [type(row[1]) for row in rows] == [int, Damage, int]
    assert [row[0] for row in rows] == [1, 2, 3]
