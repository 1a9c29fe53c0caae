"""Documents by length, one by one and as a histogram."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable

from hypothesis import strategies as st

from auditor.planning.histogram import LengthHistogram

lengths_of_documents = st.lists(st.integers(0, 200), min_size=1, max_size=12)


def histogram_of(lengths: Iterable[int]) -> LengthHistogram:
    """Return the histogram of these documents."""
    return LengthHistogram.of(sorted(Counter(lengths).items()))
