"""Columns of an Arrow table as Python values, a few rows at a time."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any, NamedTuple

import pyarrow as pa

from auditor.corpus.rows import NOT_MENDED, Damage, Mend, Row, decoded

TABLE_DAMAGED = "table is damaged"
FAULTS = (pa.ArrowException, OSError, ValueError, OverflowError)


class RowsAtOnce(NamedTuple):
    """How many rows and bytes of a table are turned into Python values at once."""

    rows: int
    bytes: int

    def of(self, rows: int, size: int) -> int:
        """Return how many rows to take of ``rows`` that hold ``size`` bytes."""
        return max(1, min(self.rows, self.bytes * rows // max(1, size)))


def top_names(names: list[str], wanted: frozenset[str] | None) -> list[str]:
    """Return those of the table's ``names`` that hold the ``wanted`` fields, dots reaching in."""
    if wanted is None:
        return names
    exact = wanted & set(names)
    reaching = wanted - exact
    return [n for n in names if n in exact or any(w.startswith(f"{n}.") for w in reaching)]


def rows_of_batch(batch: pa.RecordBatch, first: int) -> Iterator[Row]:
    """Yield a row for each of ``batch``, numbered from ``first``."""
    mended: dict[int, tuple[Mend, ...]] = {}
    names = batch.schema.names
    columns = [_values(column, mended) for column in batch.columns]
    records: Iterator[tuple[Any, ...]] = zip(*columns, strict=True)
    if not columns:
        records = iter([()] * batch.num_rows)
    for place, values in enumerate(records):
        mends = mended.get(place, NOT_MENDED) if mended else NOT_MENDED
        yield first + place, dict(zip(names, values, strict=True)), mends


def damaged(after: int) -> Row:
    """Return the row that says that nothing can be read after row ``after``."""
    return after + 1, Damage(TABLE_DAMAGED, f"after row {after}"), NOT_MENDED


def is_sound(batch: pa.RecordBatch) -> bool:
    """Whether the offsets of ``batch`` lie inside its buffers: a file may hold anything."""
    try:
        for column in batch.columns:
            _bytes_of(column).validate(full=True)
    except pa.ArrowInvalid as fault:
        return "UTF8" in str(fault)
    return True


def _values(column: pa.Array, mended: dict[int, tuple[Mend, ...]]) -> list[Any]:
    if pa.types.is_dictionary(column.type):
        column = column.dictionary_decode()
    if _is_bytes(column.type):
        return [_text_or_bytes(value) for value in column.to_pylist()]
    try:
        return column.to_pylist()  # type: ignore[no-any-return]
    except FAULTS:
        return _one_by_one(column, mended)


def _one_by_one(column: pa.Array, mended: dict[int, tuple[Mend, ...]]) -> list[Any]:
    values: list[Any] = []
    text = _is_text(column.type)
    for place, value in enumerate(_bytes_of(column)):
        try:
            values.append(value.as_py())
        except FAULTS as fault:
            values.append(Damage("field is no text", type(fault).__name__))
        if text and values[-1] is not None:
            values[-1], mends = decoded(values[-1])
            if mends:
                mended[place] = mends
    return values


def _bytes_of(column: pa.Array) -> pa.Array:
    """Return a column of text as one of bytes, without a copy; any other as it is."""
    if pa.types.is_large_string(column.type):
        return column.cast(pa.large_binary())
    if pa.types.is_string_view(column.type):
        return column.cast(pa.binary_view())
    return column.cast(pa.binary()) if pa.types.is_string(column.type) else column


def _is_text(kind: pa.DataType) -> bool:
    types = pa.types
    return bool(types.is_string(kind) or types.is_large_string(kind) or types.is_string_view(kind))


def _is_bytes(kind: pa.DataType) -> bool:
    types = pa.types
    return bool(types.is_binary(kind) or types.is_large_binary(kind) or types.is_binary_view(kind))


def _text_or_bytes(value: bytes | None) -> str | bytes | None:
    """Return text whose writer did not declare it as such; anything else stays what it is."""
    if value is None:
        return None
    try:
        return value.decode()
    except UnicodeDecodeError:
        return value
