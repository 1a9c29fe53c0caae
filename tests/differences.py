"""What differs between two nested results: integers and nulls exactly, floats to the last bits."""

from __future__ import annotations

import pytest


def differences(ours, theirs, where=""):
    """Yield what differs; floats may differ in the last bits, integers and nulls may not."""
    if isinstance(ours, dict) and isinstance(theirs, dict):
        for key in sorted(ours.keys() | theirs.keys()):
            if key != "note":  # the reasons are worded apart
                yield from differences(ours.get(key), theirs.get(key), f"{where}/{key}")
    elif isinstance(ours, list) and isinstance(theirs, list) and len(ours) == len(theirs):
        for place, (one, other) in enumerate(zip(ours, theirs, strict=True)):
            yield from differences(one, other, f"{where}/{place}")
    elif isinstance(ours, float) and isinstance(theirs, float):
        if ours != pytest.approx(theirs, rel=1e-9, abs=1e-12):
            yield where, ours, theirs
    elif ours != theirs:
        yield where, ours, theirs
