"""Conversations: messages become one text."""

from __future__ import annotations

import pyarrow as pa
import pyarrow.parquet as pq
import pytest

from auditor.errors import CorpusError
from tests.unit.corpus.writing import json_lines, read_back, read_bytes

TALK = [
    {"role": "user", "content": "Is the buoy lit?"},
    {"role": "assistant", "content": "No."},
]


def conversation(tmp_path, messages, **options):
    rows = [{"messages": TALK}, {"messages": messages}]
    return read_bytes(tmp_path, "a.jsonl", json_lines(rows), **options)


def test_contents_are_joined_by_line_feeds(tmp_path):
    """Without a way to render them."""
    assert conversation(tmp_path, TALK[1:]).texts == ["Is the buoy lit?\nNo.", "No."]


def test_parts_of_a_content_are_joined_and_null_adds_nothing(tmp_path):
    """A content may be a list of parts of text, or null."""
    parts = [{"type": "text", "text": "Is it "}, {"type": "text", "text": "lit?"}]
    messages = [{"role": "user", "content": parts}, {"role": "assistant", "content": None}]
    assert conversation(tmp_path, messages).texts[1] == "Is it lit?"


@pytest.mark.parametrize(
    "messages",
    [
        [], "buoy", None, ["buoy"], [{"role": "user"}], [{"content": "a"}],
        [{"role": "user", "content": 7}],
        [{"role": "user", "content": [{"type": "image", "url": "x"}]}],
        [{"role": "user", "content": ["a"]}],
    ],
    ids=str,
)  # fmt: skip
def test_what_is_no_conversation_is_set_aside(messages, tmp_path):
    """Nothing of it is measured, since part of it would be lost."""
    found = conversation(tmp_path, messages)
    assert len(found.texts) == 1
    assert found.places == [(2, "not a conversation")]


def test_a_record_without_messages_is_set_aside(tmp_path):
    """Its reason is that of any missing field."""
    content = json_lines([{"messages": TALK}, {"note": "a"}])
    assert read_bytes(tmp_path, "a.jsonl", content).places == [(2, "field missing")]


def test_a_conversation_is_rendered(tmp_path):
    """The function is given the messages with all their keys, contents as text."""
    messages = [{"role": "user", "name": "Ana", "content": [{"type": "text", "text": "lit?"}]}]
    found = conversation(tmp_path, messages, render=repr)
    assert found.texts[1] == repr([{"role": "user", "name": "Ana", "content": "lit?"}])


def test_a_conversation_that_cannot_be_rendered_is_set_aside(tmp_path):
    """The reason is fixed; the detail says what the template said."""

    def render(messages):
        if len(messages) == 1:
            raise CorpusError("roles must take turns")
        return "fine"

    found = conversation(tmp_path, TALK[1:], render=render)
    assert found.texts == ["fine"]
    [flaw] = found.set_aside
    assert flaw.reason == "conversation cannot be rendered"
    assert flaw.detail == "roles must take turns"


def test_another_field_of_messages_is_named(tmp_path):
    """What it holds decides, not its name."""
    content = json_lines([{"talk": TALK, "title": "a"}])
    found = read_bytes(tmp_path, "a.jsonl", content, text=("talk",))
    assert found.texts == ["Is the buoy lit?\nNo."]


def test_a_usual_name_of_text_comes_before_messages(tmp_path):
    """A text that is there already is not made a second time."""
    content = json_lines([{"messages": TALK, "text": "rendered"}])
    assert read_bytes(tmp_path, "a.jsonl", content).texts == ["rendered"]


def test_conversations_in_tables_are_read(tmp_path):
    """A column of lists of structures."""
    pq.write_table(pa.table({"messages": [TALK, TALK[1:]]}), tmp_path / "a.parquet")
    assert read_back(tmp_path / "a.parquet").texts == ["Is the buoy lit?\nNo.", "No."]
