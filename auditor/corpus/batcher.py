"""Rows in, batches out: the text of each record, its slices, and what was set aside."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

from auditor.corpus.batch import Batch, Flaw
from auditor.corpus.fields import Fields
from auditor.corpus.messages import conversation_text
from auditor.corpus.options import SOURCE, ReadOptions, Render
from auditor.corpus.rows import Damage, Mend, Row
from auditor.corpus.values import MISSING, Reach, not_text, reach, reaching, spelled
from auditor.errors import CorpusError

_NO_FIELDS: dict[str, object] = {}
_Text = Callable[[object], str | Damage]


class Batcher:
    """Cuts the documents of one source after the other into batches, numbered through."""

    def __init__(self, options: ReadOptions, fields: Fields) -> None:
        self._options = options
        self._fields = fields
        self._text = _text_of(fields, options)
        self._by = [(name, self._reaching(name)) for name in options.by]
        self._origin = self._reaching(options.origin) if options.origin else None
        self._identifier = reaching(fields.identifier) if fields.identifier else None
        self._pair = _single(options.pair) if options.pair else None
        self._content = self._reaching(options.parallel) if options.parallel else None
        self._labelled = bool(self._by or self._origin or self._identifier or self._content)
        self._number = 0
        self._batch = Batch(0, "")

    def batches(self, source: str, rows: Iterator[Row], *, plain: bool) -> Iterator[Batch]:
        """Yield the batches of ``source``; ``plain``: records are texts, else objects.

        The last one may hold flaws only. Raises CorpusError at the first flaw when strict.
        """
        batch, size = self._begin(source), 0
        most_bytes, most = self._options.batch_bytes, self._options.batch_documents
        text_of = _itself if plain else self._text
        for line, record, mends in rows:
            text = text_of(record)
            pair = self._pair(record) if self._pair else ""
            if isinstance(pair, Damage) and not isinstance(text, Damage):
                text = pair
            if isinstance(text, Damage):
                batch.set_aside.append(self._flaw(line, text))
            else:
                size += _utf8_length(text)
                if batch.pairs is not None and isinstance(pair, str):
                    size += _utf8_length(pair)
                    batch.pairs.append(pair)
                batch.texts.append(text)
                batch.lines.append(line)
                if self._labelled:
                    self._label(batch, line, record)
                if mends:
                    batch.mended += [self._flaw(line, mend) for mend in mends]
            # Flaws are counted too, so that a corpus of nothing but flaws is not held whole.
            if size >= most_bytes or len(batch.texts) >= most or len(batch.set_aside) >= most:
                yield batch
                batch, size = self._begin(source), 0
        if batch.texts or batch.set_aside:
            yield batch
        else:
            self._number -= 1

    def _begin(self, source: str) -> Batch:
        self._number += 1
        self._batch = Batch(
            self._number - 1,
            source,
            slices={name: [] for name in self._options.by},
            origins=None if self._origin is None else [],
            identifiers=None if self._identifier is None else [],
            pairs=None if self._pair is None else [],
            contents=None if self._content is None else [],
        )
        return self._batch

    def _label(self, batch: Batch, line: int, record: object) -> None:
        """Add the slices, the origin and the identifier of a record."""
        held = record if isinstance(record, dict) else _NO_FIELDS
        for name, of in self._by:
            batch.slices[name].append(f"{name}={spelled(of(held))}")
        if self._origin is not None and batch.origins is not None:
            origin = self._origin(held)
            # What was drawn by itself is its own origin.
            own = origin is None or origin is MISSING
            batch.origins.append(f"{batch.source}:{line}" if own else spelled(origin))
        if self._identifier is not None and batch.identifiers is not None:
            identifier = self._identifier(held)
            absent = identifier is None or identifier is MISSING
            batch.identifiers.append("" if absent else spelled(identifier))

        if self._content is not None and batch.contents is not None:
            content = self._content(held)
            absent = content is None or content is MISSING
            batch.contents.append(None if absent else spelled(content))

    def _reaching(self, name: str) -> Reach:
        if name == SOURCE and SOURCE in self._fields.pseudo:
            return lambda _: self._batch.source
        return reaching(name)

    def _flaw(self, line: int, fault: Damage | Mend) -> Flaw:
        if self._options.strict:
            told = f"{fault.reason} ({fault.detail})." if fault.detail else f"{fault.reason}."
            raise CorpusError(
                told,
                hint="Mend the record, or read without --strict to set it aside and count it.",
                where=f"{self._batch.source}:{line}",
            )
        return Flaw(self._batch.source, line, fault.reason, fault.detail)


def _utf8_length(text: str) -> int:
    return len(text) if text.isascii() else len(text.encode())


def _itself(record: Any) -> str | Damage:  # noqa: ANN401 - a row of plain text holds a text
    return record  # type: ignore[no-any-return]


def _text_of(fields: Fields, options: ReadOptions) -> _Text:
    """Return the function that makes a record's text, or says why it has none."""
    if fields.conversation:
        return _conversation(fields.text[0], options.render)
    return _single(fields.text[0]) if len(fields.text) == 1 else _joined(fields.text)


def _conversation(name: str, render: Render | None) -> _Text:
    def text(record: object) -> str | Damage:
        value = reach(record, name)
        if value is MISSING:
            return _no_text(record, value, name)
        return conversation_text(value, render)

    return text


def _single(name: str) -> _Text:
    of = reaching(name)

    def text(record: object) -> str | Damage:
        value = of(record) if type(record) is dict else MISSING
        return value if type(value) is str else _no_text(record, value, name)

    return text


def _joined(names: tuple[str, ...]) -> _Text:
    def text(record: object) -> str | Damage:
        found: list[str] = []
        for name in names:
            value = reach(record, name)
            if type(value) is not str:
                return _no_text(record, value, name)
            found.append(value)
        return "\n".join(found)

    return text


def _no_text(record: object, value: object, name: str) -> Damage:
    if isinstance(record, Damage):
        return record
    return not_text(value, name) if isinstance(record, dict) else Damage("not an object")
