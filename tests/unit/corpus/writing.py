"""Writes corpora in every format, by the libraries' own writers, and reads them back."""

from __future__ import annotations

import bz2
import csv
import gzip
import io
import json
import lzma
from dataclasses import dataclass, field

import pyarrow as pa
import pyarrow.parquet as pq
import zstandard

from auditor.corpus import Batch, Flaw, ReadOptions, find_sources, read, resolve_fields

PACK = {
    "": lambda data: data,
    ".gz": gzip.compress,
    ".zst": zstandard.ZstdCompressor().compress,
    ".bz2": bz2.compress,
    ".xz": lzma.compress,
}


def json_lines(rows):
    return "".join(json.dumps(row) + "\n" for row in rows).encode()


def json_array(rows):
    return json.dumps(rows, ensure_ascii=False, indent=1).encode()


def json_object(rows):
    return json.dumps({"made": "by hand", "records": rows, "count": len(rows)}).encode()


def delimited(delimiter):
    def write(rows):
        out = io.StringIO(newline="")
        writer = csv.writer(out, delimiter=delimiter)
        writer.writerow(rows[0].keys() if rows else ["text"])
        writer.writerows(row.values() for row in rows)
        return out.getvalue().encode()

    return write


def table(rows, kind=None):
    kind = kind or pa.string()
    return pa.table({"text": pa.array([row["text"] for row in rows], kind)})


def parquet(rows, kind=None):
    out = io.BytesIO()
    pq.write_table(table(rows, kind), out, row_group_size=3)
    return out.getvalue()


def arrow(opened, kind=None):
    def write(rows):
        out = io.BytesIO()
        content = table(rows, kind)
        with opened(out, content.schema) as writer:
            writer.write_table(content, max_chunksize=3)
        return out.getvalue()

    return write


WRITE = {
    ".jsonl": json_lines,
    ".ndjson": json_lines,
    ".json": json_array,
    ".object.json": json_object,
    ".csv": delimited(","),
    ".tsv": delimited("\t"),
    ".parquet": parquet,
    ".arrow": arrow(pa.ipc.new_stream),
    ".feather": arrow(pa.ipc.new_file),
}


@dataclass
class Reading:
    """Everything that was read, batch by batch and put together."""

    batches: list[Batch]
    texts: list[str] = field(default_factory=list)
    lines: list[int] = field(default_factory=list)
    set_aside: list[Flaw] = field(default_factory=list)
    mended: list[Flaw] = field(default_factory=list)

    def __post_init__(self):
        for batch in self.batches:
            self.texts += batch.texts
            self.lines += batch.lines
            self.set_aside += batch.set_aside
            self.mended += batch.mended

    @property
    def places(self):
        return [(flaw.line, flaw.reason) for flaw in self.set_aside]

    def column(self, name):
        return [key for batch in self.batches for key in batch.slices[name]]


def read_back(*paths, **options):
    settings = ReadOptions(**options)
    sources = find_sources([str(path) for path in paths])
    return Reading(list(read(sources, settings, resolve_fields(sources, settings))))


def read_bytes(folder, name, content, **options):
    path = folder / name
    path.write_bytes(content)
    return read_back(path, **options)
