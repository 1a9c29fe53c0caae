"""What a file is: the format by its first bytes, and by its suffix where they do not decide."""

from __future__ import annotations

import json
from typing import Literal

import orjson

Format = Literal["text", "jsonl", "json", "csv", "tsv", "parquet", "arrow"]

SUFFIXES: dict[str, Format] = {
    ".txt": "text",
    ".text": "text",
    ".md": "text",
    ".log": "text",
    ".jsonl": "jsonl",
    ".ndjson": "jsonl",
    ".json": "json",
    ".csv": "csv",
    ".tsv": "tsv",
    ".parquet": "parquet",
    ".arrow": "arrow",
    ".feather": "arrow",
}
COMPRESSED = (".gz", ".zst", ".bz2", ".xz")
KNOWN = ", ".join(SUFFIXES) + "; each also " + ", ".join(COMPRESSED)
HEAD = 1 << 16

_BLANK = b" \t\r\n"
_STREAM_MARK = b"\xff\xff\xff\xff"


def by_suffix(name: str) -> Format | None:
    """Return the format that the suffix of ``name`` stands for, below a compression's suffix."""
    lowered = name.lower()
    for suffix in COMPRESSED:
        lowered = lowered.removesuffix(suffix)
    return next((form for suffix, form in SUFFIXES.items() if lowered.endswith(suffix)), None)


def decide(name: str, head: bytes, *, whole: bool) -> Format | None:
    """Return the format of the file ``name`` that begins with ``head`` (all of it if ``whole``).

    Magic bytes win over the suffix. ``None``: nothing tells.
    """
    named = by_suffix(name)
    if (table := _table(head)) is not None:
        return table
    body = head.removeprefix(b"\xef\xbb\xbf").lstrip(_BLANK)
    if named in {"parquet", "arrow", None}:
        array = _array_of_objects(body, whole=whole)
        return "json" if array else "jsonl" if _json_lines(body, whole=whole) else named
    if named == "jsonl":
        return "json" if _array_of_objects(body, whole=whole) else "jsonl"
    if named == "json":
        several = _json_lines(body, whole=whole) and _lines(body)[1].strip(_BLANK)
        return "jsonl" if several else "json"
    return named


def _table(head: bytes) -> Format | None:
    if head.startswith((b"PAR1", b"PARE")):
        return "parquet"
    # The schema message of a stream: mark, length of the metadata, a flat buffer (Arrow's format).
    stream = head.startswith(_STREAM_MARK) and head[7:8] == b"\0"
    return "arrow" if stream or head.startswith((b"ARROW1", b"FEA1")) else None


def _lines(body: bytes) -> tuple[bytes, bytes, bool]:
    first, end, rest = body.partition(b"\n")
    return first, rest, bool(end)


def _parsed(line: bytes) -> object:
    try:
        return orjson.loads(line)
    except ValueError:
        pass
    try:
        return json.loads(line.decode("utf-8", "replace"))
    except (ValueError, RecursionError):
        return None


def _json_lines(body: bytes, *, whole: bool) -> bool:
    """Whether the first line that is not blank is a JSON object."""
    first, _, ended = _lines(body)
    if ended or whole:
        return isinstance(_parsed(first), dict)
    return first[:1] == b"{" and first[1:].lstrip(_BLANK)[:1] == b'"'


def _array_of_objects(body: bytes, *, whole: bool) -> bool:
    """Whether a file called JSON lines is in truth one array, and not rows that are arrays."""
    if body[:1] != b"[" or body[1:].lstrip(_BLANK)[:1] != b"{":
        return False
    first, rest, ended = _lines(body)
    rows = ended and isinstance(_parsed(first), list) and bool(rest.strip(_BLANK))
    return not rows
