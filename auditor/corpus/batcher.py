"""Rows in, batches out: the text of each record, its slices, and what was set aside."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from auditor.corpus.batch import Batch, Flaw
from auditor.corpus.fields import Fields
from auditor.corpus.messages import conversation_text
from auditor.corpus.options import SOURCE, ReadOptions
from auditor.corpus.rows import Damage, Mend, Row
from auditor.corpus.values import MISSING, Reach, not_text, reaching, spelled
from auditor.errors import CorpusError

_Text = Callable[[dict[str, object]], str | Damage]


class Batcher:
    """Cuts the documents of one source after the other into batches, numbered through."""

    def __init__(self, options: ReadOptions, fields: Fields) -> None:
        self._options = options
        self._fields = fields
        self._text = _text_of(fields, options)
        self._by = [(name, reaching(name)) for name in options.by]
        self._origin = reaching(options.origin) if options.origin else None
        self._identifier = reaching(fields.identifier) if fields.identifier else None
        self._number = 0
        self._batch = Batch(0, "")
        self._bytes = 0

    def batches(self, source: str, rows: Iterator[Row], *, plain: bool) -> Iterator[Batch]:
        """Yield the batches of ``source``; ``plain``: records are texts, else objects.

        The last one may hold flaws only. Raises CorpusError at the first flaw when strict.
        """
        self._begin(source)
        limit, most = self._options.batch_bytes, self._options.batch_documents
        for line, record, mends in rows:
            if type(record) is dict:
                text, values = self._text(record), record
            elif plain:
                text, values = record, {}
            else:
                text = record if type(record) is Damage else Damage("not an object")
            if type(text) is not str:
                self._set_aside(line, text)
                continue
            self._add(line, text, values)
            if mends:
                self._mend(line, mends)
            if self._bytes >= limit or len(self._batch.texts) >= most:
                yield self._take()
        if self._batch.texts or self._batch.set_aside:
            yield self._take()

    def _begin(self, source: str) -> None:
        self._bytes = 0
        self._batch = Batch(
            self._number,
            source,
            slices={name: [] for name in self._options.by},
            origins=None if self._options.origin is None else [],
            identifiers=None if self._fields.identifier is None else [],
        )

    def _take(self) -> Batch:
        taken = self._batch
        self._number += 1
        self._begin(taken.source)
        return taken

    def _add(self, line: int, text: str, record: dict[str, object]) -> None:
        batch = self._batch
        self._bytes += len(text) if text.isascii() else len(text.encode())
        batch.texts.append(text)
        batch.lines.append(line)
        for name, of in self._by:
            batch.slices[name].append(f"{name}={spelled(self._value(name, of, record))}")
        if self._origin is not None and batch.origins is not None:
            origin = self._value(self._options.origin or "", self._origin, record)
            # What was drawn by itself is its own origin.
            own = origin is None or origin is MISSING
            batch.origins.append(f"{batch.source}:{line}" if own else spelled(origin))
        if self._identifier is not None and batch.identifiers is not None:
            identifier = self._identifier(record)
            absent = identifier is None or identifier is MISSING
            batch.identifiers.append("" if absent else spelled(identifier))

    def _value(self, name: str, of: Reach, record: dict[str, object]) -> object:
        if name == SOURCE and SOURCE in self._fields.pseudo:
            return self._batch.source
        return of(record)

    def _set_aside(self, line: int, damage: object) -> None:
        fault = damage if isinstance(damage, Damage) else Damage("not an object")
        self._batch.set_aside.append(self._flaw(line, fault.reason, fault.detail))

    def _mend(self, line: int, mends: tuple[Mend, ...]) -> None:
        self._batch.mended += [self._flaw(line, *mend) for mend in mends]

    def _flaw(self, line: int, reason: str, detail: str) -> Flaw:
        if self._options.strict:
            raise CorpusError(
                f"{reason}{f' ({detail})' if detail else ''}.",
                hint="Mend the record, or read without --strict to set it aside and count it.",
                where=f"{self._batch.source}:{line}",
            )
        return Flaw(self._batch.source, line, reason, detail)


def _text_of(fields: Fields, options: ReadOptions) -> _Text:
    if fields.conversation:
        held = reaching(fields.text[0])

        def conversation(record: dict[str, object]) -> str | Damage:
            value = held(record)
            missing = value is MISSING
            return not_text(value, fields.text[0]) if missing else conversation_text(
                value, options.render
            )

        return conversation
    reaches = [(name, reaching(name)) for name in fields.text]
    return _single(*reaches[0]) if len(reaches) == 1 else _joined(reaches)


def _single(name: str, of: Reach) -> _Text:
    def text(record: dict[str, object]) -> str | Damage:
        value = of(record)
        return value if type(value) is str else not_text(value, name)

    return text


def _joined(reaches: list[tuple[str, Reach]]) -> _Text:
    def text(record: dict[str, object]) -> str | Damage:
        found: list[str] = []
        for name, of in reaches:
            value = of(record)
            if type(value) is not str:
                return not_text(value, name)
            found.append(value)
        return "\n".join(found)

    return text
