"""Which fields of the records hold the text: named, or found by rules that never guess."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import islice
from typing import Any

from auditor.corpus.messages import MESSAGES, is_conversation
from auditor.corpus.options import SOURCE, ReadOptions
from auditor.corpus.readers import RECORDS, rows_of
from auditor.corpus.sources import Source
from auditor.corpus.values import MISSING, reach
from auditor.errors import CorpusError, SettingsError

CANDIDATES = (
    "text", "content", "raw_content", "document", "body", "sentence", "abstract", "review",
)  # fmt: skip
PAIRS = (
    ("premise", "hypothesis"), ("question", "context"), ("query", "passage"), ("source", "target"),
)  # fmt: skip
IDENTIFIERS = ("id", "_id", "uid", "guid")

_RECORDS_LOOKED_AT = 100
# So far is looked for the first record when those before it are damaged.
_ROWS_LOOKED_AT = 10_000
_SOURCES_LOOKED_AT = 8

Records = list[dict[str, Any]]


@dataclass(frozen=True, slots=True)
class Fields:
    """What is read of each record.

    ``text`` is empty when all sources are plain text. ``conversation``: the one field of ``text``
    holds messages. ``identifier`` names the field of the record's own name. ``pseudo`` holds
    ``source`` when that stands for the file's name and is no field.
    """

    text: tuple[str, ...] = ()
    conversation: bool = False
    identifier: str | None = None
    pseudo: tuple[str, ...] = (SOURCE,)

    def as_json(self) -> dict[str, Any]:
        """Return the fields as JSON values, for the record of the run's settings."""
        return {
            "text": list(self.text),
            "conversation": self.conversation,
            "identifier": self.identifier,
        }


def resolve_fields(sources: Sequence[Source], options: ReadOptions) -> Fields:
    """Return the fields to read, from the first 100 records of each of the first eight sources.

    ``--text`` wins; else the one field of text among the usual names, else ``messages``, else the
    only field of text; ``text`` when no record can be read. Plain text has no fields. Raises
    CorpusError, with the list of what is there, when a named field is not or when several could
    hold the text; SettingsError for options that do not fit.
    """
    options.check()
    tables = [s for s in sources if s.format(options.encoding) in RECORDS]
    if tables and options.unit != "record":
        raise SettingsError(
            f"--unit {options.unit} is for plain text; here a record is a document.",
            hint="Leave --unit out, or give plain text.", where=tables[0].name,
        )  # fmt: skip
    looked = _look(tables, options)
    place = tables[0].name if tables else sources[0].name if sources else None
    try:
        return _resolve(looked, options, plain=not tables)
    except CorpusError as fault:
        raise CorpusError(fault.message, hint=fault.hint, where=fault.where or place) from None


def _look(tables: Sequence[Source], options: ReadOptions) -> Records:
    found: Records = []
    for source in tables[:_SOURCES_LOOKED_AT]:
        with source.open(keep=True) as stream:
            rows = rows_of(source, stream, options, None)
            records = (r for _, r, _ in islice(rows, _ROWS_LOOKED_AT) if isinstance(r, dict))
            found += islice(records, _RECORDS_LOOKED_AT)
    return found


def _resolve(records: Records, options: ReadOptions, *, plain: bool) -> Fields:
    names = _names(records)
    pseudo = () if SOURCE in names else (SOURCE,)
    _check_named(records, names, options, plain=plain)
    if plain or not records:
        text = () if plain else options.text or CANDIDATES[:1]
        return Fields(text, identifier=options.identifier, pseudo=pseudo)
    text = options.text or _find_text(records, [n for n in names if n != options.pair])
    values = [reach(record, text[0]) for record in records]
    conversation = len(text) == 1 and any(map(is_conversation, values))
    return Fields(text, conversation, options.identifier or _identifier(names), pseudo)


def _identifier(names: list[str]) -> str | None:
    return next((name for name in IDENTIFIERS if name in names), None)


def _check_named(records: Records, names: list[str], options: ReadOptions, *, plain: bool) -> None:
    if options.text and plain:
        raise CorpusError("plain text has no fields.", hint="Leave --text out.")
    alone = [options.origin, options.identifier, options.parallel]
    others = [*options.by, *filter(None, alone)]
    texts = [*options.text, *filter(None, [options.pair])]
    for name in [*texts, *others]:
        pseudo = name == SOURCE and name not in texts
        if pseudo or (not records and not plain) or _held(records, name):
            continue
        there = ", ".join(names) if names else f"only the pseudo-field {SOURCE}, the file's name"
        raise CorpusError(f"there is no field {name}.", hint=f"There: {there}.")


def _held(records: Records, name: str) -> bool:
    return any(reach(record, name) is not MISSING for record in records)


def _names(records: Iterable[dict[str, Any]]) -> list[str]:
    return list(dict.fromkeys(name for record in records for name in record))


def _find_text(records: Records, names: list[str]) -> tuple[str, ...]:
    strings = [name for name in names if any(type(r.get(name)) is str for r in records)]
    usual = [name for name in CANDIDATES if name in strings]
    if len(usual) == 1:
        return (usual[0],)
    if not usual and any(is_conversation(record.get(MESSAGES)) for record in records):
        return (MESSAGES,)
    if not usual and len(strings) == 1:
        return (strings[0],)
    raise _undecided(usual, strings, names)


def _undecided(usual: list[str], strings: list[str], names: list[str]) -> CorpusError:
    if usual:
        return CorpusError(
            f"several fields could hold the text: {', '.join(usual)}.", hint="Name one with --text."
        )
    pair = next((pair for pair in PAIRS if set(pair) <= set(strings)), None)
    if pair is not None:
        return CorpusError(
            f"the text is spread over two fields: {', '.join(pair)}.",
            hint=f"Name them: --text {','.join(pair)}.",
        )
    return CorpusError(
        "no field is known to hold the text.",
        hint=f"Name one with --text. There: {', '.join(names) or 'none'}.",
    )
