"""The tables that lie beside an audit, read back."""

from __future__ import annotations

import csv
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from auditor.errors import CorpusError
from auditor.report.tables import CHARACTER_COLUMNS, WORD_COLUMNS

WORDS, CHARACTERS = "words.csv", "characters.csv"
_COLUMNS = {WORDS: WORD_COLUMNS, CHARACTERS: CHARACTER_COLUMNS}
_NUMBERS = {WORDS: "extra_tokens", CHARACTERS: "count"}


def table_beside(audit: Path, name: str) -> list[dict[str, str]] | None:
    """Return the rows of the table ``name`` in the folder of ``audit``; ``None`` if there is none.

    Every value is text, as it stands. Raises CorpusError when the file is not such a table.
    """
    path = audit.parent / name
    if not path.is_file():
        return None
    try:
        with path.open(encoding="utf-8", newline="") as stream, _long_cells():
            reader = csv.DictReader(stream, strict=True)
            whole = not set(_COLUMNS[name]) - set(reader.fieldnames or ())
            rows = list(reader) if whole else []
    except (csv.Error, UnicodeDecodeError) as fault:
        raise _damaged(path, str(fault)) from None
    if not whole:
        raise _damaged(path, f"its columns are not {', '.join(_COLUMNS[name])}")
    for row in rows:
        if None in row.values() or not _is_count(row[_NUMBERS[name]]):
            raise _damaged(path, f"row {rows.index(row) + 1} is cut off or holds no number")
    return rows


def _is_count(cell: str) -> bool:
    return cell.isascii() and cell.isdecimal()


@contextmanager
def _long_cells() -> Iterator[None]:
    """Let a cell be of any length: a word may be a picture written as text."""
    usual = csv.field_size_limit(sys.maxsize)
    try:
        yield
    finally:
        csv.field_size_limit(usual)


def _damaged(path: Path, why: str) -> CorpusError:
    return CorpusError(
        f"the table cannot be read ({why}).",
        hint="Make the audit again with `auditor assess`, or move the table away.",
        where=str(path),
    )
