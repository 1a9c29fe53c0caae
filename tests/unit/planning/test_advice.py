"""The choice, its neighbours, and the accepted shares for which it stays."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.planning.advice import advise
from auditor.planning.histogram import LengthHistogram
from auditor.planning.model import parse_model
from auditor.planning.plan import Known, Wishes, candidates_of, weigh

NOTES = LengthHistogram.of([(100, 900), (300, 85), (700, 10), (1000, 5)])
STORMS = LengthHistogram.of([(300, 10), (1000, 5)])
histograms = st.dictionaries(st.integers(3, 900), st.integers(1, 60), min_size=1, max_size=9).map(
    lambda held: LengthHistogram.of(sorted(held.items()))
)


def advised(histogram, accepted="1/100", limit=None, lengths=(), **slices):
    known = Known({"all": histogram, **slices}, 2, limit)
    wishes = Wishes(lengths=lengths, accepted=Fraction(accepted))
    return advise(known, wishes, weigh(known, wishes, candidates_of(known, wishes)))


def test_the_smallest_length_that_cuts_no_more_than_accepted():
    """1,000 notes: 15 are longer than 300, 5 longer than 700; 1 % is 10."""
    found = advised(NOTES)
    assert (found["length"], found["meets_accepted_share"]) == (704, True)
    assert (found["cheaper"]["length"], found["safer"]["length"]) == (640, 960)
    assert found["holds_for_accepted"] == {"from": 0.005, "below": 0.015}
    assert found["accepted_share_needs"] == 704


def test_the_limit_where_none_is_good_enough():
    """At 512 fifteen are cut; the advice stays the limit until 100 are accepted (304 would do)."""
    found = advised(NOTES, limit=512)
    assert (found["length"], found["is_the_limit"], found["safer"]) == (512, True, None)
    assert found["meets_accepted_share"] is False
    assert found["holds_for_accepted"] == {"from": 0.0, "below": 0.015}
    assert found["accepted_share_needs"] == 704


def test_a_slice_that_pays_for_all_is_named():
    """Storm logs are 1.5 % of the notes, and a third of them is cut at 704."""
    found = advised(NOTES, **{"kind=storm": STORMS})
    assert [own["slice"] for own in found["slices_beyond_accepted"]] == ["kind=storm"]
    assert found["slices_beyond_accepted"][0]["truncated_documents"]["numerator"] == 5
    assert found["every_slice_needs"] == 1000


def test_lengths_asked_for_are_the_only_ones():
    """The smallest of those that do; the longest where none does."""
    assert advised(NOTES, lengths=(256, 750, 2000))["length"] == 750
    assert advised(NOTES, lengths=(64, 128))["length"] == 128


@given(histograms, st.fractions(0, Fraction(1, 2)))
def test_the_advice_changes_where_it_says(held, accepted):
    """Asked again with the two ends of the range that it names, it stays and it changes."""
    first = advised(held, accepted)
    least, below = first["holds_for_accepted"].values()
    assert first["meets_accepted_share"]  # without a limit one candidate cuts nothing
    documents = held.total_documents
    at = lambda share: advised(held, Fraction(round(share * documents), documents))  # noqa: E731
    assert at(least)["length"] == first["length"]
    if below is not None and below < 1:
        assert at(below)["length"] < first["length"]


@given(histograms, st.fractions(0, Fraction(1, 2)))
def test_the_upper_end_is_accepted_at_the_length_named(held, accepted):
    """The interval of the length it names ends within the accepted share, and not one below."""
    found = advised(held, accepted)["upper_end_needs"]
    known = Known({"all": held}, 2, None)
    high = lambda length: weigh(known, Wishes(lengths=(length,)), {length: [""]})[0][  # noqa: E731
        "truncated_documents"
    ]["high"]
    if found is None:
        end = high(int(held.lengths[-1]))
        assert end is None or end > accepted
    else:
        assert high(found) <= accepted
        assert found <= 8 or high(found - 8) > accepted or high(found - 8) is None


@pytest.mark.parametrize("which", ["safer", "cheaper"])
def test_compute_is_compared_by_positions_or_by_operations(which):
    """Padded: in proportion to length without a model, with attention's square with one."""
    known = Known({"all": NOTES}, 2, None)
    shape = parse_model("layers=1,width=2,heads=1,inner=4")
    for model in (None, shape):
        wishes = Wishes(lengths=(352, 704, 1408), model=model)
        found = advise(known, wishes, weigh(known, wishes, candidates_of(known, wishes)))
        factor = {"safer": 2, "cheaper": 0.5}[which]
        # One layer: 2·(4·2·2 + 2·2·4) = 64 a position, 8 a pair of positions.
        cost = lambda n: 64 * n + 8 * n * n  # noqa: E731
        exact = factor if model is None else cost(int(704 * factor)) / cost(704)
        assert found[which]["compute_fixed"] == pytest.approx(exact, rel=1e-12)
