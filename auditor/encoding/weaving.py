"""Measures of documents, and how two parts of a stretch are put together again."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from auditor.encoding.measures import Columns
from auditor.encoding.whole import RunTable
from auditor.vocabulary.engine import Ints


@dataclass(frozen=True, slots=True)
class Counted:
    """Documents measured: columns of text, and columns and runs under each vocabulary."""

    text: Columns
    columns: list[Columns]
    runs: list[RunTable]


def woven(parts: list[tuple[Ints, Counted]], count: int) -> Counted:
    """Return the measures of all documents from those of two parts, each with its places."""
    vocabularies = range(len(parts[0][1].columns))
    return Counted(
        _woven_columns([(places, part.text) for places, part in parts], count),
        [
            _woven_columns([(places, part.columns[v]) for places, part in parts], count)
            for v in vocabularies
        ],
        [_woven_runs([(places, part.runs[v]) for places, part in parts]) for v in vocabularies],
    )


def _woven_columns(parts: list[tuple[Ints, Columns]], count: int) -> Columns:
    found = {name: np.zeros(count, dtype=np.int64) for name in parts[0][1]}
    for places, columns in parts:
        for name, values in columns.items():
            found[name][places] = values
    return found


def _woven_runs(parts: list[tuple[Ints, RunTable]]) -> RunTable:
    return RunTable(
        np.concatenate([runs.kind_of for _, runs in parts]),
        np.concatenate([runs.table for _, runs in parts]),
        np.concatenate([places[runs.document_of] for places, runs in parts]),
    )
