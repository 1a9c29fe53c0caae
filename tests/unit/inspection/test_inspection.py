"""What is wrong with vocabularies that were made wrong on purpose, entry by entry."""

from __future__ import annotations

import json

import pytest
from tokenizers import Tokenizer, decoders, models, normalizers, pre_tokenizers

from auditor.inspection.composition import composition
from auditor.inspection.findings import findings
from auditor.inspection.reaching import MERGES, NORMALISER, SPLITTER, unreachable
from auditor.inspection.surfaces import surfaces_of
from auditor.vocabulary import VocabularySpec, facts_of, open_vocabulary

LETTERS = "abcdefghijklmnopqrstuvwxyz"


def opened(tmp_path, tokenizer, **files):
    """Save a vocabulary with files beside it, and open it as a user's."""
    tokenizer.save(str(tmp_path / "tokenizer.json"))
    for name, held in files.items():
        (tmp_path / f"{name}.json").write_text(json.dumps(held))
    return open_vocabulary(VocabularySpec(str(tmp_path)))


def characters(*more, merges=()):
    """A BPE model over single characters, and entries that merges build or do not."""
    entries = [*LETTERS, *"T1234. ", *more]
    return models.BPE({entry: n for n, entry in enumerate(entries)}, list(merges))


def lost(vocabulary):
    return {
        own.surface.entry: (own.in_model, own.in_pipeline, own.cause)
        for own in unreachable(vocabulary, surfaces_of(vocabulary))
    }


def test_an_entry_that_no_merge_builds_is_never_produced(tmp_path):
    """`cat` has no merge; `dog` has both of its own."""
    model = characters("do", "dog", "cat", merges=[("d", "o"), ("do", "g")])
    assert lost(opened(tmp_path, Tokenizer(model))) == {"cat": (False, False, MERGES)}


def test_an_entry_that_an_earlier_merge_hides(tmp_path):
    """`ab` comes first, so that a + bc never meet: `abc` is built by ab + c only if that merge is.

    Merges by rank: ab, bc, a+bc. From a b c the first merge leaves ab c, which nothing joins.
    """
    model = characters("ab", "bc", "abc", merges=[("a", "b"), ("b", "c"), ("a", "bc")])
    assert lost(opened(tmp_path, Tokenizer(model))) == {"abc": (False, False, MERGES)}


def test_an_entry_that_the_normaliser_rewrites(tmp_path):
    """Lower-casing leaves nothing that could become `T`; the model alone would give it."""
    tokenizer = Tokenizer(characters())
    tokenizer.normalizer = normalizers.Lowercase()
    assert lost(opened(tmp_path, tokenizer)) == {"T": (True, False, NORMALISER)}


def test_an_entry_that_the_splitter_takes_apart(tmp_path):
    """Digits are split one by one, so that `12` is never one token."""
    tokenizer = Tokenizer(characters("12", merges=[("1", "2")]))
    tokenizer.pre_tokenizer = pre_tokenizers.Digits(individual_digits=True)
    assert lost(opened(tmp_path, tokenizer)) == {"12": (True, False, SPLITTER)}


def test_continuations_are_tried_behind_many_letters(tmp_path):
    """`##b` is found behind a letter with which it makes no longer entry, though `ab` is one."""
    entries = ["[UNK]", *LETTERS, *(f"##{c}" for c in LETTERS), "ab", "##zz"]
    model = models.WordPiece({e: n for n, e in enumerate(entries)}, unk_token="[UNK]")
    tokenizer = Tokenizer(model)
    tokenizer.pre_tokenizer = pre_tokenizers.Whitespace()
    assert lost(opened(tmp_path, tokenizer)) == {}


def bytelevel(*merges):
    """A byte-level BPE with every byte and what ``merges`` build."""
    alphabet = sorted(pre_tokenizers.ByteLevel.alphabet())
    built = [left + right for left, right in merges]
    tokenizer = Tokenizer(
        models.BPE({e: n for n, e in enumerate([*alphabet, *built])}, list(merges))
    )
    tokenizer.decoder = decoders.ByteLevel()
    return tokenizer


