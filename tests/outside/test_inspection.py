"""Inspections of published vocabularies, against a few lines over the files themselves."""

from __future__ import annotations

import base64

import orjson
import pytest
import tiktoken

from auditor.inspection.composition import composition
from auditor.inspection.reaching import unreachable
from auditor.inspection.surfaces import surfaces_of
from auditor.vocabulary import VocabularySpec, open_vocabulary
from tests.outside.material import RANK_FILE_PATTERN, json_ranks, rank_file, sentencepiece_model

pytestmark = pytest.mark.outside


def decodes(spelled: bytes) -> bool:
    try:
        spelled.decode()
    except UnicodeDecodeError:
        return False
    return True


def test_parts_of_characters_are_the_entries_that_are_no_utf_8():
    """Of the JSON ranks: single bytes and longer ones, counted by decoding each."""
    held = orjson.loads(json_ranks().read_bytes())
    kept = held["config"]["default_vocab_size"] - held["config"]["default_num_special_tokens"]
    spelled = [base64.b64decode(row["token_bytes"]) for row in held["vocab"] if row["rank"] < kept]
    partial = [own for own in spelled if not decodes(own)]
    vocabulary = open_vocabulary(VocabularySpec(str(json_ranks())))
    kinds = composition(vocabulary, surfaces_of(vocabulary))["kinds"]
    assert kinds["byte piece"] == sum(len(own) == 1 for own in partial)
    assert kinds["part of a character"] == sum(len(own) > 1 for own in partial) > 500


def test_unreachable_entries_of_a_rank_file_are_so_for_the_library_alone():
    """Each stands in place of itself nowhere: alone, behind a letter, a space, a line end."""
    lines = rank_file().read_bytes().split(b"\n")
    ranks = {base64.b64decode(row.split()[0]): int(row.split()[1]) for row in lines if row}
    library = tiktoken.Encoding(
        "outside", pat_str=RANK_FILE_PATTERN, mergeable_ranks=ranks, special_tokens={}
    )
    texts = {number: own.decode() for own, number in ranks.items() if decodes(own)}
    alone = {n for n, text in texts.items() if library.encode_ordinary(text) != [n]}
    spec = VocabularySpec(str(rank_file()), pattern=RANK_FILE_PATTERN)
    vocabulary = open_vocabulary(spec)
    found = {own.surface.number for own in unreachable(vocabulary, surfaces_of(vocabulary))}
    assert found <= alone
    assert len(found) > 1000
    for number in found:
        for context in ("{}", "a{}", "a {}", "a\n{}", "({})", "{}a"):
            assert number not in library.encode_ordinary(context.format(texts[number]))


def test_a_sentencepiece_model_reaches_all_its_pieces():
    """Every piece of text is the library's own encoding of it, behind a letter or at the start."""
    from sentencepiece import SentencePieceProcessor

    library = SentencePieceProcessor(model_file=str(sentencepiece_model()))
    vocabulary = open_vocabulary(VocabularySpec(str(sentencepiece_model())))
    lost = {own.surface.number for own in unreachable(vocabulary, surfaces_of(vocabulary))}
    special = {n for n in range(library.vocab_size())
               if library.is_control(n) or library.is_byte(n) or library.is_unknown(n)}  # fmt: skip
    plain = set(range(library.vocab_size())) - special
    alone = {n for n in plain if n in library.encode(library.id_to_piece(n).replace("\u2581", " "))}
    assert lost <= plain - alone
