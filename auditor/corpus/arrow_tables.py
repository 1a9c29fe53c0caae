"""Arrow IPC files and streams (also called Feather, version 2), a record batch at a time."""

from __future__ import annotations

import io
from collections.abc import Iterator
from pathlib import Path

import pyarrow as pa

from auditor.corpus import columns
from auditor.corpus.columns import FAULTS, RowsAtOnce
from auditor.corpus.rows import NOT_MENDED, Row
from auditor.corpus.sources import Source
from auditor.corpus.spooling import Sequential, random_access
from auditor.corpus.streams import Stream, read_head
from auditor.errors import CorpusError

_FILE_MAGIC = b"ARROW1\0\0"
_READ_BUFFER = 1 << 20


def arrow_rows(
    source: Source, stream: Stream, at_once: RowsAtOnce, wanted: frozenset[str] | None
) -> Iterator[Row]:
    """Yield a row for every row of the table, its record the ``wanted`` fields (``None``: all).

    Of a file that was cut short, what lies before the cut is read. Raises CorpusError for the
    first version of Feather.
    """
    done = 0
    try:
        for batch in _batches(source, stream):
            held = batch.select(columns.top_names(batch.schema.names, wanted))
            if not columns.is_sound(held):
                raise pa.ArrowInvalid(source.name)
            step = at_once.of(held.num_rows, held.nbytes)
            for start in range(0, batch.num_rows, step):
                yield from columns.rows_of_batch(held.slice(start, step), done + start + 1)
            done += batch.num_rows
    except FAULTS:
        if not stream.damage:
            yield columns.damaged(done)
    if stream.damage:
        yield done + 1, stream.damage, NOT_MENDED


def _batches(source: Source, stream: Stream) -> Iterator[pa.RecordBatch]:
    head = read_head(stream, len(_FILE_MAGIC))
    if head.startswith(b"FEA1"):
        raise CorpusError(
            "this is the first version of Feather, which is no longer read.",
            hint="Write it anew as Parquet or Arrow.", where=source.name,
        )  # fmt: skip
    if head == _FILE_MAGIC:
        yield from _file_batches(source, stream, head)
        return
    with io.BufferedReader(Sequential(stream, head), _READ_BUFFER) as file:
        yield from pa.ipc.open_stream(file)


def _file_batches(source: Source, stream: Stream, head: bytes) -> Iterator[pa.RecordBatch]:
    with random_access(stream, head) as found:
        file = pa.OSFile(str(found)) if isinstance(found, Path) else pa.PythonFile(found, "r")
        try:
            table = pa.ipc.open_file(file)
        except FAULTS:
            # Without its footer a file is still a stream behind eight bytes (Arrow's format).
            file.seek(len(_FILE_MAGIC))
            yield from pa.ipc.open_stream(file)
            raise
        for number in range(table.num_record_batches):
            yield table.get_batch(number)
            if stream.path is not None:
                stream.position = (source.size or 0) * (number + 1) // table.num_record_batches
