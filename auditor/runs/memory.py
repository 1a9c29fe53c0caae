"""Gives freed memory back to the system: what a batch needed for a moment is not kept for ever."""

from __future__ import annotations

import ctypes
import ctypes.util
import sys
from functools import cache

EVERY = 8


@cache
def _trim() -> ctypes._NamedFuncPointer | None:
    """Return glibc's `malloc_trim`, ``None`` where the C library is another."""
    if not sys.platform.startswith("linux"):
        return None
    name = ctypes.util.find_library("c")
    return getattr(ctypes.CDLL(name), "malloc_trim", None) if name else None


def give_back() -> None:
    """Return what the C library's allocator holds but does not use; does nothing elsewhere.

    Without it a worker grows to the sum of the largest pieces that any step ever held.
    """
    trim = _trim()
    if trim is not None:
        trim(0)
