"""What becomes of runs of whitespace under small vocabularies of each convention."""

from __future__ import annotations

import pytest

from auditor.encoding.fates import Fates, Probed
from auditor.text.whitespace import RunForm
from tests.unit.small_vocabularies import (
    byte_fallback,
    byte_level,
    described,
    merging,
    trained,
    wordpiece,
)


def fate_of(vocabulary, run, position="middle"):
    return Fates(vocabulary).of(RunForm(run, position))


@pytest.mark.parametrize("position", ["start", "middle", "end"])
@pytest.mark.parametrize("run", [" ", "  ", "\t", "\r\n", "\n\n", "\u00a0", "\u200b"])
def test_a_byte_level_vocabulary_keeps_every_run(tmp_path, run, position):
    """Every byte has an entry (openai/gpt-2, encoder.py), so that nothing is lost anywhere."""
    assert fate_of(byte_level(tmp_path, []), run, position).fate == "kept"


@pytest.mark.parametrize(("run", "by_bytes"), [(" ", False), ("\n", False), ("\u3000", True)])
def test_runs_written_by_bytes(tmp_path, run, by_bytes):
    """U+3000 is E3 80 80 (RFC 3629), and no entry holds it whole; ASCII is whole in one byte."""
    assert fate_of(byte_level(tmp_path, []), run) == Probed("kept", by_bytes)


@pytest.mark.parametrize(
    ("run", "fate"),
    [
        (" ", "kept"),  # not written, put back by the decoder
        ("  ", "merged"),
        ("\r\n", "merged"),
        ("\t", "changed"),
        ("\n", "changed"),
        ("\u3000", "changed"),
    ],
)
def test_wordpiece_gives_a_single_space_for_every_run(tmp_path, run, fate):
    """google-research/bert: text is split at whitespace, and joined by U+0020."""
    assert fate_of(wordpiece(tmp_path, ["[UNK]", "a", "b"]), run) == Probed(fate, by_bytes=False)


@pytest.mark.parametrize("position", ["start", "end"])
def test_wordpiece_drops_the_edges_of_a_document(tmp_path, position):
    """At the edge there is nothing to join."""
    assert fate_of(wordpiece(tmp_path, ["[UNK]", "a", "b"]), " \n", position).fate == "dropped"


@pytest.mark.parametrize(
    ("run", "position", "fate"),
    [
        (" ", "middle", "kept"),
        ("  ", "middle", "merged"),
        ("\t", "middle", "changed"),
        ("  ", "start", "dropped"),
        ("\n", "end", "dropped"),
    ],
)
def test_sentencepiece_by_its_defaults(tmp_path, run, position, fate):
    """doc/options.md: remove_extra_whitespaces and nmt_nfkc, whatever the pieces."""
    vocabulary = trained(tmp_path, ["a b c d", "ab cd a b"] * 3, vocab_size=20)
    assert fate_of(vocabulary, run, position).fate == fate


@pytest.mark.parametrize("run", ["\t", "\n", "\u3000"])
def test_byte_fallback_keeps_what_has_no_piece(tmp_path, run):
    """With the identity for a normaliser a tab is <0x09>: kept, and written by bytes."""
    vocabulary = byte_fallback(tmp_path, ["▁", "a", "b"])
    assert fate_of(vocabulary, run) == Probed("kept", by_bytes=True)


@pytest.fixture
def symbols(tmp_path):
    """Return a vocabulary of three characters and the unknown token, joined when decoded."""
    vocab = {"<unk>": 0, "a": 1, "b": 2, " ": 3}
    model = {"type": "BPE", "vocab": vocab, "merges": [], "unk_token": "<unk>"}
    return described(tmp_path, model=model, decoder={"type": "Fuse"})


def test_a_run_without_an_entry_is_unknown(symbols):
    """A tab has no entry; the space beside it in the vocabulary has."""
    assert fate_of(symbols, "\t") == Probed("unknown", by_bytes=False)
    assert fate_of(symbols, " ") == Probed("kept", by_bytes=False)


def test_one_unknown_character_makes_the_run_unknown(symbols):
    """A run is not half kept."""
    assert fate_of(symbols, " \t ").fate == "unknown"


def test_without_a_decoder_there_is_no_fate(tmp_path):
    """Characters and merges without `</w>` name no rule of decoding."""
    vocabulary = merging(tmp_path, ["a", "b"], [])
    assert not vocabulary.engine.has_decoder
    assert fate_of(vocabulary, " ") == Probed(None, by_bytes=False)


def test_each_form_is_probed_once(symbols):
    """What is known of a form is not asked again."""
    fates = Fates(symbols)
    assert fates.of(RunForm("\t", "middle")) is fates.of(RunForm("\t", "middle"))
