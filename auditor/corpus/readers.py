"""The reader of each format, chosen in one place."""

from __future__ import annotations

from collections.abc import Iterator

from auditor.corpus.arrow_tables import arrow_rows
from auditor.corpus.columns import RowsAtOnce
from auditor.corpus.delimited import delimited_rows
from auditor.corpus.formats import Format
from auditor.corpus.json_arrays import json_rows
from auditor.corpus.jsonlines import json_line_rows
from auditor.corpus.lines import text_rows
from auditor.corpus.options import ReadOptions
from auditor.corpus.parquet_tables import parquet_rows
from auditor.corpus.rows import Row
from auditor.corpus.sources import Source
from auditor.corpus.streams import Stream, Utf8

RECORDS: frozenset[Format] = frozenset({"jsonl", "json", "csv", "tsv", "parquet", "arrow"})


def rows_of(
    source: Source, stream: Stream, options: ReadOptions, wanted: frozenset[str] | None
) -> Iterator[Row]:
    """Return the rows of ``source``, opened as ``stream``; of tables the ``wanted`` fields only."""
    form = source.format(options.encoding)
    if form in {"parquet", "arrow"}:
        rows_at_once = RowsAtOnce(options.batch_documents, options.batch_bytes)
        opened = parquet_rows if form == "parquet" else arrow_rows
        return opened(source, stream, rows_at_once, wanted)
    text = Utf8(stream, options.encoding, source.name)
    if form == "text":
        return text_rows(text, options.unit)
    if form in {"csv", "tsv"}:
        return delimited_rows(text, source.name, None if form == "csv" else "\t")
    return json_line_rows(text) if form == "jsonl" else json_rows(text, source.name)
