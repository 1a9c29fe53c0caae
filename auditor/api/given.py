"""What a caller may hand over as a corpus: paths, tables, or texts and records one by one."""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator, Mapping
from itertools import chain, islice
from pathlib import Path
from typing import Any

import orjson
import pyarrow as pa

from auditor.corpus import Named
from auditor.errors import CorpusError

TABLE, RECORDS = "the table given", "the records given"
_FALLBACK = (pa.ArrowInvalid, pa.ArrowTypeError, pa.ArrowNotImplementedError)
_ROWS_AT_ONCE = 10_000


def corpus(source: Any, folder: Path) -> tuple[str | Named, ...]:  # noqa: ANN401 - many kinds
    """Return what a plan reads for ``source``; what is no path is written to ``folder`` first.

    ``source`` is a path or glob; a table that offers the Arrow stream interface (pandas, pyarrow,
    and others); or an iterable of paths (`Path`), or of texts and records (mappings), which is read
    once and held on disk, not in memory. CorpusError for anything else.
    """
    if isinstance(source, (str, Path)):
        return (str(source),)
    if hasattr(source, "__arrow_c_stream__") and not _is_series(source):
        return (_table(source, folder),)
    if isinstance(source, (bytes, Mapping)) or not isinstance(source, Iterable):
        raise _unknown(source)
    items = iter(source)
    head = list(islice(items, 1))
    if head and isinstance(head[0], Path):
        return (str(head[0]), *(str(path) for path in items))
    return (_records(chain(head, items), folder),)


def _is_series(source: object) -> bool:
    """Return whether ``source`` is one column: its values are texts."""
    return hasattr(source, "to_list") and not hasattr(source, "columns")


def _unknown(source: object) -> CorpusError:
    return CorpusError(
        f"{type(source).__name__} is nothing that can be read as a corpus.",
        hint="Give a path, a pandas or Arrow table, or an iterable of texts or of mappings.",
        where="source",
    )


def _table(source: Any, folder: Path) -> Named:  # noqa: ANN401 - whatever offers Arrow streams
    path = _unused(folder, "arrow")
    try:
        reader = pa.RecordBatchReader.from_stream(source)
    except _FALLBACK:
        # A column of mixed values is no Arrow column; its rows are records all the same.
        return _records(source.to_dict("records"), folder, TABLE)
    with pa.OSFile(str(path), "wb") as file, pa.ipc.new_stream(file, reader.schema) as stream:
        for batch in reader:
            for start in range(0, batch.num_rows, _ROWS_AT_ONCE):
                stream.write_batch(batch.slice(start, _ROWS_AT_ONCE))
    return Named(path, TABLE)


def _records(items: Iterable[object], folder: Path, name: str = RECORDS) -> Named:
    path = _unused(folder, "jsonl")
    with path.open("wb") as file:
        file.writelines(_lines(items))
    return Named(path, name)


def _lines(items: Iterable[object]) -> Iterator[bytes]:
    for item in items:
        record = {"text": item} if isinstance(item, str) else item
        if isinstance(record, Mapping):
            record = dict(record)
        try:
            yield orjson.dumps(record, default=str, option=_OPTIONS)
        except (TypeError, ValueError):  # lone surrogates, keys that are no strings, huge numbers
            yield json.dumps(record, default=str).encode() + b"\n"


_OPTIONS = orjson.OPT_APPEND_NEWLINE | orjson.OPT_SERIALIZE_NUMPY


def _unused(folder: Path, suffix: str) -> Path:
    return folder / f"given-{len(list(folder.iterdir()))}.{suffix}"
