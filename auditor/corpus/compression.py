"""Compressed streams, expanded piece by piece; all that lies before a break is handed over."""

from __future__ import annotations

import bz2
import lzma
import zlib
from collections.abc import Callable, Iterator
from typing import Literal, Protocol

import zstandard

from auditor.corpus.rows import Damage

Compression = Literal["gz", "zst", "bz2", "xz"]

ENDS_EARLY = Damage("compressed stream ends early")
# Not every compression notices a damage at its place: some text comes out before it is found.
DAMAGED = Damage("compressed stream is damaged", "documents read before this may be wrong")

_PIECE = 1 << 18
_READ = 1 << 16
# Four bytes of zstd can stand for 128 KiB and its library knows no bound on what it returns, so
# that little is fed at a time: at most 16 MiB come back, a few KiB as a rule.
_ZSTD_FEED = 1 << 9


class Bytes(Protocol):
    """What bytes are read from."""

    def read(self, size: int, /) -> bytes:
        """Return up to ``size`` bytes, none at the end."""


class _Expander(Protocol):
    eof: bool
    unused_data: bytes

    def pieces(self, data: bytes) -> Iterator[bytes]: ...

    def rest(self) -> bytes: ...


class _Gzip:
    def __init__(self) -> None:
        self._inner = zlib.decompressobj(wbits=31)
        self.eof = False
        self.unused_data = b""

    def pieces(self, data: bytes) -> Iterator[bytes]:
        while data and not self._inner.eof:
            yield self._inner.decompress(data, _PIECE)
            data = self._inner.unconsumed_tail
        self.eof, self.unused_data = self._inner.eof, self._inner.unused_data

    def rest(self) -> bytes:
        found = self._inner.flush()
        self.eof = self._inner.eof
        return found


class _Bounded:
    """bzip2 and xz share the standard library's interface."""

    def __init__(self, inner: bz2.BZ2Decompressor | lzma.LZMADecompressor) -> None:
        self._inner = inner
        self.eof = False
        self.unused_data = b""

    def pieces(self, data: bytes) -> Iterator[bytes]:
        yield self._inner.decompress(data, _PIECE)
        while not self._inner.eof and not self._inner.needs_input:
            yield self._inner.decompress(b"", _PIECE)
        self.eof, self.unused_data = self._inner.eof, self._inner.unused_data

    def rest(self) -> bytes:
        return b""


class _Zstd:
    def __init__(self) -> None:
        self._inner = zstandard.ZstdDecompressor(max_window_size=1 << 31).decompressobj()
        self.eof = False
        self.unused_data = b""

    def pieces(self, data: bytes) -> Iterator[bytes]:
        for start in range(0, len(data), _ZSTD_FEED):
            yield self._inner.decompress(data[start : start + _ZSTD_FEED])
            if self._inner.eof:
                self.eof = True
                self.unused_data = self._inner.unused_data + data[start + _ZSTD_FEED :]
                return

    def rest(self) -> bytes:
        return b""


_EXPANDERS: dict[Compression, Callable[[], _Expander]] = {
    "gz": _Gzip,
    "zst": _Zstd,
    "bz2": lambda: _Bounded(bz2.BZ2Decompressor()),
    "xz": lambda: _Bounded(lzma.LZMADecompressor(lzma.FORMAT_XZ)),
}
_FAULTS = (zlib.error, lzma.LZMAError, zstandard.ZstdError, OSError, ValueError, EOFError)


def sniff(head: bytes) -> Compression | None:
    """Return the compression whose magic bytes ``head`` begins with, ``None`` for none.

    RFC 1952 (gzip), RFC 8878 (zstd, with skippable frames); bzip2 and xz as their programs write.
    """
    if head.startswith(b"\x1f\x8b\x08"):
        return "gz"
    if head.startswith(b"\x28\xb5\x2f\xfd") or (head[1:4] == b"\x2a\x4d\x18" and head[0] >> 4 == 5):
        return "zst"
    if head.startswith(b"\xfd7zXZ\x00"):
        return "xz"
    if head.startswith(b"BZh") and head[4:10] in {b"1AY&SY", b"\x17rE8P\x90"}:
        return "bz2"
    return None


class Expanded:
    """The expanded bytes of ``raw``; ``damage`` says after the end why it came too early."""

    def __init__(self, raw: Bytes, compression: Compression) -> None:
        self.damage: Damage | None = None
        self._pieces = self._expand(raw, _EXPANDERS[compression])
        self._ready = b""

    def read(self, size: int, /) -> bytes:
        """Return ``size`` bytes, fewer only at the end."""
        parts = [self._ready]
        length = len(self._ready)
        while length < size and (piece := next(self._pieces, None)) is not None:
            parts.append(piece)
            length += len(piece)
        found = parts[0] if len(parts) == 1 else b"".join(parts)
        self._ready = found[size:]
        return found[:size]

    def _expand(self, raw: Bytes, new: Callable[[], _Expander]) -> Iterator[bytes]:
        expander, fresh = new(), True
        while data := raw.read(_READ):
            while data := data.lstrip(b"\0") if fresh else data:
                fresh = False
                yield from self._guarded(expander, data)
                if self.damage:
                    return
                data = b""
                if expander.eof:
                    data, expander, fresh = expander.unused_data, new(), True
        if not fresh:
            yield expander.rest()
            self.damage = None if expander.eof else ENDS_EARLY

    def _guarded(self, expander: _Expander, data: bytes) -> Iterator[bytes]:
        try:
            yield from expander.pieces(data)
        except _FAULTS:
            self.damage = DAMAGED
