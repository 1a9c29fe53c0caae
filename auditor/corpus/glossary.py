"""Glossaries: the terms of a field, with their variants and weights.

Plain text holds one term a line; lines that are blank or begin with `#` are skipped. A file whose
name ends in `.csv` or `.tsv` has a header with the columns `term` and, if wanted, `variant` and
`weight`; rows with one term give it several variants.

Terms that differ only in case or in whitespace are one term: the spelling that comes first stands,
the others are variants. A spelling belongs to one term only.
"""

from __future__ import annotations

import csv
import hashlib
import io
import json
from collections.abc import Iterator
from dataclasses import dataclass
from decimal import Decimal, InvalidOperation
from fractions import Fraction
from pathlib import Path
from typing import NoReturn

import regex

from auditor.errors import GlossaryError
from auditor.text import properties
from auditor.text.folding import folded_phrase, one_spaced

_COLUMNS = ("term", "variant", "weight")
_DELIMITERS = (",", ";", "\t")
_WORD_CHARACTER = regex.compile(properties.WORD_CHARACTER)
# Weights lie within these powers of ten, so that sums of them are integers of 64 bits or near one.
_LARGEST_POWER = 12


@dataclass(frozen=True, slots=True)
class Term:
    """A term as given, its other spellings in their order, and its weight, 1 where none is given.

    Spellings have single spaces where they have whitespace.
    """

    term: str
    variants: tuple[str, ...] = ()
    weight: Fraction = Fraction(1)

    @property
    def spellings(self) -> tuple[str, ...]:
        """The term and its variants."""
        return (self.term, *self.variants)


@dataclass(frozen=True, slots=True)
class Glossary:
    """Terms in the order of their file; ``weighted`` says that it gives a weight."""

    terms: tuple[Term, ...]
    weighted: bool = False

    @property
    def digest(self) -> str:
        """SHA-256 of everything the glossary holds, in hexadecimal."""
        rows = [[t.spellings, str(t.weight)] for t in self.terms]
        return hashlib.sha256(json.dumps([self.weighted, rows]).encode()).hexdigest()


@dataclass(slots=True)
class _Entry:
    term: str
    line: int
    variants: list[str]
    weight: Fraction | None = None
    weight_line: int = 0


def read_glossary(path: Path | str) -> Glossary:
    """Return the glossary in ``path``; GlossaryError with file and line for what is wrong in it."""
    path = Path(path)
    text = _text(path)
    rows = _table(text, path) if path.suffix.lower() in {".csv", ".tsv"} else _lines(text)
    entries = _Entries(str(path))
    for line, term, variant, weight in rows:
        entries.add(line, term, variant, weight)
    return entries.glossary()


def _text(path: Path) -> str:
    try:
        content = path.read_bytes()
    except OSError as fault:
        raise GlossaryError(
            f"the glossary cannot be read ({fault.strerror}).",
            hint="Name a text, CSV or TSV file.", where=str(path),
        ) from fault  # fmt: skip
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as fault:
        line = content.count(b"\n", 0, fault.start) + 1
        raise GlossaryError(
            "the glossary is not UTF-8.", hint="Save it as UTF-8.", where=f"{path}:{line}"
        ) from fault


_Row = tuple[int, str, str, str]


def _lines(text: str) -> Iterator[_Row]:
    for number, line in enumerate(text.split("\n"), 1):
        term = one_spaced(line)
        if term and not term.startswith("#"):
            yield number, term, "", ""


def _table(text: str, path: Path) -> Iterator[_Row]:
    """Yield line, term, variant and weight of each row that is not blank."""
    first = text.split("\n", 1)[0]
    sign = (
        "\t" if path.suffix.lower() == ".tsv" else next((s for s in _DELIMITERS if s in first), ",")
    )
    rows = _parsed(text, sign, path)
    header = [name.strip().lower() for name in next(rows, (1, [""]))[1]]
    if not any(header):
        return
    if "term" not in header or len(set(header)) < len(header):
        raise GlossaryError(
            f"the header names {', '.join(header)}.",
            hint="Name the columns term and, if wanted, variant and weight, each once.",
            where=f"{path}:1",
        )
    for line, fields in rows:
        if not any(map(str.strip, fields)):
            continue
        if len(fields) != len(header):
            raise GlossaryError(
                f"{len(fields)} columns instead of {len(header)}.",
                hint="Put a field that holds the delimiter in quotes.",
                where=f"{path}:{line}",
            )
        row = dict(zip(header, map(one_spaced, fields), strict=True))
        term, variant, weight = (row.get(name, "") for name in _COLUMNS)
        yield line, term, variant, weight


