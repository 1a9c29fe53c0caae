"""The laws of a tally, over every tally there is."""

from __future__ import annotations

import inspect
import json
import pickle
import pkgutil
import random
from importlib import import_module

import numpy as np
import pyarrow as pa
import pytest
from hypothesis import given
from hypothesis import strategies as st

import auditor.tallies
from auditor.errors import MergeError
from auditor.tallies.base import Tally
from auditor.tallies.characters import CharactersTally, Place
from auditor.tallies.corpus import DigestTally, FlawPlace, FlawsTally
from auditor.tallies.groups import groupings
from auditor.tallies.lengths import LengthsTally
from auditor.tallies.moments import MomentsTally, OriginsTally
from auditor.tallies.parallel import ParallelTally
from auditor.tallies.rows import RowsTally
from auditor.tallies.terms import TermRow, TermsTally
from auditor.tallies.usage import UsageTally
from auditor.tallies.whitespace import COLUMNS, WhitespaceTally
from auditor.tallies.wordcounts import WordCountsTally
from auditor.tallies.words import BrokenWord, WordsTally

# One invented document: tokens, words, language, origin, text.
documents = st.lists(
    st.tuples(
        st.integers(0, 2**40),
        st.integers(0, 9),
        st.sampled_from(["pt", "el", "ja"]),
        st.sampled_from(["a", "b"]),
        st.text(max_size=3),
    ),
    max_size=12,
)
COLUMNS_USED = ("documents", "tokens", "words")


def columns(rows):
    tokens = np.array([row[0] for row in rows], dtype=np.int64)
    words = np.array([row[1] for row in rows], dtype=np.int64)
    return {"documents": np.ones(len(rows), dtype=np.int64), "tokens": tokens, "words": words}


def groups(rows):
    return groupings(len(rows), {"lang": [f"lang={row[2]}" for row in rows]})


def fill_moments(tally, rows, _):
    tally.add(columns(rows), groups(rows))


def fill_origins(tally, rows, _):
    tally.add(columns(rows), groups(rows), [row[3] for row in rows])


def fill_lengths(tally, rows, _):
    tally.add(np.array([row[0] % 50 for row in rows], dtype=np.int64), groups(rows))


def fill_whitespace(tally, rows, _):
    kinds = np.array([row[1] % 2 for row in rows], dtype=np.int64)
    table = np.array([[1 + row[1]] * len(COLUMNS) for row in rows], dtype=np.int64)
    tally.add(kinds, table.reshape(-1, len(COLUMNS)), np.arange(len(rows)), groups(rows))


def fill_usage(tally, rows, _):
    tally.add(np.array([row[0] % 7 for row in rows], dtype=np.int64))


def fill_words(tally, rows, _):
    for row in rows:
        tally.add(BrokenWord(row[4], row[2], row[1], 0), 1)


def fill_word_counts(tally, rows, _):
    counts = np.array([row[1] for row in rows], dtype=np.int64)
    tally.add(pa.array([row[4] for row in rows], pa.string()), counts)


def fill_terms(tally, rows, _):
    for row in rows:
        tally.add(TermRow(row[2], row[4], row[3], row[1], 0, row[1] % 2, 0, 0), 1 + row[1])


def fill_characters(tally, rows, begin):
    for place, row in enumerate(rows):
        tally.add(row[2], row[3], 1 + row[1], Place(row[1] % 2, begin + place))


def fill_flaws(tally, rows, begin):
    tally.add(FlawPlace(0, begin + place, row[2], row[3]) for place, row in enumerate(rows))


def fill_digest(tally, rows, _):
    tally.add(row[4] for row in rows)


def fill_rows(tally, rows, _):
    every = np.arange(len(rows))
    counts = np.array([[row[0], row[1]] for row in rows], dtype=np.int64)
    names = ["a", "b", "c"]
    places = np.array([row[1] % 3 for row in rows], dtype=np.int64)
    tally.add(every, places, names, counts, groups(rows))


def fill_parallel(tally, rows, _):
    contents = [row[3] if row[1] else None for row in rows]
    table = np.array([[row[0]] for row in rows], dtype=np.int64)
    tally.add(contents, [row[2] for row in rows], table)


