"""What cutting takes from documents: against decoding, against the oracle's tokens, by hand."""

from __future__ import annotations

import numpy as np
import orjson
import pytest

from auditor.encoding.truncation import WAYS, Candidate, Truncation
from auditor.text.stretch import Stretch
from auditor.vocabulary import VocabularySpec, open_vocabulary
from auditor.vocabulary.spans import correct
from tests import oracle
from tests.oracle.text import words_of
from tests.unit.runs.conftest import DEMO, TROUBLE, VOCABULARIES
from tests.unit.small_vocabularies import wordpiece

LENGTHS = (3, 4, 7, 12, 40)


def notices():
    lines = (DEMO / "safety_notices.jsonl").read_bytes().splitlines()[::7]
    return [orjson.loads(line)["text"] for line in lines]


def columns(vocabulary, texts, candidates):
    stretch = Stretch(texts)
    spans = correct(vocabulary.engine.encode(texts), stretch, vocabulary.inventory)
    return Truncation(stretch, spans).columns(candidates), spans


def positions_of(tokens):
    """Return the positions of the characters that the tokens hold."""
    return set().union(*(token.positions for token in tokens))


def kept_apart(tokens, text, head, tail):
    """Return where the front that is kept whole ends, and where the back starts."""
    front, back = 0, len(text)
    if head:
        reached = max(positions_of(tokens[:head]), default=-1) + 1
        front = min([reached, *positions_of(tokens[head:])])
    if tail:
        begun = min(positions_of(tokens[-tail:]), default=len(text))
        back = max([begun, *(place + 1 for place in positions_of(tokens[:-tail]))])
    return front, max(front, back)


@pytest.mark.parametrize("name", VOCABULARIES)
@pytest.mark.parametrize("length", LENGTHS)
def test_every_way_of_cutting_equals_the_oracles(name, length):
    """Characters and words lost, and words cut through, of troublesome texts and notices."""
    folder = DEMO / "vocabularies" / name
    model = folder / "tokenizer.model"
    opened = (
        oracle.open_sentencepiece(model)
        if model.exists()
        else oracle.open_tokenizers(folder / "tokenizer.json")
    )
    texts = [*TROUBLE, *notices()]
    candidate = Candidate(length, length - 2)
    found, _ = columns(open_vocabulary(VocabularySpec(str(folder))), texts, [candidate])
    for place, text in enumerate(texts):
        tokens = oracle.spans(text, opened)
        words = words_of(text, "icu")
        for way in WAYS:
            expected = [0, 0, 0]
            if len(tokens) > candidate.room:
                front, back = kept_apart(tokens, text, *candidate.kept(way))
                expected = [
                    back - front,
                    sum(1 for start, stop in words if stop > front and start < back),
                    int(any(a < cut < b for a, b in words for cut in (front, back))),
                ]
            names = ("lost_characters", "lost_words", "documents_cut_inside_word")
            got = [int(found[candidate.column(name, way)][place]) for name in names]
            assert got == expected, (way, text)


def test_the_kept_bytes_say_which_characters_are_whole():
    """Byte-level: what the kept ids decode to, but for a last character in part, is what is kept.

    The bytes of a byte-level vocabulary's tokens, end to end, are the bytes of the text (Radford et
    al. 2019, section 2.2), so that decoding knows without any span.
    """
    vocabulary = open_vocabulary(VocabularySpec(str(DEMO / "vocabularies" / VOCABULARIES[0])))
    texts = ["😀" * 9, "naïve café über Ωmega", "สวัสดีครับ", "plain words only"]
    for length in range(3, 20):
        candidate = Candidate(length, length)
        found, spans = columns(vocabulary, texts, [candidate])
        for place, text in enumerate(texts):
            begin, end = spans.bounds[place : place + 2]
            ids = spans.ids[begin:end][:length].tolist()
            kept = b"".join(vocabulary.inventory.entry_bytes[number] for number in ids)
            whole = kept.decode(errors="ignore")
            lost = int(found[candidate.column("lost_characters", "end")][place])
            inside = bool(found[candidate.column("documents_cut_inside_character", "end")][place])
            assert text[: len(text) - lost] == whole
            assert inside == (whole.encode() != kept)


def test_parts_end_with_sentences_where_they_fit(tmp_path):
    """Three sentences of 3, 2 and 7 tokens (the full stop is one): by hand, for each room."""
    vocabulary = wordpiece(
        tmp_path, ["[UNK]", ".", "Buoy", "holds", "Paint", "fades", "We", "saw", "rust", "on", "it"]
    )
    text = "Buoy holds. Paint. We saw rust on it fades."
    expected = {12: (1, 0), 11: (2, 0), 8: (2, 0), 7: (2, 0), 5: (3, 1), 4: (4, 1), 3: (5, 2)}
    candidates = [Candidate(room, room) for room in expected]
    found, _ = columns(vocabulary, [text, "Buoy"], candidates)
    names = ("sentence_parts", "cuts_inside_sentence")
    got = {own.room: tuple(int(found[own.column(name)][0]) for name in names) for own in candidates}
    assert got == expected
    assert all(found[own.column("sentence_parts")][1] == 1 for own in candidates)


def test_a_token_that_takes_the_space_before_a_sentence_is_no_hindrance():
    """Byte-level entries begin with the space that UAX #29 gives to the sentence before."""
    vocabulary = open_vocabulary(VocabularySpec(str(DEMO / "vocabularies" / VOCABULARIES[0])))
    texts = ["The buoy holds. The chain is worn.\n\nThe paint fades."]
    stretch = Stretch(texts)
    spans = correct(vocabulary.engine.encode(texts), stretch, vocabulary.inventory)
    cuts = Truncation(stretch, spans)._sentence_cuts(0)
    starts = [texts[0][spans.starts[token] :] for token in cuts.tolist()]
    assert [start.strip()[:9] for start in starts] == ["The chain", "The paint"]


def test_the_middle_keeps_a_quarter_at_the_head():
    """128 tokens at the head and 382 at the tail of 512 (Sun et al. 2019, from memory)."""
    assert Candidate(512, 510).kept("middle") == (128, 382)


def test_documents_that_fit_lose_nothing():
    """As many tokens as there is room for, and an empty document."""
    vocabulary = open_vocabulary(VocabularySpec(str(DEMO / "vocabularies" / VOCABULARIES[0])))
    texts = ["", "Buoy holds"]
    tokens = int(np.diff(vocabulary.engine.encode(texts).bounds)[1])
    candidate = Candidate(tokens + 2, tokens)
    found, _ = columns(vocabulary, texts, [candidate])
    parts = found.pop(candidate.column("sentence_parts"))
    assert parts.tolist() == [1, 1]
    assert not any(column.any() for column in found.values())