def _parsed(text: str, delimiter: str, path: Path) -> Iterator[tuple[int, list[str]]]:
    """Yield the rows with the line that each begins in."""
    parser = csv.reader(io.StringIO(text, newline=""), delimiter=delimiter, strict=True)
    line = 1
    try:
        for fields in parser:
            yield line, fields
            line = parser.line_num + 1
    except csv.Error as fault:
        raise GlossaryError(
            f"the row cannot be read ({fault}).", hint="Mend its quotes.", where=f"{path}:{line}"
        ) from fault


class _Entries:
    """Gathers rows into terms, and refuses those that contradict others."""

    def __init__(self, name: str) -> None:
        self._name = name
        # By folded spelling: the term it belongs to.
        self._owners: dict[str, _Entry] = {}
        self._entries: list[_Entry] = []

    def add(self, line: int, term: str, variant: str, weight: str) -> None:
        """Take in one row, whose fields have single spaces."""
        where = f"{self._name}:{line}"
        for spelling in (term, variant) if variant else (term,):
            _refuse_wordless(spelling, where)
        own = self._owners.get(folded_phrase(term))
        if own is None:
            own = _Entry(term, line, [])
            self._entries.append(own)
        elif folded_phrase(own.term) != folded_phrase(term):
            self._refuse_two(term, own, "a term of its own", line)
        self._own(term, own, line)
        if variant:
            self._own(variant, own, line)
        if weight:
            self._weigh(own, _weight(weight, where), line)

    def _own(self, spelling: str, entry: _Entry, line: int) -> None:
        other = self._owners.setdefault(folded_phrase(spelling), entry)
        if other is not entry:
            self._refuse_two(spelling, other, f"a spelling of {entry.term!r}", line)
        if spelling not in (entry.term, *entry.variants):
            entry.variants.append(spelling)

    def _refuse_two(self, spelling: str, first: _Entry, second: str, line: int) -> NoReturn:
        raise GlossaryError(
            f"{spelling!r} is a spelling of {first.term!r} (line {first.line}) and {second}.",
            hint="Give it to one term only.", where=f"{self._name}:{line}",
        )  # fmt: skip

    def _weigh(self, entry: _Entry, weight: Fraction, line: int) -> None:
        if entry.weight is not None and entry.weight != weight:
            raise GlossaryError(
                f"{entry.term!r} has another weight in line {entry.weight_line}.",
                hint="Give a term one weight.", where=f"{self._name}:{line}",
            )  # fmt: skip
        if entry.weight is None:
            entry.weight, entry.weight_line = weight, line

    def glossary(self) -> Glossary:
        """Return what was gathered; GlossaryError where there is nothing."""
        if not self._entries:
            raise GlossaryError(
                "the glossary holds no term.", hint="Write one term a line.",
                where=f"{self._name}:1",
            )  # fmt: skip
        terms = [
            Term(e.term, tuple(e.variants), Fraction(1) if e.weight is None else e.weight)
            for e in self._entries
        ]
        return Glossary(tuple(terms), any(e.weight is not None for e in self._entries))


def _refuse_wordless(spelling: str, where: str) -> None:
    if _WORD_CHARACTER.search(spelling) is None:
        what = f"{spelling!r} holds no letter or digit" if spelling else "the row names no term"
        raise GlossaryError(f"{what}.", hint="A term must hold one, as a word does.", where=where)


def _weight(text: str, where: str) -> Fraction:
    try:
        number = Decimal(text)
        if number.is_finite() and number >= 0 and abs(number.adjusted()) <= _LARGEST_POWER:
            return Fraction(number)
    except InvalidOperation:
        pass
    raise GlossaryError(
        f"the weight {text!r} is no number that is 0 or more.",
        hint="Write it like 2 or 0.5.", where=where,
    )  # fmt: skip
