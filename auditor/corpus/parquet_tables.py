"""Parquet, by columns: only the fields that are needed, a few rows at a time."""

from __future__ import annotations

from collections.abc import Iterator

import pyarrow as pa
import pyarrow.parquet as pq

from auditor.corpus.columns import FAULTS, RowsAtOnce, damaged, rows_of_batch, top_names
from auditor.corpus.rows import NOT_MENDED, Row
from auditor.corpus.sources import Source
from auditor.corpus.spooling import random_access
from auditor.corpus.streams import Stream

# Read ahead, the library would hold a whole row group: the whole file, often.
_READ_BUFFER = 1 << 16


def parquet_rows(
    source: Source, stream: Stream, at_once: RowsAtOnce, wanted: frozenset[str] | None
) -> Iterator[Row]:
    """Yield a row for every row of the table, its record the ``wanted`` fields (``None``: all)."""
    with random_access(stream) as file:
        if stream.damage:
            yield 1, stream.damage, NOT_MENDED
            return
        done = 0
        try:
            with pq.ParquetFile(file, buffer_size=_READ_BUFFER, pre_buffer=False) as table:
                for batch in _batches(table, at_once, wanted):
                    yield from rows_of_batch(batch, done + 1)
                    done += batch.num_rows
                    if stream.path is not None:
                        share = done / table.metadata.num_rows
                        stream.position = int((source.size or 0) * share)
        except FAULTS:
            yield damaged(done)


def _batches(
    table: pq.ParquetFile, at_once: RowsAtOnce, wanted: frozenset[str] | None
) -> Iterator[pa.RecordBatch]:
    facts = table.metadata
    size = sum(facts.row_group(i).total_byte_size for i in range(facts.num_row_groups))
    columns = top_names(table.schema_arrow.names, wanted)
    rows = at_once.of(facts.num_rows, size)
    yield from table.iter_batches(rows, columns=columns, use_threads=False)
