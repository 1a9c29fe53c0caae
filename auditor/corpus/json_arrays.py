"""A JSON file: an array of records, an object that holds one array of records, or one record.

The file is taken apart bracket by bracket, so that it is never held whole and a bad record loses
no other; each record is then parsed by itself.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from auditor.corpus.jsonlines import NOT_JSON, parse
from auditor.corpus.messages import MESSAGES
from auditor.corpus.rows import NOT_MENDED, Damage, Row
from auditor.corpus.streams import Utf8
from auditor.errors import CorpusError

_BLOCK = 1 << 20
_STRING = rb'"[^"\\]*+(?:\\.[^"\\]*+)*+"'
# Everything up to the next bracket, whole strings included; then the same up to a comma too.
_TO_BRACKET = re.compile(rb'(?:[^"{}\[\]]++|' + _STRING + rb")*+", re.DOTALL)
_TO_COMMA = re.compile(rb'(?:[^"{}\[\],]++|' + _STRING + rb")*+", re.DOTALL)
# An element that holds no other object or array, with its comma: most records are so.
_FLAT = re.compile(rb'\s*+(\{(?:[^"{}\[\]]++|' + _STRING + rb")*+\})\s*+,", re.DOTALL)
_KEY = re.compile(rb'"([^"\\]*)"\s*:\s*\Z')
_QUOTE = ord('"')


class _Scanner:
    """Finds brackets outside strings; ``data`` is held from ``kept`` on, ``at`` is where it is."""

    def __init__(self, stream: Utf8) -> None:
        self.data = b""
        self.kept = 0
        self.at = 0
        self._stream = stream

    def step(self, *, commas: bool = False) -> bytes:
        """Go behind the next bracket (or comma) and return it, nothing at the end."""
        pattern = _TO_COMMA if commas else _TO_BRACKET
        while True:
            found = pattern.match(self.data, self.at)
            self.at = found.end() if found else self.at
            if self.at < len(self.data) and self.data[self.at] != _QUOTE:
                self.at += 1
                return self.data[self.at - 1 : self.at]
            if not self._more():
                return b""

    def take(self) -> bytes:
        """Return what is held and lies before the last bracket; hold what comes after it."""
        taken = self.data[self.kept : self.at - 1]
        self.kept = self.at
        return taken

    def _more(self) -> bool:
        # Twice as much each time: a long string is scanned again, but not quadratically often.
        more = self._stream.read(max(_BLOCK, len(self.data) - self.kept))
        if more:
            self.data = self.data[self.kept :] + more
            self.at -= self.kept
            self.kept = 0
        return bool(more)


class _Records:
    def __init__(self, stream: Utf8, name: str) -> None:
        self._stream = stream
        self._scanner = _Scanner(stream)
        self._name = name
        self._number = 0
        self._ended_early = False
        self._last = 0

    def rows(self) -> Iterator[Row]:
        scanner = self._scanner
        while bracket := scanner.step():
            if scanner.take().strip():
                yield self._damaged(Damage(NOT_JSON))
            if bracket == b"[":
                yield from self._array()
            elif bracket == b"{":
                yield from self._object()
        rest = bool(scanner.data[scanner.kept :].strip())
        if not self._ended_early and (rest or self._stream.damage):
            yield self._damaged(self._stream.damage or Damage(NOT_JSON))

    def _array(self) -> Iterator[Row]:
        scanner, depth = self._scanner, 0
        yield from self._flat()
        while sign := scanner.step(commas=depth == 0):
            if sign in b"{[":
                depth += 1
            elif depth:
                depth -= 1
            else:
                raw = scanner.take()
                if sign == b"," or raw.strip():
                    yield self._row(raw)
                if sign != b",":
                    return
                yield from self._flat()
        yield self._ended()

    def _flat(self) -> Iterator[Row]:
        """Yield the records from here on for as long as the quick way goes."""
        scanner = self._scanner
        while found := _FLAT.match(scanner.data, scanner.at):
            scanner.kept = scanner.at = found.end()
            yield self._row(found[1])

    def _object(self) -> Iterator[Row]:
        """Yield the records of the one array of objects in this object, or the object itself."""
        scanner, depth, found = self._scanner, 1, False
        scanner.kept -= 1
        while depth and (bracket := self._bracket(forget=found)):
            if depth == 1 and bracket == b"[" and self._holds_records():
                if found:
                    raise self._several()
                found = True
                yield from self._array()
            else:
                depth += 1 if bracket in b"{[" else -1
        if depth:
            yield self._ended()
        elif not found:
            yield self._row(scanner.take() + b"}")
        scanner.kept = scanner.at

    def _bracket(self, *, forget: bool) -> bytes:
        if forget:
            self._scanner.kept = self._scanner.at
        self._last = self._scanner.at - self._scanner.kept
        return self._scanner.step()

    def _holds_records(self) -> bool:
        """Whether the array that opens here begins with an object, and is not a conversation."""
        scanner = self._scanner
        opened = scanner.at - scanner.kept
        before = scanner.data[scanner.kept + self._last : scanner.at - 1]
        key = _KEY.search(before)
        following = scanner.step()
        begins = scanner.kept + opened
        blank = not scanner.data[begins : scanner.at - 1].strip()
        scanner.at = begins
        records = following == b"{" and blank and key is not None and key[1] != MESSAGES.encode()
        if records:
            scanner.kept = begins
        return records

    def _row(self, raw: bytes) -> Row:
        self._number += 1
        return (self._number, *parse(raw))

    def _damaged(self, damage: Damage) -> Row:
        self._number += 1
        return self._number, damage, NOT_MENDED

    def _ended(self) -> Row:
        self._ended_early = True
        self._scanner.kept = self._scanner.at = len(self._scanner.data)
        return self._damaged(self._stream.damage or Damage("JSON ends early"))

    def _several(self) -> CorpusError:
        return CorpusError(
            "the object holds several arrays of records.",
            hint="Keep one array of records a file.", where=self._name,
        )  # fmt: skip


def json_rows(stream: Utf8, name: str) -> Iterator[Row]:
    """Yield a row for every record; its place is its number in the file, from 1.

    Raises CorpusError for an object that holds several arrays of records.
    """
    return _Records(stream, name).rows()
