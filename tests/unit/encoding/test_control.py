"""Control strings are what the text spells, whatever the file marks as special."""

from __future__ import annotations

from tests.unit import small_vocabularies as small

BYTES = [f"<0x{byte:02X}>" for byte in range(256)]


def fallback(folder):
    """Return a byte-fallback vocabulary that marks its byte pieces special, as trainers may."""
    entries = ["<unk>", "<s>", "a", "b", *BYTES]
    added = [
        {"id": number, "content": entry, "special": True, "single_word": False, "lstrip": False,
         "rstrip": False, "normalized": False}
        for number, entry in enumerate(entries) if entry.startswith("<")
    ]  # fmt: skip
    model = {"type": "BPE", "vocab": {e: n for n, e in enumerate(entries)}, "merges": [],
             "byte_fallback": True, "unk_token": "<unk>"}  # fmt: skip
    return small.described(folder, added_tokens=added, model=model)


def test_byte_pieces_marked_special_are_no_control_strings(tmp_path):
    """The three bytes of 中 are emitted by the model; `<s>` and a literal `<0x41>` are spelled."""
    vocabulary = fallback(tmp_path)
    found = small.measured(vocabulary, ["中a<s>b<0x41>"])
    assert found["byte_tokens"] == [4]
    assert found["control_strings"] == [2]


def test_a_literal_unknown_entry_is_a_control_string(tmp_path):
    """`<unk>` in the text is spelled by it, and no loss."""
    found = small.measured(fallback(tmp_path), ["a<unk>b"])
    assert (found["control_strings"], found["unknown_tokens"]) == ([1], [0])
