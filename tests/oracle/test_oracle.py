"""The oracle against values worked out by hand or published, so that it can be trusted itself."""

from __future__ import annotations

import base64
import json
from typing import Any

import pytest

from tests.oracle import Document, measure, open_tekken_json, spans, tokens_per_document, toys
from tests.oracle.text import kind_of, words_of
from tests.oracle.vocabularies import OracleVocabulary

Figures = dict[str, dict[str, Any]]


def _all(vocabulary: OracleVocabulary, *texts: str, **settings: Any) -> dict[str, Any]:
    chosen = {"by": [], "limit": None, **settings}
    return measure([Document(text) for text in texts], vocabulary, **chosen)["all"]


def _parts(figures: Figures, name: str) -> tuple[int, int]:
    return figures[name]["numerator"], figures[name]["denominator"]


def _covered(text: str, vocabulary: OracleVocabulary) -> list[tuple[str, list[int]]]:
    return [(token.entry, sorted(token.positions)) for token in spans(text, vocabulary)]


def test_greedy_longest_match_gives_three_pieces_for_one_word():
    """google-research/bert, tokenization.py: "unaffable" is un ##aff ##able."""
    vocabulary = toys.wordpiece("un", "##aff", "##able")
    result = _all(vocabulary, "unaffable")
    assert _covered("unaffable", vocabulary) == [
        ("un", [0, 1]), ("##aff", [2, 3, 4]), ("##able", [5, 6, 7, 8])
    ]  # fmt: skip
    assert result["counts"] == {
        "documents": 1, "bytes": 9, "characters": 9, "words": 1, "tokens": 3
    }  # fmt: skip
    assert _parts(result["figures"], "pieces_per_word") == (3, 1)
    assert _parts(result["figures"], "continued_words") == (1, 1)


def test_a_word_with_an_unknown_letter_is_left_out_of_the_known_words():
    """google-research/bert, tokenization_test.py: "unwantedX running" is [UNK] runn ##ing."""
    vocabulary = toys.wordpiece("want", "##want", "##ed", "wa", "un", "runn", "##ing")
    figures = _all(vocabulary, "unwantedX running")["figures"]
    assert _parts(figures, "unknown_tokens") == (1, 3)
    assert _parts(figures, "unknown_words") == (1, 2)
    assert _parts(figures, "unknown_characters") == (9, 16)
    assert _parts(figures, "pieces_per_known_word") == (2, 1)
    assert _parts(figures, "pieces_per_word") == (3, 2)


def test_byte_pieces_of_a_sentencepiece_model_share_the_span_of_their_character(tmp_path):
    """google/sentencepiece, sentencepiece_processor_test.cc: E, F and あ give five byte pieces."""
    vocabulary = toys.sentencepiece_bytes(tmp_path, "▁ABC", "▁D", "▁AB", "▁A", *"▁ABCD")
    covered = _covered(" ABC DEFあ", vocabulary)
    assert [entry for entry, _ in covered] == [
        "▁ABC", "▁D", "<0x45>", "<0x46>", "<0xE3>", "<0x81>", "<0x82>"
    ]  # fmt: skip
    assert [positions for _, positions in covered[2:]] == [[6], [7], [8], [8], [8]]
    figures = _all(vocabulary, " ABC DEFあ")["figures"]
    assert _parts(figures, "byte_tokens") == (5, 7)
    assert _parts(figures, "byte_spelled_characters") == (3, 7)
    assert _parts(figures, "pieces_per_word") == (7, 3)  # ABC, DEF, あ