# Each tally: how an empty one is made, one of other settings (None: it has none), how it is filled.
TALLIES = {
    MomentsTally: (
        lambda: MomentsTally(COLUMNS_USED, (("tokens", "words"),)),
        lambda: MomentsTally(COLUMNS_USED, (("words", "tokens"),)),
        fill_moments,
    ),
    OriginsTally: (
        lambda: OriginsTally(COLUMNS_USED),
        lambda: OriginsTally(("words",)),
        fill_origins,
    ),
    LengthsTally: (lambda: LengthsTally(2), lambda: LengthsTally(3), fill_lengths),
    WhitespaceTally: (
        lambda: WhitespaceTally(("tab", "other")),
        lambda: WhitespaceTally(("tab",)),
        fill_whitespace,
    ),
    UsageTally: (lambda: UsageTally(7), lambda: UsageTally(8), fill_usage),
    RowsTally: (lambda: RowsTally(("x", "y")), lambda: RowsTally(("x",)), fill_rows),
    ParallelTally: (
        lambda: ParallelTally(("tokens",)),
        lambda: ParallelTally(("words",)),
        fill_parallel,
    ),
    WordsTally: (lambda: WordsTally(in_memory=2), None, fill_words),
    WordCountsTally: (lambda: WordCountsTally(in_memory=2), None, fill_word_counts),
    TermsTally: (lambda: TermsTally("one"), lambda: TermsTally("another"), fill_terms),
    CharactersTally: (CharactersTally, None, fill_characters),
    FlawsTally: (FlawsTally, None, fill_flaws),
    DigestTally: (lambda: DigestTally(distinct=True), DigestTally, fill_digest),
}
every_tally = pytest.mark.parametrize("kind", list(TALLIES), ids=lambda kind: kind.__name__)


def filled(kind, rows, begin=0):
    make, _, fill = TALLIES[kind]
    tally = make()
    if rows:
        fill(tally, rows, begin)
    return tally


def merged(kind, *tallies):
    whole = TALLIES[kind][0]()
    for tally in tallies:
        whole.merge(tally)
    return whole


def test_every_tally_of_the_package_is_under_the_laws():
    """A new tally cannot be forgotten here."""
    found = set()
    for module in pkgutil.iter_modules(auditor.tallies.__path__):
        held = import_module(f"auditor.tallies.{module.name}")
        found |= {
            c for _, c in inspect.getmembers(held, inspect.isclass)
            if issubclass(c, Tally) and not inspect.isabstract(c)
        }  # fmt: skip
    assert found == set(TALLIES)


@every_tally
@given(rows=documents)
def test_empty_is_the_identity(kind, rows):
    """Merging an empty tally, on either side, changes nothing."""
    tally = filled(kind, rows)
    empty = TALLIES[kind][0]()
    assert merged(kind, tally, empty) == tally
    assert merged(kind, empty, tally) == tally


@every_tally
@given(a=documents, b=documents, c=documents)
def test_merge_is_associative_and_commutative(kind, a, b, c):
    """The order and the bracketing of merges do not matter."""
    x, y, z = filled(kind, a), filled(kind, b, 100), filled(kind, c, 200)
    assert merged(kind, x, y) == merged(kind, y, x)
    assert merged(kind, merged(kind, x, y), z) == merged(kind, x, merged(kind, y, z))


@every_tally
@given(rows=documents, seed=st.integers(0, 99))
def test_cutting_the_corpus_changes_nothing(kind, rows, seed):
    """Any cut into parts, each filled apart and merged in any order, gives the whole."""
    cut = random.Random(seed).randint(0, len(rows))
    parts = [filled(kind, rows[:cut], 0), filled(kind, rows[cut:], cut)]
    random.Random(seed).shuffle(parts)
    assert merged(kind, *parts) == filled(kind, rows)


@every_tally
@given(rows=documents)
def test_saving_and_loading_changes_nothing(kind, rows):
    """Counts survive the trip through JSON, whose integers have no bound here."""
    tally, loaded = filled(kind, rows), TALLIES[kind][0]()
    loaded.fill(json.loads(json.dumps(tally.counts())))
    assert loaded == tally


@pytest.mark.parametrize("kind", [kind for kind, row in TALLIES.items() if row[1]])
def test_other_settings_refuse_to_merge(kind):
    """A tally made with other settings is an error, not a wrong sum."""
    make, other, _ = TALLIES[kind]
    with pytest.raises(MergeError):
        make().merge(other())


@every_tally
def test_a_difference_is_seen(kind):
    """Equality looks at the counts: one document more is another tally."""
    row = (3, 1, "pt", "a", "x")
    assert filled(kind, [row]) != filled(kind, [row, (4, 2, "el", "b", "y")])


def test_sums_past_64_bits_stay_exact():
    """Two documents of 2**40 tokens: the sum of squares is 2**81, an integer of Python's."""
    rows = [(2**40, 1, "pt", "a", ""), (2**40, 1, "pt", "a", "")]
    tally = filled(MomentsTally, rows)
    assert tally.moments("all", "tokens", "words").yy == 2**81


def test_words_travel_between_processes_by_file():
    """A pickled tally of words is small whatever it holds, and arrives whole."""
    tally = filled(WordsTally, [(n, n % 9, "pt", "a", f"w{n}") for n in range(500)])
    sent = pickle.dumps(tally)
    assert len(sent) < 500
    assert pickle.loads(sent) == tally
