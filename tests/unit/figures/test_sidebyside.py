"""Paired figures of vocabularies, against the plain estimator on each document's numbers."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.figures import sidebyside
from auditor.figures.intervals import Z
from auditor.tallies.groups import ALL, Grouping
from auditor.tallies.moments import MomentsTally
from tests.unit.figures.test_published_statistics import CITIES, DISTRICTS

DOCUMENTS = st.lists(
    st.tuples(
        st.integers(1, 50), st.integers(0, 90), st.integers(1, 90), st.integers(0, 9),
        st.integers(0, 9),
    ),
    min_size=2,
    max_size=30,
)  # fmt: skip


def filled(rows):
    """A tally of documents given as (ink, tokens, tokens, lost, lost)."""
    ink, first, second, lost, other = np.array(rows, dtype=np.int64).T
    tally = MomentsTally(sidebyside.columns(2), sidebyside.pairs(2))
    held = {
        "documents": np.ones_like(ink), "ink_characters": ink, "tokens:0": first,
        "tokens:1": second, "lost:0": lost, "lost:1": other,
    }  # fmt: skip
    tally.add(held, [Grouping([ALL], np.zeros(len(ink), dtype=np.int64))])
    return tally


def estimator(y, x):
    """Cochran (1977), Sampling Techniques, 3rd ed., chapter 6, written out."""
    y, x = np.array(y, dtype=float), np.array(x, dtype=float)
    ratio, n = y.sum() / x.sum(), len(y)
    error = np.sqrt(n / (n - 1) * ((y - ratio * x) ** 2).sum()) / x.sum()
    return ratio, ratio - Z * error, ratio + Z * error


@given(DOCUMENTS)
def test_figures_equal_the_estimator_on_each_documents_numbers(rows):
    """Ratios of tokens both ways, and the difference of losses, which may be below 0."""
    tally = filled(rows)
    ink, first, second, lost, other = zip(*rows, strict=True)
    for found, wanted in (
        (sidebyside.tokens_ratio(tally, ALL, 0, 1), estimator(first, second)),
        (
            sidebyside.loss_difference(tally, ALL, 1, 0),
            estimator(np.subtract(other, lost), ink),
        ),
    ):
        assert (found.value, found.low, found.high) == pytest.approx(wanted, abs=1e-9)


def test_a_published_ratio_of_paired_totals():
    """49 cities: R = 1.2390186, s.e. of the total of 196 604.04, corrected by 1 - 49/196.

    Cochran (1977), chapter 6, by the sums of R's boot::bigcity.
    """
    found = sidebyside.tokens_ratio(filled([(1, y, x, 0, 0) for x, y in CITIES]), ALL, 0, 1)
    error = (found.high - found.value) / Z
    assert found.value == pytest.approx(1.2390186, abs=1e-7)
    assert error * 4 * 5_054 * (1 - 49 / 196) ** 0.5 == pytest.approx(604.04, abs=0.05)


def test_the_survey_package_s_paired_ratio():
    """R `survey`: svyratio(~api.stu, ~enroll, dclus1) = 0.8497087, SE 0.008386297.

    Two counts of each of 15 school districts, as two vocabularies' tokens of a document; the
    package corrects for the 757 districts there are, by the root of 1 - 15/757.
    """
    rows = [(1, stu, enroll, 0, 0) for stu, enroll, *_ in DISTRICTS]
    found = sidebyside.tokens_ratio(filled(rows), ALL, 0, 1)
    assert found.value == pytest.approx(0.8497087, abs=5e-8)
    error = (found.high - found.value) / Z * (1 - 15 / 757) ** 0.5
    assert error == pytest.approx(0.008386297, abs=5e-10)


def test_nothing_to_divide_by_is_undefined():
    """No tokens on the other side; one document has no interval."""
    tally = filled([(5, 3, 0, 1, 0)])
    assert sidebyside.tokens_ratio(tally, ALL, 0, 1).value is None
    assert sidebyside.loss_difference(tally, ALL, 0, 1).low is None
    assert sidebyside.loss_difference(tally, ALL, 0, 1).value == pytest.approx(0.2)
