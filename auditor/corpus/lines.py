r"""Plain text: what one document is.

``record``
    A line that is not blank; blank lines part documents and are none themselves.
``line``
    Every line; a blank line is an empty document, or one of spaces.
``paragraph``
    A run of lines that are not blank.
``file``
    The whole file.

A line ends at ``\n`` only, the last one also at the end of the file; blank means nothing but
spaces, tabs and ``\r``. The line end is not part of a document, be it ``\n`` or ``\r\n``; the line
ends inside a paragraph or a file stay as they are. Units are for plain text: where a format has
records, a record is a document.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

from auditor.corpus.options import Unit
from auditor.corpus.rows import NOT_MENDED, Mend, Row, decoded
from auditor.corpus.streams import Utf8, read_all

_BLOCK = 1 << 18
_BLANK = " \t\r"


class Lines(NamedTuple):
    r"""Whole lines, each with its ``\n`` (but for the file's last), and the number of the first."""

    first: int
    content: bytes


def whole_lines(stream: Utf8) -> Iterator[Lines | Row]:
    """Yield whole lines, about 256 KiB at a time, longer lines as a whole.

    Where a compressed stream breaks off, the line it breaks off in is not handed over; the last
    thing is then a row that says so.
    """
    number = 1
    pending: list[bytes] = []
    while block := stream.read(_BLOCK):
        cut = block.rfind(b"\n") + 1
        pending.append(block[:cut] if cut else block)
        if cut:
            content = b"".join(pending)
            yield Lines(number, content)
            number += content.count(b"\n")
            pending = [block[cut:]] if cut < len(block) else []
    if stream.damage:
        yield number, stream.damage, NOT_MENDED
    elif pending:
        yield Lines(number, b"".join(pending))


def text_rows(stream: Utf8, unit: Unit) -> Iterator[Row]:
    """Yield a row whose record is a string for each document of ``stream``."""
    if unit == "file":
        return _file(stream)
    if unit == "paragraph":
        return _paragraphs(stream)
    return _lines(stream, blank=unit == "line")


def _lines(stream: Utf8, *, blank: bool) -> Iterator[Row]:
    for block in whole_lines(stream):
        if not isinstance(block, Lines):
            yield block
            continue
        for number, line, mends in _split(block):
            if blank or line.strip(_BLANK):
                yield number, line.removesuffix("\r"), mends


def _split(block: Lines) -> Iterator[tuple[int, str, tuple[Mend, ...]]]:
    content = block.content.removesuffix(b"\n")
    try:
        lines = content.decode().split("\n")
    except UnicodeDecodeError:
        for number, raw in enumerate(content.split(b"\n"), block.first):
            yield (number, *decoded(raw))
        return
    for number, line in enumerate(lines, block.first):
        yield number, line, NOT_MENDED


def _paragraphs(stream: Utf8) -> Iterator[Row]:
    began, held = 0, list[bytes]()
    for block in whole_lines(stream):
        if not isinstance(block, Lines):
            yield block
            return
        for number, raw in enumerate(block.content.removesuffix(b"\n").split(b"\n"), block.first):
            if raw.strip(_BLANK.encode()):
                began = began if held else number
                held.append(raw)
            elif held:
                yield _joined(began, held)
                held = []
    if held:
        yield _joined(began, held)


def _joined(began: int, held: list[bytes]) -> Row:
    return (began, *decoded(b"\n".join(held).removesuffix(b"\r")))


def _file(stream: Utf8) -> Iterator[Row]:
    content = read_all(stream)
    if stream.damage:
        yield 1, stream.damage, NOT_MENDED
    else:
        yield (1, *decoded(content))