def test_digits_that_are_no_characters_of_the_vocabulary(tmp_path):
    """Two letters and an unknown entry: numbers are unknown, whatever the groups look like."""
    model = models.WordPiece({"[UNK]": 0, "a": 1, "b": 2}, unk_token="[UNK]")
    tokenizer = Tokenizer(model)
    tokenizer.pre_tokenizer = pre_tokenizers.Whitespace()
    vocabulary = opened(tmp_path, tokenizer)
    assert composition(vocabulary, surfaces_of(vocabulary))["digits"]["rule"] == "unknown"


def test_kinds_of_entries(tmp_path):
    """One of each, in a byte-level vocabulary: ` t` begins a word, é's first byte is a byte."""
    tokenizer = bytelevel(("Ġ", "t"), ("t", "o"), ("1", "2"), ("Ġ", "Ġ"), (".", "."), ("à", "¤"))
    tokenizer.pre_tokenizer = pre_tokenizers.ByteLevel(add_prefix_space=False)
    tokenizer.add_special_tokens(["<s>", "[unused7]"])
    tokenizer.add_tokens(["buoy"])
    vocabulary = opened(tmp_path, tokenizer)
    kinds = {own.entry: own.kind for own in surfaces_of(vocabulary)}
    assert kinds["Ġt"] == "word start"
    assert kinds["to"] == "continuation"
    assert kinds["12"] == "digits"
    assert kinds["ĠĠ"] == "whitespace"
    assert kinds[".."] == "punctuation"
    assert kinds["à¤"] == "part of a character"
    assert kinds["Ã"] == "byte piece"
    assert (kinds["<s>"], kinds["[unused7]"], kinds["buoy"]) == ("control", "unused", "added")


def told(vocabulary):
    found = findings(vocabulary, facts_of(vocabulary), surfaces_of(vocabulary))
    return [(own.what, own.file, own.key) for own in found]


def test_files_that_disagree_are_named_with_their_key(tmp_path):
    """A role without an entry, another in the other file, casing, rows."""
    tokenizer = Tokenizer(characters())
    tokenizer.add_special_tokens(["<s>", "</s>"])
    vocabulary = opened(
        tmp_path,
        tokenizer,
        tokenizer_config={"bos_token": "<s>", "eos_token": "<end>", "do_lower_case": True},
        special_tokens_map={"bos_token": {"content": "</s>"}},
        config={"vocab_size": 20},
    )
    found = told(vocabulary)
    assert ("a control token without an entry", "tokenizer_config.json", "eos_token") in found
    both = "tokenizer_config.json, special_tokens_map.json"
    assert ("files disagree", both, "bos_token") in found
    assert ("files disagree", "tokenizer_config.json", "do_lower_case") in found
    assert ("ids beyond the model's rows", "config.json", "vocab_size") in found


def test_added_tokens_and_control_strings_that_text_holds(tmp_path):
    """`buoy` matches inside a word; `mask` as a control string is an ordinary word."""
    tokenizer = Tokenizer(characters())
    tokenizer.add_tokens(["buoy"])
    tokenizer.add_special_tokens(["mask"])
    found = told(opened(tmp_path, tokenizer))
    assert ("added tokens that match inside words", None, None) in found
    assert ("a control string that ordinary text holds", None, None) in found
    assert ("no way to write every text", None, None) in found


@pytest.mark.parametrize("missing", [0, 3])
def test_missing_byte_pieces_are_counted(tmp_path, missing):
    """A fallback with all 256 pieces, and one that lacks three."""
    pieces = [f"<0x{byte:02X}>" for byte in range(256 - missing)]
    entries = ["<unk>", *LETTERS, *pieces]
    model = models.BPE(
        {e: n for n, e in enumerate(entries)}, [], unk_token="<unk>", byte_fallback=True
    )
    found = told(opened(tmp_path, Tokenizer(model)))
    assert (("missing byte pieces", None, None) in found) == bool(missing)
