"""Sentences: segments between the sentence boundaries of UAX #29, by ICU."""

from __future__ import annotations

from itertools import chain

import numpy as np
import numpy.typing as npt
from icu4py.breakers import SentenceBreaker

from auditor.text import properties
from auditor.text.boundaries import LOCALE, utf16_to_points

Ints = npt.NDArray[np.int64]


def sentence_ends(text: str) -> tuple[Ints, Ints]:
    """Return where each sentence but the last ends, and where the next one starts.

    The end comes before the whitespace that follows the sentence, the start after it (UAX #29 gives
    the whitespace to the sentence before). Code points from the start of ``text``; both of shape
    (sentences - 1,), and empty for an empty text.
    """
    segments = SentenceBreaker(text, LOCALE).segments()
    flat = np.fromiter(chain.from_iterable(segments), dtype=np.int64)
    points = np.frombuffer(text.encode("utf-32-le"), dtype=np.uint32)
    starts = utf16_to_points(flat.reshape(-1, 2)[1:, 0], points)
    ink = ~properties.table(properties.WHITESPACE)[points]
    # The place after the last character that is no whitespace, up to each character.
    inked = np.maximum.accumulate(np.where(ink, np.arange(1, len(points) + 1), 0))
    return inked[starts - 1], starts
