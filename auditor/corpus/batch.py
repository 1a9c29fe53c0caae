"""What a reader hands over: documents in batches, and the records it set aside."""

from __future__ import annotations

from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True)
class Flaw:
    """A record that was set aside, or one that was mended and measured.

    ``line`` is the 1-based line of a text file, or the number of a record in a table or a JSON
    array (``None`` when unknown). ``detail`` says what exactly was wrong (a byte position counted
    from 1 in the record, a field's name), never the record's own text.
    """

    source: str
    line: int | None
    reason: str
    detail: str = ""


@dataclass(slots=True)
class Batch:
    """Consecutive documents of one source, column by column; all lists have one item a document.

    ``number`` counts batches from 0 in reading order. ``slices`` maps each field of ``--by`` to the
    slice key of every document (``lang=pt``); ``origins`` and ``identifiers`` are ``None`` when
    the corpus has none; a document without an origin is its own (``file:line``), one without an
    identifier has an empty one. ``pairs`` holds the second text of each two-part input, ``None``
    unless asked for; ``contents`` what says which records hold the same content, ``None`` for one
    that has none. ``set_aside`` and ``mended`` are the flaws met while these were read.
    ``read_bytes`` counts the bytes of all files read so far, as they lie on the disk.
    """

    number: int
    source: str
    texts: list[str] = field(default_factory=list)
    lines: list[int] = field(default_factory=list)
    slices: dict[str, list[str]] = field(default_factory=dict)
    origins: list[str] | None = None
    identifiers: list[str] | None = None
    pairs: list[str] | None = None
    contents: list[str | None] | None = None
    set_aside: list[Flaw] = field(default_factory=list)
    mended: list[Flaw] = field(default_factory=list)
    read_bytes: int = 0

    def __len__(self) -> int:
        return len(self.texts)