def test_an_inserted_space_marker_covers_nothing():
    """Rule (a): the marker before the first word stands for no character, the second for one."""
    vocabulary = toys.merging(
        ["▁", "a"], [], pre_tokenizer={"type": "Metaspace", "replacement": "▁",
                                       "prepend_scheme": "always", "split": True},
    )  # fmt: skip
    assert _covered("a a", vocabulary) == [("▁", []), ("a", [0]), ("▁", [1]), ("a", [2])]
    figures = _all(vocabulary, "a a")["figures"]
    assert _parts(figures, "fertility") == (4, 2)
    assert _parts(figures, "pieces_per_word") == (2, 2)
    assert _parts(figures, "whitespace_tokens") == (1, 4)
    assert figures["lossless_documents"]["value"] is None


def test_marks_that_the_normaliser_strips_belong_to_the_letter_before():
    """Rule (c), along a run of two marks; the word counts as changed, nothing as dropped."""
    steps = [{"type": "NFD"}, {"type": "StripAccents"}]
    normaliser = {"type": "Sequence", "normalizers": steps}
    vocabulary = toys.merging(["e", "x"], [], normalizer=normaliser)
    assert _covered("e\u0301\u0323x", vocabulary) == [("e", [0, 1, 2]), ("x", [3])]
    figures = _all(vocabulary, "e\u0301\u0323x")["figures"]
    assert _parts(figures, "dropped_characters") == (0, 4)
    assert _parts(figures, "changed_words") == (1, 1)


def test_folding_case_is_told_from_other_changes():
    """AB, Ba and U+0130 are folded (CaseFolding.txt, F: i and a dot above); ab is left."""
    vocabulary = toys.merging(list("abi"), [], normalizer={"type": "Lowercase"})
    figures = _all(vocabulary, "AB ab Ba \u0130")["figures"]
    assert _parts(figures, "case_folded_words") == (3, 4)
    assert _parts(figures, "changed_words") == (0, 4)


def test_characters_that_no_entry_supplies_are_dropped_silently():
    """BPE without an unknown token emits nothing for z: no unknown figure can show it."""
    vocabulary = toys.merging(["a", " "], [], decoder={"type": "Fuse"})
    figures = _all(vocabulary, "az a", "a a")["figures"]
    assert _parts(figures, "dropped_characters") == (1, 5)
    assert _parts(figures, "lossless_documents") == (1, 2)
    assert figures["unknown_tokens"]["value"] is None


def test_a_missing_byte_loses_its_character_though_another_byte_covers_it():
    """Without an entry for 0xA9 (©) only the first byte of é is emitted."""
    whole, lacking = toys.byte_level(), toys.byte_level(without="©")
    assert _parts(_all(whole, "aé")["figures"], "dropped_characters") == (0, 2)
    assert _parts(_all(whole, "aé")["figures"], "byte_tokens") == (2, 3)
    assert _covered("aé", lacking) == [("a", [0]), ("Ã", [1])]
    assert _parts(_all(lacking, "aé")["figures"], "dropped_characters") == (1, 2)


def test_control_strings_are_control_tokens_unless_measured_as_text():
    """[UNK] written in the text is a control token, not an unknown one; zz stays unknown."""
    vocabulary = toys.wordpiece("a", "[", "]")
    parsed = _all(vocabulary, "[UNK] zz [SEP] a")["figures"]
    assert _parts(parsed, "control_strings") == (2, 4)
    assert _parts(parsed, "unknown_tokens") == (1, 4)
    as_text = _all(vocabulary, "[UNK] zz [SEP] a", control_strings="text")["figures"]
    assert _parts(as_text, "control_strings") == (0, 8)
    assert _parts(as_text, "unknown_tokens") == (3, 8)


def test_the_template_takes_its_room_from_the_limit():
    """Lengths 3, 5 and 8 with an overhead of 2; a limit of 5 leaves room for 3 tokens."""
    result = _all(toys.wordpiece("a"), "a", "a a a", "a a a a a a", limit=5)
    assert _parts(result["figures"], "truncated_tokens") == (3, 10)
    assert _parts(result["figures"], "truncated_documents") == (1, 3)
    assert result["lengths"]["histogram"] == [[3, 1], [5, 1], [8, 1]]
    assert result["lengths"]["mean"] == 16 / 3
    assert result["lengths"]["quantiles"]["p50"]["value"] == 5
    assert result["lengths"]["quantiles"]["p90"]["value"] == 8


