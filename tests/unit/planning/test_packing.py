"""Packing: against documents placed one by one, the true optimum, and published efficiencies."""

from __future__ import annotations

from functools import cache

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.errors import SettingsError
from auditor.planning.histogram import LengthHistogram
from auditor.planning.packing import best_fit, fewest_packs, worst_fit
from tests.unit.planning.documents import histogram_of
from tests.unit.planning.squad_lengths import squad
from tests.unit.planning.wikipedia_lengths import wikipedia

LENGTH = 20
sizes = st.lists(st.integers(0, LENGTH), min_size=1, max_size=30)
few = st.lists(st.integers(1, LENGTH), min_size=1, max_size=8)
depths = st.none() | st.integers(1, 5)


def one_by_one(lengths, depth, *, widest):
    """Place documents one by one, longest first; return how many each sequence holds.

    Where no sequence takes one, best fit opens one; worst fit opens one for each document of this
    size that is left, as Krell et al. 2021 do.
    """
    packs = []  # [room, held]
    lengths = sorted(lengths, reverse=True)
    while lengths:
        size = lengths[0]
        open_ = [own for own in packs if own[0] >= size and own[1] != depth]
        if open_:
            chosen = (max if widest else min)(open_, key=lambda own: own[0])
            chosen[0] -= size
            chosen[1] += 1
            lengths.pop(0)
            continue
        for _ in range(lengths.count(size) if widest else 1):
            packs.append([LENGTH - size, 1])
            lengths.pop(0)
    return [held for _, held in packs]


@given(sizes)
def test_groups_of_sequences_pack_as_single_documents_do(lengths):
    """Both ways without a bound, in every order of lengths: packs and the fullest of them."""
    held = histogram_of(lengths)
    for pack, widest in ((worst_fit, True), (best_fit, False)):
        expected = one_by_one(lengths, None, widest=widest)
        assert pack(held, LENGTH).packs == len(expected)


@given(sizes, depths)
def test_no_sequence_holds_more_than_is_allowed(lengths, depth):
    """Depth, positions and documents add up whatever the order of alike sequences."""
    for pack in (worst_fit, best_fit):
        found = pack(histogram_of(lengths), LENGTH, depth)
        assert found.documents == len(lengths)
        assert found.packs * found.most_documents >= len(lengths)
        assert depth is None or found.most_documents <= depth
        assert found.positions == sum(lengths) <= found.packs * LENGTH


@given(few)
def test_the_optimum_lies_between_the_bound_and_the_packings(lengths):
    """Best-fit decreasing needs at most 11/9 of it and 6/9 (Dósa 2007, for first fit; Johnson 1973
    shows that best fit keeps the same factor; the constant for it is from memory)."""
    best = optimum(tuple(sorted(lengths, reverse=True)))
    held = histogram_of(lengths)
    assert fewest_packs(held, LENGTH) <= best <= best_fit(held, LENGTH).packs
    assert 9 * best_fit(held, LENGTH).packs <= 11 * best + 6
    assert best <= worst_fit(held, LENGTH).packs


@cache
def optimum(lengths):
    """Return the fewest sequences, by trying every place for every document."""

    def fits(place, rooms):
        if place == len(lengths):
            return True
        size = lengths[place]
        for number, room in enumerate(rooms):
            fresh = room >= size and room not in rooms[:number]
            if fresh and fits(place + 1, (*rooms[:number], room - size, *rooms[number + 1 :])):
                return True
        return False

    return next(n for n in range(1, len(lengths) + 1) if fits(0, (LENGTH,) * n))


@pytest.mark.parametrize(
    ("depth", "percent"), [(1, 50.0), (3, 89.4), (8, 98.9), (12, 99.6040), (None, 99.6)]
)
def test_worst_fit_gives_the_published_efficiencies(depth, percent):
    """Wikipedia at 512: Krell et al. 2021, Table 1, and 99.6040 at 12 in the authors' README."""
    digits = 4 if depth == 12 else 1
    assert round(100 * worst_fit(wikipedia(), 512, depth).efficiency, digits) == percent


def test_worst_fit_gives_the_published_factor_and_packs():
    """Depth 12: factor 1.99340, 8,166,708 sequences (the authors' README and code)."""
    found = worst_fit(wikipedia(), 512, 12)
    assert (found.documents, found.packs, round(found.factor, 5)) == (16279552, 8166708, 1.9934)


def test_best_fit_gives_the_published_longest_pack_first():
    """Depth 12 of "longest-pack-first": 99.8129 %, 1.99758, 8,149,619 sequences (their README)."""
    found = best_fit(wikipedia(), 512, 12)
    assert found.packs == 8149619
    assert (round(100 * found.efficiency, 4), round(found.factor, 5)) == (99.8129, 1.99758)


def test_the_published_limit_of_the_factor():
    """Wikipedia's sequences fill 1 / 2.00133 of their positions (Krell et al. 2021, section 2)."""
    held = wikipedia()
    assert round(held.total_documents * 512 / held.total_positions, 5) == 2.00133
    assert fewest_packs(held, 512) == -(-held.total_positions // 512)


def test_question_answering_packs_as_computed():
    """SQuAD 1.1 at 384: 97.5466 % from depth 3 on; computed independently, not published."""
    found = [worst_fit(squad(), 384, depth) for depth in (2, 3, None)]
    assert [round(100 * own.efficiency, 4) for own in found] == [87.5972, 97.5466, 97.5466]
    assert found[1].packs == 40711


def test_documents_of_a_worked_example():
    """14, 7, 5, 2, 3 at 8, the longest split 8 + 6: four sequences (Ding et al. 2024, Figure 1)."""
    assert best_fit(histogram_of([8, 6, 7, 5, 2, 3]), 8).packs == 4


def test_a_document_that_does_not_fit_is_refused():
    """It must be cut or dropped before."""
    for pack in (best_fit, worst_fit, fewest_packs):
        with pytest.raises(SettingsError, match="does not fit into 8"):
            pack(LengthHistogram.of([(9, 1)]), 8)


def test_empty_documents_take_no_room():
    """A thousand of them and one full sequence."""
    held = LengthHistogram.of([(0, 1000), (LENGTH, 1)])
    assert best_fit(held, LENGTH).packs == worst_fit(held, LENGTH).packs == 1
    assert best_fit(held, LENGTH, 4).packs == 251
