"""Random access to a table: the file itself, or a copy of it expanded on the disk."""

from __future__ import annotations

import io
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import IO

from auditor.corpus.streams import Stream

_BLOCK = 1 << 20


@contextmanager
def random_access(stream: Stream, head: bytes = b"") -> Iterator[Path | IO[bytes]]:
    """Yield the path of an uncompressed file, else a temporary file with the stream's bytes.

    ``head`` is what was already read of the stream.
    """
    if stream.path is not None:
        yield stream.path
        return
    with tempfile.TemporaryFile() as copy:
        copy.write(head)
        while block := stream.read(_BLOCK):
            copy.write(block)
        copy.seek(0)
        yield copy


class Sequential(io.RawIOBase):
    """A stream as the file object that the Arrow library reads from front to back."""

    def __init__(self, stream: Stream, head: bytes = b"") -> None:
        super().__init__()
        self._stream = stream
        self._head = head

    def readable(self) -> bool:
        """Say that it can be read."""
        return True

    def readinto(self, buffer: bytearray | memoryview) -> int:  # type: ignore[override]
        """Fill ``buffer`` as far as the stream reaches."""
        found, self._head = self._head[: len(buffer)], self._head[len(buffer) :]
        found = found or self._stream.read(len(buffer))
        buffer[: len(found)] = found
        return len(found)