def test_stored_settings_that_cut_or_fill_are_switched_off():
    """A stored truncation to 3 and a padding to 9 would give 3 and 9 tokens, not 5."""
    truncation = {
        "direction": "Right", "max_length": 3, "strategy": "LongestFirst", "stride": 0
    }  # fmt: skip
    padding = {
        "strategy": {"Fixed": 9}, "direction": "Right", "pad_to_multiple_of": None,
        "pad_id": 0, "pad_type_id": 0, "pad_token": "[UNK]",
    }  # fmt: skip
    vocabulary = toys.wordpiece("a", truncation=truncation, padding=padding)
    assert tokens_per_document([Document("a a a a a")], vocabulary) == [5]
    assert vocabulary.overhead == 2


def test_losslessness_is_judged_with_the_decoders_cleaning_up_off():
    """WordPiece writes a space before the comma; its clean-up would take that space away."""
    vocabulary = toys.wordpiece("a", ",")
    assert _parts(_all(vocabulary, "a , a", "a, a")["figures"], "lossless_documents") == (1, 2)
    assert vocabulary.decode([token.id for token in spans("a , a", vocabulary)]) == "a , a"


def test_runs_of_whitespace_fare_as_the_decoder_writes_them():
    """WordPiece writes one space between words: single kept, double merged, tab changed."""
    text = "a b  a\tb\r\na\u200bb\u00a0a "
    rows = {row["kind"]: row for row in _all(toys.wordpiece("a", "b"), text)["whitespace"]}
    fates = {kind: [fate for fate, n in row["fates"].items() if n] for kind, row in rows.items()}
    assert fates == {
        "document edge": ["dropped"], "CRLF": ["merged"], "tab": ["changed"],
        "space run": ["merged"], "single space": ["kept"], "no-break space": ["changed"],
        "zero-width": ["unknown"],
    }  # fmt: skip
    assert sum(row["tokens"] for row in rows.values()) == 0


def test_tokens_inside_a_run_are_counted_in_the_document(tmp_path):
    """Two blanks are one entry here; the no-break space is written by two byte tokens."""
    vocabulary = toys.ranks(tmp_path, b"  ")
    rows = {row["kind"]: row for row in _all(vocabulary, "a  a\u00a0a")["whitespace"]}
    assert (rows["space run"]["tokens"], rows["space run"]["bytes"]) == (1, 0)
    assert (rows["no-break space"]["tokens"], rows["no-break space"]["bytes"]) == (2, 1)
    assert rows["no-break space"]["fates"]["kept"] == 1


@pytest.mark.parametrize(
    ("run", "kind"),
    [
        ("\r\n\r\n", "CRLF"), ("\n \n", "blank line"), ("\n\t", "line end"), (" \t", "tab"),
        ("  ", "space run"), (" ", "single space"), ("\u00a0\u202f", "no-break space"),
        ("\u3000", "ideographic space"), (" \u00a0", "other"),
    ],
)  # fmt: skip
def test_a_run_belongs_to_the_first_kind_that_fits(run: str, kind: str):
    """The order of kinds decides."""
    assert kind_of(run, at_an_edge=False) == kind
    assert kind_of(run, at_an_edge=True) == "document edge"


def test_words_lie_between_word_boundaries():
    """UAX #29's example has 9 words; a character beyond U+FFFF moves no word."""
    text = "The quick (“brown”) fox can’t jump 32.3 feet, right?"
    assert [text[start:stop] for start, stop in words_of(text, "icu")] == [
        "The", "quick", "brown", "fox", "can’t", "jump", "32.3", "feet", "right"
    ]  # fmt: skip
    assert words_of("\U0001f4a9 ab", "icu") == [(2, 4)]


