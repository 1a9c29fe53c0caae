"""Parts of a text as Arrow strings: equal ones are found without an object for each."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pyarrow as pa

Ints = npt.NDArray[np.int64]
Points = npt.NDArray[np.uint32]


def utf8_lengths(points: Points) -> Ints:
    """Return the UTF-8 bytes of each character (RFC 3629 section 3)."""
    return 1 + (points >= 0x80).astype(np.int64) + (points >= 0x800) + (points >= 0x10000)


def ranges(begins: Ints, lengths: Ints) -> Ints:
    """Return ``begins[i]`` up to ``begins[i] + lengths[i]``, one range after another."""
    found = np.repeat(begins - (np.cumsum(lengths) - lengths), lengths)
    found += np.arange(len(found))
    return found


def strings(points: Points, lengths: Ints) -> pa.LargeStringArray:
    """Return the strings of these lengths that ``points`` are, end to end."""
    begins = np.concatenate(([0], np.cumsum(lengths)))
    octets = np.concatenate(([0], np.cumsum(utf8_lengths(points))))[begins]
    data = points.astype("<u4").tobytes().decode("utf-32-le").encode()
    return pa.Array.from_buffers(
        pa.large_string(), len(lengths), [None, pa.py_buffer(octets), pa.py_buffer(data)]
    )


def integers(values: Ints) -> pa.Int64Array:
    """Return integers as an Arrow array over the same memory.

    Arrow's own way from NumPy first imports pandas, where that is installed.
    """
    held = pa.py_buffer(np.ascontiguousarray(values, dtype=np.int64))
    return pa.Array.from_buffers(pa.int64(), len(values), [None, held])


def distinct(points: Points, starts: Ints, ends: Ints) -> tuple[Ints, list[str]]:
    """Return the index of each part of ``points`` into the distinct parts, and these."""
    lengths = ends - starts
    found = strings(points[ranges(starts, lengths)], lengths).dictionary_encode()
    return np.asarray(found.indices).astype(np.int64), found.dictionary.to_pylist()
