"""Bytes from a file or a pipe: expanded, without its byte order mark, in UTF-8."""

from __future__ import annotations

import codecs
from pathlib import Path
from typing import BinaryIO

from auditor.corpus.compression import Bytes, Compression, Expanded
from auditor.errors import CorpusError

# A byte that occurs nowhere in UTF-8: it marks what could not be decoded, so that the record it
# lies in is mended and counted where invalid UTF-8 is.
_UNDECODABLE = "\udcff"
_UTF_16_MARKS = (b"\xff\xfe", b"\xfe\xff")


class Pipe:
    """Standard input or a named pipe: what a first look takes from it is kept for the reading."""

    def __init__(self, handle: BinaryIO, name: str) -> None:
        self._handle = handle
        self._name = name
        self._kept = bytearray()
        self._spent = False

    def reader(self, *, keep: bool) -> PipeReader:
        """Return a reader from the beginning; after one that keeps nothing there is no other."""
        if self._spent:
            raise CorpusError("a pipe can be read once only.", where=self._name)
        self._spent = not keep
        return PipeReader(self._handle, self._kept, keep=keep)


class PipeReader:
    """Reads what was kept of a pipe, then the pipe."""

    def __init__(self, handle: BinaryIO, kept: bytearray, *, keep: bool) -> None:
        self._handle = handle
        self._kept = kept
        self._keep = keep
        self._offset = 0

    def read(self, size: int, /) -> bytes:
        """Return up to ``size`` bytes, none at the end."""
        if self._offset < len(self._kept):
            found = bytes(self._kept[self._offset : self._offset + size])
        else:
            found = self._handle.read(size)
            if self._keep:
                self._kept += found
            else:
                self._kept.clear()
                self._offset = 0
                return found
        self._offset += len(found)
        return found

    def close(self) -> None:
        """Leave the pipe open: it is not ours."""


class Stream:
    """The bytes of one source.

    ``position`` counts bytes of the file as it lies on the disk; ``damage`` says after the end why
    it came too early; ``path`` is that of a file that may be opened at random, else ``None``.
    """

    def __init__(self, raw: BinaryIO | PipeReader, compression: Compression | None) -> None:
        self.position = 0
        self.path: Path | None = None
        self._raw = raw
        self._expanded = None if compression is None else Expanded(_Counted(self), compression)

    @property
    def damage(self) -> str | None:
        """The reason for which a compressed stream ended, ``None`` when it came to its end."""
        return None if self._expanded is None else self._expanded.damage

    def read(self, size: int, /) -> bytes:
        """Return up to ``size`` bytes, none at the end."""
        return self.read_raw(size) if self._expanded is None else self._expanded.read(size)

    def read_raw(self, size: int) -> bytes:
        """Return up to ``size`` bytes as they lie on the disk."""
        found = self._raw.read(size)
        self.position += len(found)
        return found

    def close(self) -> None:
        """Close the file."""
        self._raw.close()


class _Counted:
    def __init__(self, stream: Stream) -> None:
        self._stream = stream

    def read(self, size: int, /) -> bytes:
        return self._stream.read_raw(size)


class Utf8:
    """The bytes of ``stream`` as UTF-8, without the byte order mark.

    What ``encoding`` cannot decode becomes the byte 0xFF. Raises CorpusError for a file that
    begins with UTF-16's mark when no encoding is named.
    """

    def __init__(self, stream: Stream, encoding: str | None, name: str) -> None:
        self._stream = stream
        self._name = name
        self._started = False
        self._decoder = None
        if encoding is not None:
            self._decoder = codecs.getincrementaldecoder(encoding)(errors=_MARK)

    @property
    def damage(self) -> str | None:
        """Why the stream ended too early, ``None`` when it did not."""
        return self._stream.damage

    def read(self, size: int, /) -> bytes:
        """Return about ``size`` bytes, none at the end."""
        found = self._decoded(size)
        if not self._started:
            self._started = True
            while len(found) < len(codecs.BOM_UTF8) and (more := self._decoded(size)):
                found += more
            self._refuse_utf_16(found)
            if found.startswith(codecs.BOM_UTF8):
                found = found.removeprefix(codecs.BOM_UTF8) or self._decoded(size)
        return found

    def _decoded(self, size: int) -> bytes:
        if self._decoder is None:
            return self._stream.read(size)
        while data := self._stream.read(size):
            if found := self._decoder.decode(data):
                return found.encode("utf-8", "surrogateescape")
        return self._decoder.decode(b"", final=True).encode("utf-8", "surrogateescape")

    def _refuse_utf_16(self, head: bytes) -> None:
        if self._decoder is None and head.startswith(_UTF_16_MARKS):
            raise CorpusError(
                "this file is UTF-16, not UTF-8.", hint="Name it: --encoding utf-16.",
                where=self._name,
            )  # fmt: skip


def read_head(stream: Bytes, size: int) -> bytes:
    """Return the first ``size`` bytes of ``stream``, fewer only when there are no more."""
    head = b""
    while len(head) < size and (more := stream.read(size - len(head))):
        head += more
    return head


def read_all(stream: Bytes) -> bytes:
    """Return everything that is left of ``stream``."""
    return b"".join(iter(lambda: stream.read(1 << 20), b""))


def _mark(fault: UnicodeError) -> tuple[str, int]:
    if not isinstance(fault, UnicodeDecodeError):
        raise fault
    return _UNDECODABLE, fault.end


_MARK = "auditor.mark"
codecs.register_error(_MARK, _mark)
