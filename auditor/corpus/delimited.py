"""CSV and TSV: the first row names the fields, nothing is taken for a missing value.

RFC 4180 with quotes doubled inside quotes. The delimiter of a CSV file is the comma, or where its
first line has none the semicolon or the tab. Where quoting is broken (a quote that is never closed,
text after a closing quote), only the line it begins in is affected: it is read without quoting if
that gives the right number of columns, and reading goes on with the next line.
"""

from __future__ import annotations

import csv
from collections import deque
from collections.abc import Iterator

from auditor.corpus.lines import Lines, whole_lines
from auditor.corpus.rows import NOT_MENDED, Damage, Mend, Row, decoded
from auditor.corpus.streams import Utf8
from auditor.errors import CorpusError

# A row that is longer has a quote that is never closed.
_LONGEST_ROW = 1 << 28
_DELIMITERS = (",", ";", "\t")


class _TooLongError(Exception):
    pass


class _PhysicalLines:
    """The lines that the parser asks for; those of the row it is in can be handed out again."""

    def __init__(self, stream: Utf8) -> None:
        self.given = 0
        self.row: list[str] = []
        self.damage: Row | None = None
        self.undecodable = False
        self._lines = self._read(stream)
        self._again: deque[str] = deque()
        self._length = 0

    def __iter__(self) -> _PhysicalLines:
        return self

    def __next__(self) -> str:
        line = self._again.popleft() if self._again else next(self._lines)
        self.given += 1
        self._length += len(line)
        self.row.append(line)
        if self._length > _LONGEST_ROW and len(self.row) > 1:
            raise _TooLongError
        return line

    def look_at_first(self) -> str | None:
        """Return the first line, ``None`` without one; it comes again."""
        line = next(self, None)
        if line is not None:
            self.given = 0
            self._again.append(line)
        return line

    def begin_row(self) -> int:
        """Forget the last row; return the number of the line that comes next."""
        self.row.clear()
        self._length = 0
        return self.given + 1

    def keep_first_line_only(self) -> str:
        """Return the row's first line; the others come again."""
        self.given -= len(self.row) - 1
        self._again.extendleft(reversed(self.row[1:]))
        return self.row[0]

    def _read(self, stream: Utf8) -> Iterator[str]:
        for block in whole_lines(stream):
            if not isinstance(block, Lines):
                self.damage = block
                return
            text = self._decode(block.content)
            ends_open = not text.endswith("\n")
            lines = text.split("\n")
            last = lines.pop()
            yield from (line + "\n" for line in lines)
            if ends_open:
                yield last

    def _decode(self, content: bytes) -> str:
        try:
            return content.decode()
        except UnicodeDecodeError:
            self.undecodable = True
            return content.decode(errors="surrogateescape")


def delimited_rows(stream: Utf8, name: str, delimiter: str | None) -> Iterator[Row]:
    """Yield a row for each row of the file ``name`` that is not blank, at its first line's number.

    ``delimiter`` ``None``: found in the first line. Raises CorpusError for a first row that cannot
    be read.
    """
    csv.field_size_limit(_LONGEST_ROW * 4)
    lines = _PhysicalLines(stream)
    first = lines.look_at_first()
    if first is not None:
        delimiter = delimiter or next((sign for sign in _DELIMITERS if sign in first), ",")
        header = _header(lines, delimiter, name)
        for line, fields, mends in _parsed(lines, delimiter, len(header)):
            if isinstance(fields, Damage):
                yield line, fields, mends
            elif len(fields) == len(header):
                yield line, dict(zip(header, fields, strict=True)), mends
            elif fields:
                yield line, _miscounted(fields, header), NOT_MENDED
    if lines.damage:
        yield lines.damage


def _header(lines: _PhysicalLines, delimiter: str, name: str) -> list[str]:
    found = next(_parsed(lines, delimiter, None), None)
    header = found[1] if found else []
    if isinstance(header, Damage):
        raise CorpusError(
            "the first row, which names the fields, cannot be read.",
            hint="Mend its quotes.", where=f"{name}:1",
        )  # fmt: skip
    return header


def _miscounted(fields: list[str], header: list[str]) -> Damage:
    return Damage("wrong number of columns", f"{len(fields)} instead of {len(header)}")


def _parsed(
    lines: _PhysicalLines, delimiter: str, columns: int | None
) -> Iterator[tuple[int, list[str] | Damage, tuple[Mend, ...]]]:
    parser = csv.reader(lines, delimiter=delimiter, strict=True)
    while True:
        line = lines.begin_row()
        try:
            fields = next(parser)
        except StopIteration:
            return
        except (csv.Error, _TooLongError) as fault:
            if lines.damage:  # the row in which the compressed stream breaks off
                return
            yield (line, *_literal(lines.keep_first_line_only(), delimiter, columns, fault))
            parser = csv.reader(lines, delimiter=delimiter, strict=True)
            continue
        if lines.undecodable:
            yield (line, *_mended(fields, lines.row))
        else:
            yield line, fields, NOT_MENDED


def _literal(
    line: str, delimiter: str, columns: int | None, fault: Exception
) -> tuple[list[str] | Damage, tuple[Mend, ...]]:
    fields = line.removesuffix("\n").removesuffix("\r").split(delimiter)
    if len(fields) != columns:
        return Damage("quoting is broken", str(fault)), NOT_MENDED
    fields, mends = _mended(fields, [line])
    return fields, (*mends, Mend("broken quoting read as text", str(fault)))


def _mended(fields: list[str], row: list[str]) -> tuple[list[str], tuple[Mend, ...]]:
    _, mends = decoded("".join(row).encode("utf-8", "surrogateescape"))
    if not mends:
        return fields, NOT_MENDED
    return [decoded(f.encode("utf-8", "surrogateescape"))[0] for f in fields], mends
