"""Bytes from a file or a pipe: expanded, without its byte order mark, in UTF-8."""

from __future__ import annotations

import codecs
import sys
from pathlib import Path
from typing import BinaryIO

from auditor.corpus.compression import Bytes, Compression, Expanded
from auditor.corpus.rows import Damage
from auditor.errors import CorpusError

# A byte that occurs nowhere in UTF-8: it marks what could not be decoded, so that the record it
# lies in is mended and counted where invalid UTF-8 is.
_UNDECODABLE = "\udcff"
_UTF_16_MARKS = (b"\xff\xfe", b"\xfe\xff")


class Pipe:
    """A named pipe, or standard input: what a first look takes is kept for the reading."""

    def __init__(self, path: Path | None, name: str) -> None:
        self.kept = bytearray()
        self._path = path
        self._name = name
        self._handle: BinaryIO | None = None
        self._spent = False

    def reader(self, *, keep: bool) -> PipeReader:
        """Return a reader from the beginning; after one that keeps nothing there is no other."""
        if self._spent:
            raise CorpusError("a pipe can be read once only.", where=self._name)
        self._spent = not keep
        return PipeReader(self, keep=keep)

    def take(self, size: int) -> bytes:
        """Return up to ``size`` bytes that nobody has taken yet."""
        if self._handle is None:
            self._handle = sys.stdin.buffer if self._path is None else self._path.open("rb")
        return self._handle.read(size)

    def close(self) -> None:
        """Close the pipe, but for standard input, which is not ours."""
        if self._handle is not None and self._path is not None:
            self._handle.close()


class PipeReader:
    """Reads what was kept of a pipe, then the pipe."""

    def __init__(self, pipe: Pipe, *, keep: bool) -> None:
        self._pipe = pipe
        self._keep = keep
        self._offset = 0

    def read(self, size: int, /) -> bytes:
        """Return up to ``size`` bytes, none at the end."""
        kept = self._pipe.kept
        if self._offset < len(kept):
            found = bytes(kept[self._offset : self._offset + size])
            self._offset += len(found)
        elif self._keep:
            found = self._pipe.take(size)
            kept += found
            self._offset += len(found)
        else:
            kept.clear()
            self._offset = 0
            found = self._pipe.take(size)
        return found

    def close(self) -> None:
        """Close the pipe after the last reading."""
        if not self._keep:
            self._pipe.close()


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
    def damage(self) -> Damage | None:
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
    def damage(self) -> Damage | None:
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
