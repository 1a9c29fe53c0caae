"""Conversations written by a chat template, or their contents joined.

What a template may use (trimmed blocks, loop controls, `raise_exception`, `tojson` without HTML
escapes, the special tokens, `{% generation %}`) was read in `transformers` 4.57.1,
`utils/chat_template_utils.py`. The templates are invented.
"""

from __future__ import annotations

import json
import pickle

import pytest

from auditor.errors import CorpusError, VocabularyError
from auditor.vocabulary import conversation
from auditor.vocabulary.conversation import Renderer, chat_template, joined

TALK = [
    {"role": "user", "content": "Is the buoy's lamp <lit>?"},
    {"role": "assistant", "content": "Yes, since 04:50."},
]
TEMPLATE = """{{ bos_token }}
{%- for message in messages %}
    {% if message.role == "user" %}
Q: {{ message["content"] }}
    {% else %}
A: {{ message["content"] }}{{ eos_token }}
    {% endif %}
{% endfor %}
{% if add_generation_prompt %}A:{% endif %}
"""


def written(template, messages=TALK, **tokens):
    return Renderer(template, tokens).render(messages)


def settings(folder, values):
    (folder / "tokenizer_config.json").write_text(json.dumps(values), encoding="utf-8")
    return folder


def test_a_conversation_is_written_with_its_control_strings(tmp_path):
    """Blocks leave no blank lines, tokens come from the settings, no prompt is added."""
    tokens = {"bos_token": "<s>", "eos_token": {"content": "</s>", "id": 2}, "unk_token": None}
    settings(tmp_path, {"chat_template": TEMPLATE, "add_bos_token": True, **tokens})
    text = Renderer.from_folder(tmp_path).render(TALK)
    assert text == "<s>Q: Is the buoy's lamp <lit>?\nA: Yes, since 04:50.</s>\n"


def test_tokens_of_the_older_file_fill_what_the_settings_leave_out(tmp_path):
    """special_tokens_map.json is read too; where both name a token, the settings win."""
    template = "{{ bos_token }}{{ sep_token }}{{ image_token }}{{ additional_special_tokens[0] }}"
    (tmp_path / "special_tokens_map.json").write_text(
        '{"bos_token": "<old>", "sep_token": {"content": "<sep>"}}', encoding="utf-8"
    )
    more = {"additional_special_tokens": [{"content": "<a>"}]}
    named = {"bos_token": "<new>", "extra_special_tokens": {"image_token": "<img>"}}
    settings(tmp_path, {"chat_template": template, **named, **more})
    assert Renderer.from_folder(tmp_path).render(TALK) == "<new><sep><img><a>"


def test_the_file_beside_wins_over_the_settings(tmp_path):
    """chat_template.jinja counts before tokenizer_config.json; its BOM is passed over."""
    settings(tmp_path, {"chat_template": "settings"})
    assert chat_template(tmp_path) == "settings"
    (tmp_path / "chat_template.jinja").write_bytes(b"\xef\xbb\xbffile")
    assert chat_template(tmp_path) == "file"


def test_of_several_templates_the_default_counts(tmp_path):
    """A list of named templates gives the one called default, and none without it."""
    others = [{"name": "tool_use", "template": "T"}, {"name": "default", "template": "D"}]
    assert chat_template(settings(tmp_path, {"chat_template": others})) == "D"
    assert chat_template(settings(tmp_path, {"chat_template": others[:1]})) is None


def test_no_template_is_no_fault_until_one_is_asked_for(tmp_path):
    """Without a template the look-up gives None; a renderer cannot be made."""
    assert chat_template(tmp_path) is None
    assert chat_template(settings(tmp_path, {"bos_token": "<s>"})) is None
    with pytest.raises(VocabularyError, match="no chat template"):
        Renderer.from_folder(tmp_path)


@pytest.mark.parametrize("content", ['{"chat_template": "x"', "[]", '{"chat_template": 7}'])
def test_damaged_settings_are_named(tmp_path, content):
    """A template that cannot be read is an error with its file, not a conversation without one."""
    (tmp_path / "tokenizer_config.json").write_text(content, encoding="utf-8")
    with pytest.raises(VocabularyError) as fault:
        chat_template(tmp_path)
    assert fault.value.where.endswith("tokenizer_config.json")
    assert fault.value.hint


def test_a_template_over_the_bound_is_refused(tmp_path, monkeypatch):
    """The bound is in bytes, and the template of exactly that size is read."""
    assert conversation.LARGEST_TEMPLATE == 1_000_000
    monkeypatch.setattr(conversation, "LARGEST_TEMPLATE", 4)
    (tmp_path / "chat_template.jinja").write_text("éé", encoding="utf-8")
    assert chat_template(tmp_path) == "éé"
    (tmp_path / "chat_template.jinja").write_text("ééé", encoding="utf-8")
    with pytest.raises(VocabularyError, match="6 bytes"):
        chat_template(tmp_path)


def test_a_template_in_another_encoding_is_refused(tmp_path):
    """Bytes that are not UTF-8 are named by position."""
    (tmp_path / "chat_template.jinja").write_bytes(b"ab\xff")
    with pytest.raises(VocabularyError, match="byte 2"):
        chat_template(tmp_path)


