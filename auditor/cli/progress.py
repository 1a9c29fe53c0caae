"""A progress line on standard error: documents, MB/s and time left."""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from typing import Protocol

import click

SHOWN_AFTER = 1.0
_EVERY = 0.2


class Reached(Protocol):
    """How far a run is."""

    @property
    def read_bytes(self) -> int:
        """Bytes read of the files."""

    @property
    def total_bytes(self) -> int | None:
        """Bytes of all files, ``None`` when unknown."""

    @property
    def documents(self) -> int:
        """Documents read."""


class ProgressLine:
    """Call it with what is reached; shows nothing in the first second or off a terminal."""

    def __init__(self, clock: Callable[[], float] = time.monotonic) -> None:
        self._clock = clock
        self._began = clock()
        self._shown = 0.0

    def __call__(self, reached: Reached) -> None:
        """Show how far the run is, at most five times a second."""
        now = self._clock()
        if now - self._began < SHOWN_AFTER or now - self._shown < _EVERY:
            return
        self._shown = now
        click.echo(f"\r{line(reached, now - self._began):<79}", err=True, nl=False)

    def close(self) -> None:
        """Wipe the line away."""
        if self._shown:
            click.echo(f"\r{'':<79}\r", err=True, nl=False)


def line(reached: Reached, seconds: float) -> str:
    """Return one line of at most 79 columns."""
    speed = reached.read_bytes / seconds / 1e6
    told = f"{reached.documents:,} documents, {reached.read_bytes / 1e6:,.0f} MB, {speed:.1f} MB/s"
    if reached.total_bytes and reached.read_bytes:
        left = seconds * (reached.total_bytes / reached.read_bytes - 1)
        share = min(1.0, reached.read_bytes / reached.total_bytes)
        told = f"{share:4.0%}  {told}, {max(0.0, left):,.0f} s left"
    return told


def for_terminal(*, quiet: bool) -> ProgressLine | None:
    """Return a progress line, or ``None`` when standard error is no terminal or is to be quiet."""
    return None if quiet or not sys.stderr.isatty() else ProgressLine()
