"""Positions computed on padding, for documents padded one by one or in batches.

The expected longest document of a random batch. With N documents of which F are no longer than l
and a = N - F are longer, a batch of b holds none of the a with probability

    P = C(F, b) / C(N, b),    -ln P = ln N! - ln F! - ln (N-b)! + ln (F-b)!

The four logarithms are some 10**10 for 10**9 documents and their sum may be 10**-9, so that
differences of a log-gamma function would leave no digit; a product of b factors per length is too
slow for large batches. With ln n! = x ln x - x + ln(2π)/2 + r(n) at x = n + 1/2 (Stirling's series
about the half, DLMF 5.11.8) everything large cancels on paper instead, X standing for N + 1/2:

    -ln P = (X-a-b) ln(1 - ab/((X-a)(X-b))) - b ln(1 - a/X) - a ln(1 - b/X)
            + r(N) - r(F) - r(N-b) + r(F-b)

The first three terms sum to the integral T of 1/(X-s-t) over 0 < s < a, 0 < t < b. The second and
the third are at most T each, so the first is no larger than T either, and rounding grows at most
threefold. All r lie between -0.073 and 0 and fall as 1/(24x), which T outweighs (T >= ab/X). The
relative error of -ln P, hence of 1 - P, is a few units of the last place.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from auditor.errors import SettingsError
from auditor.planning.histogram import Ints, LengthHistogram

Floats = npt.NDArray[np.float64]

# -ln P >= ab/N, and exp(-40) is below half a unit in the last place of 1.
_CERTAIN = 40.0
# From here on the first term left out of Stirling's series, 0.00084 / x**9, is below 2.2e-17.
_SERIES_FROM = 32


@dataclass(frozen=True)
class Padding:
    """What padding costs, in positions.

    ``positions`` are those of the documents; ``padded`` are those computed, padding included: an
    integer, or a float where it is an expectation.
    """

    positions: int
    padded: int | float

    @property
    def share(self) -> float | None:
        """The share of padding in the positions computed; None when none are."""
        return (self.padded - self.positions) / self.padded if self.padded else None


def fixed(histogram: LengthHistogram, length: int) -> Padding:
    """Return the padding of every document to ``length`` positions.

    Raises SettingsError when a document is longer.
    """
    longest = int(histogram.lengths[-1])
    if length < longest:
        raise SettingsError(
            f"Documents of {longest} positions cannot be padded to {length}.",
            hint="Cut the histogram at that length first.",
        )
    return Padding(histogram.total_positions, histogram.total_documents * length)


def random_batches(histogram: LengthHistogram, batch: int) -> Padding:
    """Return the padding expected when shuffled documents are batched, each batch to its longest.

    ``batch`` is in documents; the last batch holds what is left over. The expectation is over all
    shuffles of this very corpus, hence without replacement, and exact but for the rounding of
    floats (module docstring). Raises SettingsError for a batch below 1.
    """
    _check(batch)
    positions, documents = histogram.total_positions, histogram.total_documents
    if batch == 1:
        return Padding(positions, positions)
    full, left = divmod(documents, batch)
    padded = 0.0
    if full:
        padded += full * batch * _expected_longest(histogram, batch)
    if left:
        padded += left * _expected_longest(histogram, left)
    return Padding(positions, max(padded, float(positions)))


def similar_batches(histogram: LengthHistogram, batch: int) -> Padding:
    """Return the padding when documents sorted by length are batched, each batch to its longest.

    The order is ascending, so that the last batch, which holds what is left over, has the longest
    documents; with a handful of batches another order may pad less. ``batch`` is in documents.
    Raises SettingsError for a batch below 1.
    """
    _check(batch)
    ends = np.cumsum(histogram.documents) // batch
    # A full batch is padded to its last document. The sum stays below the positions in all: no
    # batch has a longest document of more positions than it holds.
    longest = int(histogram.lengths @ np.diff(ends, prepend=0))
    left = histogram.total_documents % batch
    return Padding(histogram.total_positions, longest * batch + left * int(histogram.lengths[-1]))


def _check(batch: int) -> None:
    if batch < 1:
        raise SettingsError(
            f"A batch of {batch} documents is not possible.", hint="Give a batch of at least 1."
        )


def _expected_longest(histogram: LengthHistogram, batch: int) -> float:
    """Return E[longest] of ``batch`` documents (1 to all of them) drawn without replacement.

    The shortest length plus every step to the next length times the probability that a longer
    document is drawn: terms of one sign, so that no digit is lost.
    """
    reached = np.cumsum(histogram.documents)
    chances = _chance_of_longer(reached[:-1], int(reached[-1]), batch)
    return float(histogram.lengths[0] + (np.diff(histogram.lengths) * chances).sum())


def _chance_of_longer(reached: Ints, documents: int, batch: int) -> Floats:
    """Return 1 - P for each count of documents that are no longer; shape of ``reached``."""
    longer = (documents - reached).astype(np.float64)
    undecided = (reached >= batch) & (longer * batch <= _CERTAIN * documents)
    chances = np.ones(len(reached))
    chances[undecided] = -np.expm1(-_surprise(reached[undecided], documents, batch))
    return chances


def _surprise(reached: Ints, documents: int, batch: int) -> Floats:
    """Return -ln P by the formula of the module docstring; ``reached`` is at least ``batch``."""
    longer, everything = documents - reached, documents + 0.5
    crossed = longer * float(batch) / ((reached + 0.5) * (documents - batch + 0.5))
    remainders = _remainder(np.array([documents, documents - batch], dtype=np.int64))
    surprise: Floats = (
        (reached - batch + 0.5) * np.log1p(-crossed)
        - batch * np.log1p(-longer / everything)
        - longer * np.log1p(-batch / everything)
        + (remainders[0] - remainders[1] - _remainder(reached) + _remainder(reached - batch))
    )
    return surprise


def _remainder(n: Ints) -> Floats:
    """Return r(n) = ln n! - (x ln x - x + ln(2π)/2), x = n + 1/2."""
    values = _series(n)
    small = n < _SERIES_FROM
    values[small] = _SMALL_REMAINDERS[n[small]]
    return values


def _series(n: Ints) -> Floats:
    """Return the first four terms of DLMF 5.11.8 with h = 1/2."""
    x = n + 0.5
    s = 1 / (x * x)
    terms: Floats = -(1 / 24 - s * (7 / 2880 - s * (31 / 40320 - s * (127 / 215040)))) / x
    return terms


def _small_remainders() -> Floats:
    """Return r(0) to r(_SERIES_FROM - 1), downwards from the series.

    r(n+1) - r(n) = 1 - ln(1-z²)/2 - artanh(z)/z = sum of z^(2k) / (2k(2k+1)) over k >= 1, where
    z = 1/(2n+2) is at most 1/2, so that thirty terms are plenty.
    """
    n = np.arange(_SERIES_FROM)[:, None]
    k = np.arange(1, 31)
    steps = (1 / (2 * n + 2.0) ** (2 * k) / (2 * k * (2 * k + 1))).sum(axis=1)
    start = _series(np.array([_SERIES_FROM], dtype=np.int64))
    small: Floats = start - np.cumsum(steps[::-1])[::-1]
    return small


_SMALL_REMAINDERS = _small_remainders()
