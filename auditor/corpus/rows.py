"""What every reader of a format hands over: one row a record, with its place and its flaws."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple


class Mend(NamedTuple):
    """What was put right in a record: a fixed reason, and the details."""

    reason: str
    detail: str = ""


@dataclass(frozen=True, slots=True)
class Damage:
    """A record that cannot be read: a fixed reason, and the details."""

    reason: str
    detail: str = ""


# The 1-based place, the record (Damage when it cannot be read), what was mended in it.
Row = tuple[int, object, tuple[Mend, ...]]
NOT_MENDED: tuple[Mend, ...] = ()


def decoded(raw: bytes, reason: str = "invalid UTF-8") -> tuple[str, tuple[Mend, ...]]:
    """Return ``raw`` as text, every invalid sequence replaced by U+FFFD and told by the mend.

    The detail gives the 1-based byte of the first one, counted from the beginning of ``raw``.
    """
    try:
        return raw.decode(), NOT_MENDED
    except UnicodeDecodeError as fault:
        mend = Mend(reason, f"byte {fault.start + 1}")
        return raw.decode(errors="replace"), (mend,)
