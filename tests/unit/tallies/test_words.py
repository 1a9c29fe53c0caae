"""The tally of broken words past its bound: what is spilled, merged and sent is exact."""

from __future__ import annotations

import pickle
import random
from collections import Counter

import numpy as np
import pytest

from auditor.tallies import words
from auditor.tallies.words import BrokenWord, WordsTally, table_of

LETTERS = ["a", "b", "é", "中", "🌊", "·", "\0", "\n", '"']


def drawn(count, seed):
    """Return ``count`` rows, many of one word, with their counts."""
    source = random.Random(seed)
    rows = []
    for _ in range(count):
        word = "".join(source.choices(LETTERS, k=source.randint(0, 4)))
        rows.append(BrokenWord(word, word + "·x", source.randint(1, 3), source.randint(0, 1)))
    return [(row, source.randint(0, 5)) for row in rows]


def counted(rows):
    total = Counter()
    for row, count in rows:
        total[row] += count
    return sorted((row, count) for row, count in total.items() if count)


def filled(rows, bound, step):
    tally = WordsTally(in_memory=bound)
    for begin in range(0, len(rows), step):
        part = rows[begin : begin + step]
        counts = np.array([count for _, count in part], dtype=np.int64)
        tally.add_table(table_of([row for row, _ in part]), counts)
    return tally


@pytest.mark.parametrize(("bound", "step"), [(1, 1), (7, 3), (50, 20), (300, 1000), (10**6, 100)])
def test_all_rows_come_back_in_order(bound, step):
    """From memory alone, from a few files, and from so many that they are merged."""
    rows = drawn(3000, seed=bound)
    assert list(filled(rows, bound, step).rows()) == counted(rows)


@pytest.mark.parametrize("bound", [7, 10**6])
def test_a_tally_travels_and_merges(bound):
    """Between processes, and into one that has spilled as well."""
    rows, more = drawn(800, seed=1), drawn(900, seed=2)
    tally = pickle.loads(pickle.dumps(filled(rows, bound, 50)))
    assert list(tally.rows()) == counted(rows)
    tally.merge(filled(more, 11, 40))
    assert list(tally.rows()) == counted(rows + more)


@pytest.mark.parametrize("bound", [7, 50, 10**6])
@pytest.mark.parametrize("count", [1, 20, 10**6])
def test_the_largest_rows(bound, count):
    """Against sorting all rows; ties go by the row, and negative weights are left out."""
    rows = drawn(1500, seed=4)
    found = filled(rows, bound, 30).largest(
        count, lambda table: np.asarray(table["count"]) % 5 - np.asarray(table["unknown"]) * 3
    )
    weighed = [(n % 5 - row.unknown * 3, row, n) for row, n in counted(rows)]
    expected = sorted((-weight, row, n) for weight, row, n in weighed if weight >= 0)
    assert found == [(row, n) for _, row, n in expected[:count]]


def test_no_more_is_held_than_the_bound_allows(monkeypatch):
    """What is gathered at once stays within a few times the bound, however many rows there are."""
    sizes = []
    plain = words._summed
    monkeypatch.setattr(
        words, "_summed", lambda tables: sizes.append(sum(map(len, tables))) or plain(tables)
    )
    rows = [(BrokenWord(f"{place:06}", f"{place:06}", 1, 0), 1) for place in range(20_000)]
    random.Random(3).shuffle(rows)
    tally = filled(rows, 200, 90)
    assert list(tally.rows()) == sorted(rows)
    assert max(sizes) <= 5 * 200
    assert len(sizes) > 50
