"""Which scripts, and which kinds of words, the tokens of whole documents are spent on."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from auditor.encoding.measures import Columns, Reading
from auditor.text import properties
from auditor.text.scripts import COMMON, INHERITED, NAMES, script_numbers
from auditor.text.stretch import Stretch
from auditor.vocabulary.engine import Ints

# What a token is spent on; every token is spent on one of them.
SPENT_ON = ("whole_words", "broken_words", "byte_spelled", "between_words")
# Tokens of broken words, byte tokens among them.
IN_BROKEN = "in_broken_words"
SCRIPT_COLUMNS = ("characters", "byte_spelled_characters", "tokens")


@dataclass(frozen=True, slots=True)
class ScriptRows:
    """Counts of each script in each document: one row where the script occurs.

    ``documents`` and ``scripts`` (numbers of ``NAMES``) have shape (rows,), ``counts`` the shape
    (rows, columns).
    """

    documents: Ints
    scripts: Ints
    counts: Ints


def letters_by_script(stretch: Stretch) -> ScriptRows:
    """Return the letters (``\\p{L}``) of each document by script, one column."""
    letter = properties.table(r"\p{L}")[stretch.points]
    places = np.flatnonzero(letter)
    scripts = script_numbers(stretch.points[places])
    kept = (scripts != COMMON) & (scripts != INHERITED)
    return _rows(stretch.document_of(places[kept]), scripts[kept], [None])


def by_script(reading: Reading) -> ScriptRows:
    """Return the columns ``SCRIPT_COLUMNS`` of each script in each document.

    A token belongs to the script of the first character in its span that has one of its own (not
    Common, not Inherited); else to that of its first character; one with an empty span to Common.
    """
    stretch, spans = reading.stretch, reading.spans
    scripts = script_numbers(stretch.points)
    characters = np.arange(len(scripts))
    found = _token_scripts(scripts, spans.starts, spans.ends)
    tokens = np.repeat(np.arange(len(stretch)), np.diff(spans.bounds))
    documents = np.concatenate((stretch.document_of(characters), tokens))
    of_token = np.concatenate((np.zeros(len(scripts), bool), np.ones(len(found), bool)))
    spelled = np.concatenate((reading.byte_spelled_characters, np.zeros(len(found), bool)))
    columns = [~of_token, spelled, of_token]
    return _rows(documents, np.concatenate((scripts, found)), list(columns))


def _token_scripts(scripts: Ints, starts: Ints, ends: Ints) -> Ints:
    size = len(scripts)
    own = (scripts != COMMON) & (scripts != INHERITED)
    places = np.where(own, np.arange(size), size)
    following = np.append(np.minimum.accumulate(places[::-1])[::-1], size)
    first = following[starts]
    padded: Ints = np.append(scripts, COMMON)
    held = np.where(first < ends, first, np.where(ends > starts, starts, size))
    return np.asarray(padded[held])


def _rows(documents: Ints, scripts: Ints, columns: list[Ints | None]) -> ScriptRows:
    codes, place = np.unique(documents * len(NAMES) + scripts, return_inverse=True)
    counts = [np.bincount(place, weights=column, minlength=len(codes)) for column in columns]
    table = np.stack([count.astype(np.int64) for count in counts], axis=1)
    return ScriptRows(*np.divmod(codes, len(NAMES)), table)


def spent_on(reading: Reading) -> Columns:
    """Return the tokens of each document by what they are spent on, each of shape (documents,).

    ``byte_spelled``: byte tokens; ``whole_words``: tokens that touch a word which no other touches;
    ``broken_words``: other tokens that touch a word; ``between_words``: all others. Beside these,
    ``in_broken_words`` counts all tokens of words that several tokens touch.
    """
    spans, words = reading.spans, reading.stretch.words
    word = np.searchsorted(words.ends, spans.starts, side="right")
    padded = np.append(words.starts, len(reading.stretch.points) + 1)
    touching = (spans.ends > spans.starts) & (padded[word] < spans.ends)
    alone = np.append(reading.touches, 0)[word] == 1
    spelled = reading.byte_tokens
    flags = {
        "whole_words": touching & alone & ~spelled,
        "broken_words": touching & ~alone & ~spelled,
        "byte_spelled": spelled,
        "between_words": ~touching & ~spelled,
        IN_BROKEN: touching & ~alone,
    }
    documents = np.repeat(np.arange(len(reading.stretch)), np.diff(spans.bounds))
    size = len(reading.stretch)
    return {
        name: np.bincount(documents[flag], minlength=size).astype(np.int64)
        for name, flag in flags.items()
    }


def costly_characters(reading: Reading) -> ScriptRows:
    """Return how often each byte-spelled character occurs in each document, and its tokens.

    The second column counts the byte tokens that begin at it; ``scripts`` holds code points.
    """
    stretch, spans = reading.stretch, reading.spans
    flagged = np.flatnonzero(reading.byte_spelled_characters)
    starts = spans.starts[reading.byte_tokens]
    places = np.concatenate((flagged, starts))
    points = stretch.points[places].astype(np.int64)
    codes = stretch.document_of(places) * properties.CODE_POINTS + points
    distinct, place = np.unique(codes, return_inverse=True)
    occurrence = np.arange(len(places)) < len(flagged)
    counts = [
        np.bincount(place, weights=flag, minlength=len(distinct)).astype(np.int64)
        for flag in (occurrence, ~occurrence)
    ]
    return ScriptRows(*np.divmod(distinct, properties.CODE_POINTS), np.stack(counts, axis=1))
