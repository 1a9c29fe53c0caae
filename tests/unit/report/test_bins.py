"""Bars of lengths: nothing is lost, the limit lies on an edge or cuts its bar in two."""

from __future__ import annotations

from itertools import pairwise

from hypothesis import given
from hypothesis import strategies as st

from auditor.report.bins import Bar, Scale, round_step, scale_for

lengths = st.one_of(st.integers(0, 200), st.integers(0, 3_000_000))
histograms = st.dictionaries(lengths, st.integers(1, 50), min_size=1, max_size=30)


@given(histograms, st.one_of(st.none(), lengths))
def test_every_document_is_in_the_bar_of_its_length(counts, limit):
    """Bars hold what a plain count by their bounds gives, on both sides of the limit."""
    held = sorted(counts.items())
    bars = scale_for(held[0][0], held[-1][0]).bars(held, limit)
    assert sum(bar.within + bar.beyond for bar in bars) == sum(counts.values())
    for bar in bars:
        inside = [(n, c) for n, c in held if bar.first <= n <= bar.last]
        beyond = sum(c for n, c in inside if limit is not None and n > limit)
        assert (bar.within + bar.beyond, bar.beyond) == (sum(c for _, c in inside), beyond)


@given(lengths, lengths)
def test_lengths_stand_in_order_within_the_drawing(one, other):
    """Longer stands further right, and none outside; so do the few ticks."""
    scale = scale_for(min(one, other), max(one, other))
    assert all(left < right for left, right in pairwise(map(scale.position, scale.edges)))
    assert 0 <= scale.position(min(one, other)) <= scale.position(max(one, other)) <= 1
    assert all(0 <= scale.position(tick) <= 1 for tick in scale.ticks())
    assert len(scale.ticks()) <= 9
    assert len(scale.edges) <= 120


def test_a_doubling_takes_the_same_width():
    """On a wide range 256 stands halfway between 16 and 4,096: four doublings on each side."""
    scale = scale_for(16, 4096)
    middle = (scale.position(16) + scale.position(4096)) / 2
    assert scale.doubling
    assert abs(scale.position(256) - middle) < 1e-12


def test_a_power_of_two_ends_its_bar():
    """With the limit 512 no bar holds documents of both sides."""
    bars = scale_for(3, 2000).bars([(500, 4), (512, 2), (513, 1)], 512)
    assert [(bar.within, bar.beyond) for bar in bars][-1] == (0, 1)
    assert all(not (bar.within and bar.beyond) for bar in bars)


def test_a_limit_inside_a_bar_cuts_its_count():
    """A bar from 501 to 510 with the limit 505 counts both parts."""
    scale = Scale((500, 510), doubling=False)
    assert scale.bars([(503, 2), (507, 3)], 505) == [Bar(501, 510, 2, 3)]


def test_steps_are_round():
    """Steps are 1, 2 or 5 times a power of ten."""
    assert [round_step(least) for least in (0.3, 1, 3, 7, 40, 51)] == [0.5, 1, 5, 10, 50, 100]