@pytest.mark.parametrize("wrong", ["{% for %}", "{{ messages | random }}", "{{ x | nosuch }}"])
def test_a_template_that_is_not_understood_is_refused_with_its_line(tmp_path, wrong):
    """Wrong syntax, unknown filters and the filter of chance fail before any record is read."""
    (tmp_path / "chat_template.jinja").write_text(f"Q:\n{wrong}", encoding="utf-8")
    with pytest.raises(VocabularyError, match="not understood") as fault:
        Renderer.from_folder(tmp_path)
    assert fault.value.where.endswith("chat_template.jinja: template line 2")


def test_a_refusal_of_the_template_sets_the_record_aside():
    """`raise_exception` becomes an error of the corpus with the template's own words."""
    with pytest.raises(CorpusError) as fault:
        written("{{ raise_exception('roles must alternate') }}")
    assert fault.value.message == "chat template refuses the conversation: roles must alternate"


@pytest.mark.parametrize(
    "template",
    ["{{ messages[9].content.x }}", "{{ 1 / 0 }}", "{{ messages.append(1) }}", "{{ lipsum() }}"],
)
def test_a_template_that_fails_sets_the_record_aside(template):
    """Any fault in a template, a change of the messages and chance included, is one bad record."""
    with pytest.raises(CorpusError, match="fails on the conversation"):
        written(template)


def test_the_sandbox_keeps_a_template_from_the_interpreter():
    """Attributes that lead out of the data are closed."""
    with pytest.raises(CorpusError, match="SecurityError"):
        written("{{ ''.__class__.__mro__[1].__subclasses__() }}")


def test_a_template_that_needs_the_date_is_refused():
    """Counts must not change from day to day; a template that asks first may do without."""
    with pytest.raises(CorpusError, match="current date"):
        written("{{ strftime_now('%Y') }}")
    assert written("{{ strftime_now('%Y') if strftime_now is defined else 'none' }}") == "none"


def test_json_is_written_without_html_escapes():
    """Angle brackets, quotes and letters stay as they are; separators are those of Python."""
    assert written("{{ messages[0] | tojson }}") == (
        '{"role": "user", "content": "Is the buoy\'s lamp <lit>?"}'
    )
    assert written("{{ {'b': 'é', 'a': 1} | tojson(indent=1, sort_keys=true) }}") == (
        '{\n "a": 1,\n "b": "é"\n}'
    )


def test_loops_can_break_and_marks_of_what_is_learnt_leave_the_text():
    """Loop controls work; `generation` passes its body through."""
    template = (
        "{% for m in messages %}{% if loop.index == 2 %}{% break %}{% endif %}"
        "{% generation %}{{ m.role }}{% endgeneration %}{% endfor %}."
    )
    assert written(template) == "user."


def test_tools_and_documents_are_absent():
    """A template may ask for both, as the library lets it."""
    assert written("{{ tools is none }}{{ documents is none }}{{ pad_token }}") == "TrueTrue"


def test_template_syntax_in_a_message_stays_text():
    """What a user wrote is never run."""
    content = "{{ 7 * 7 }} <b>"
    assert written("{{ messages[0].content }}", [{"content": content}]) == content


def test_the_way_to_render_can_be_sent_to_another_process():
    """The bound method survives pickling, before and after its first use."""
    renderer = Renderer(TEMPLATE, {"bos_token": "<s>", "eos_token": "</s>"})
    fresh = pickle.loads(pickle.dumps(renderer.render))
    text = fresh(TALK)
    assert text == renderer.render(TALK)
    used = pickle.loads(pickle.dumps(renderer.render))
    assert used(TALK) == text


def test_contents_are_joined_by_line_feeds():
    """Contents in order; null adds nothing, an empty one is a line of its own."""
    silent = [{"role": "assistant", "content": None, "tool_calls": []}, {"content": ""}]
    assert joined([*TALK, *silent]) == "Is the buoy's lamp <lit>?\nYes, since 04:50.\n"
    assert joined([]) == ""


def test_text_parts_of_a_content_are_joined_alike():
    """A content in parts gives the texts of its parts."""
    parts = [{"type": "text", "text": "a"}, "b"]
    assert joined([{"content": parts}, {"content": "c"}]) == "a\nb\nc"


@pytest.mark.parametrize("content", [7, {"x": 1}, [{"type": "image", "url": "x"}], [None]])
def test_content_that_is_no_text_is_an_error_with_its_number(content):
    """Content that would be lost sets the record aside."""
    with pytest.raises(CorpusError, match="message 2 of the conversation holds content"):
        joined([TALK[0], {"role": "user", "content": content}])


@pytest.mark.parametrize("write", [joined, Renderer("x", {}).render])
def test_a_message_that_is_no_object_is_an_error_with_its_number(write):
    """A template would pass over such a message without a word."""
    with pytest.raises(CorpusError, match="message 2 of the conversation is not an object"):
        write([TALK[0], "Yes."])