def test_the_use_of_entries_follows_the_published_formulas(tmp_path):
    """Zouhar et al. 2023 with p = (.5, .25, .125, .125): efficiency 0.730167 over four entries."""
    vocabulary = toys.merging(list("abcd"), [])
    usage = _all(vocabulary, "aaaabbcd")["usage"]
    assert usage["used_entries"] == {"value": 1.0, "numerator": 4, "denominator": 4}
    assert usage["entropy"]["value"] == 1.75
    assert usage["renyi_efficiency"]["value"] == pytest.approx(0.730167, abs=5e-7)
    assert usage["rank_95_frequency"]["value"] == 1
    assert _all(toys.ranks(tmp_path), "aab")["usage"]["rank_95_frequency"]["value"] == 0


def test_special_tokens_of_a_rank_file_are_entries_and_never_tokens(tmp_path):
    """The control string is spelt out as text; no unknown id exists."""
    vocabulary = toys.ranks(tmp_path, b"ab", special=("<|end|>",))
    figures = _all(vocabulary, "ab<|end|>")["figures"]
    assert vocabulary.entries == 258
    assert _parts(figures, "control_strings") == (0, 8)
    assert _parts(figures, "lossless_documents") == (1, 1)
    assert figures["documents_with_unknown"]["value"] is None


def test_the_json_form_of_ranks_is_cut_to_the_declared_size(tmp_path):
    """Of 258 ranks 257 are used after 3 special tokens, so that "abc" is ab and c."""
    data = [*(bytes([byte]) for byte in range(256)), b"ab", b"abc"]
    vocab = [
        {"rank": rank, "token_bytes": base64.b64encode(one).decode(), "token_str": None}
        for rank, one in enumerate(data)
    ]
    config = {"pattern": r"\p{L}+", "default_vocab_size": 260, "default_num_special_tokens": 3}
    (tmp_path / "toy.json").write_text(json.dumps({"config": config, "vocab": vocab}))
    vocabulary = open_tekken_json(tmp_path / "toy.json")
    assert [token.id for token in spans("abc", vocabulary)] == [3 + 256, 3 + ord("c")]
    assert vocabulary.entries == 260


def test_slices_and_intervals_follow_the_fields():
    """Two slices of two values and a missing one; by origin, two units carry the spread."""
    documents = [
        Document("a", {"lang": "pt", "site": 1}), Document("a a", {"lang": None, "site": 1}),
        Document("a a a", {"lang": True, "site": 2}),
    ]  # fmt: skip
    vocabulary = toys.wordpiece("a")
    reference = tokens_per_document([Document("a a")] * 3, vocabulary)
    result = measure(
        documents, vocabulary, by=["lang"], limit=3, origin="site", reference_tokens=reference
    )
    assert list(result) == ["all", "lang=pt", "lang=(none)", "lang=true"]
    # Tokens 3 and 3 against 4 and 2: R = 1, deviations −1 and 1, SE = √(2/1 · 2) / 6 = 1/3.
    relative = result["all"]["figures"]["relative_tokens"]
    assert (relative["numerator"], relative["denominator"]) == (6, 6)
    assert relative["high"] == pytest.approx(1 + 1.959964 / 3)
    truncated = result["all"]["figures"]["truncated_documents"]
    assert (truncated["numerator"], truncated["denominator"]) == (2, 3)
    assert result["lang=pt"]["figures"]["fertility"]["low"] is None


def test_what_is_never_seen_has_an_open_upper_end():
    """No unknown among two documents: low 0, high null, Wilson's z²/(n+z²) in the note."""
    figure = _all(toys.wordpiece("a"), "a", "a a")["figures"]["unknown_tokens"]
    assert (figure["value"], figure["low"], figure["high"]) == (0.0, 0.0, None)
    assert f"{1.959964**2 / (2 + 1.959964**2):.4g}" in figure["note"]
