"""The reader of each format, chosen in one place."""

from __future__ import annotations

from collections.abc import Iterator

from auditor.corpus.formats import Format
from auditor.corpus.jsonlines import json_line_rows
from auditor.corpus.lines import text_rows
from auditor.corpus.options import ReadOptions
from auditor.corpus.rows import Row
from auditor.corpus.sources import Source
from auditor.corpus.streams import Stream, Utf8

RECORDS: frozenset[Format] = frozenset({"jsonl", "json", "csv", "tsv", "parquet", "arrow"})


def rows_of(
    source: Source, stream: Stream, options: ReadOptions, wanted: frozenset[str] | None
) -> Iterator[Row]:
    """Return the rows of ``source``, opened as ``stream``; of a table the ``wanted`` fields only."""
    form = source.format(options.encoding)
    text = Utf8(stream, options.encoding, source.name)
    if form == "text":
        return text_rows(text, options.unit)
    return json_line_rows(text)
