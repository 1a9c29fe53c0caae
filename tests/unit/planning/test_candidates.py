"""Which lengths are weighed: those asked for, or those around the quantiles."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.errors import SettingsError
from auditor.planning import candidates
from auditor.planning.histogram import LengthHistogram

histograms = st.dictionaries(st.integers(2, 3000), st.integers(1, 50), min_size=1).map(
    lambda held: LengthHistogram.of(sorted(held.items()))
)
ONE_PERCENT = Fraction(1, 100)


def test_the_usual_ones_by_hand():
    """900 notes of 100 positions, 95 of 300 and 5 of 1,000; the model takes 512."""
    notes = LengthHistogram.of([(100, 900), (300, 95), (1000, 5)])
    found = candidates.usual(notes, 2, 512, ONE_PERCENT)
    assert found == {
        64: ["power of two", "beside p50", "beside p90"],
        128: ["power of two", "beside p50", "beside p90"],
        256: ["power of two", "beside p95", "beside p99"],
        304: ["accepted share"],
        320: ["beside p95", "beside p99"],
        512: ["power of two", "the limit"],
    }


@given(histograms, st.integers(0, 4), st.none() | st.integers(5, 4000))
def test_none_lies_beyond_the_limit_and_one_cuts_nothing(held, overhead, limit):
    """Every candidate has room for a token; without a limit the last one cuts no document."""
    found = list(candidates.usual(held, overhead, limit, ONE_PERCENT))
    assert found == sorted(found)
    assert found[0] > overhead
    assert limit is None or found[-1] <= max(limit, overhead + 1)
    if limit is None:
        assert found[-1] >= held.lengths[-1]


@given(histograms, st.fractions(0, 1).filter(lambda share: share < 1))
def test_the_smallest_length_is_the_smallest(held, accepted):
    """At most the accepted share is longer, and more than that are longer than one less."""
    found = candidates.smallest(held, accepted)
    longer = lambda length: int(held.documents[held.lengths > length].sum())  # noqa: E731
    assert Fraction(longer(found), held.total_documents) <= accepted
    assert Fraction(longer(found - 1), held.total_documents) > accepted or found == held.lengths[0]


def test_lengths_asked_for_must_have_room():
    """The template's own tokens leave none: said with the option to change."""
    assert candidates.given((512, 128), 2) == {128: ["asked for"], 512: ["asked for"]}
    with pytest.raises(SettingsError, match="no room for a token") as refused:
        candidates.given((512, 2), 2)
    assert "--candidates" in (refused.value.hint or "")
