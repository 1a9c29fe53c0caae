"""The folder an audit is written to: whole and in one step, or not at all."""

from __future__ import annotations

import shutil
import tempfile
from collections.abc import Iterable
from contextlib import suppress
from pathlib import Path
from types import TracebackType

import orjson
import pyarrow as pa
import pyarrow.parquet as pq

from auditor.corpus import Flaw
from auditor.errors import OutputError
from auditor.runs.measuring import Outcome

FILES = frozenset(
    {
        "audit.json", "run.json", "figures.csv", "lengths.csv", "words.csv", "characters.csv",
        "documents.parquet", "set_aside.jsonl", "report.html", "policy.json",
    }
)  # fmt: skip
PLAN_FILES = frozenset({"plan.json", "plan.csv", "report.html"})
COMPARISON_FILES = frozenset({"comparison.json", "differences.csv", "report.html"})
LANGUAGE_FILES = frozenset(
    {"languages.json", "languages.csv", "scripts.csv", "doubtful_labels.jsonl", "report.html"}
)
INSPECTION_FILES = frozenset({"inspection.json", "entries.csv", "unreachable.csv", "report.html"})
DOMAIN_FILES = frozenset(
    {
        "domain.json",
        "candidates.csv",
        "penalty.csv",
        "kinds.csv",
        "terms.csv",
        "words.csv",
        "report.html",
    }
)  # fmt: skip


class OutputFolder:
    """Writes into a hidden folder beside ``path``, and puts it in its place when all is written.

    A folder that holds nothing but ``files`` is replaced; one that holds anything else is refused
    unless ``overwrite``. Use as a context manager: leaving by an exception removes what was begun.
    """

    def __init__(
        self, path: Path, *, overwrite: bool = False, files: frozenset[str] = FILES
    ) -> None:
        self.path = path
        self._files = files
        self._overwrite = overwrite
        self._refuse_foreign()

    def _refuse_foreign(self) -> None:
        if not self.path.exists():
            return
        if not self.path.is_dir():
            raise OutputError(
                "there is a file of that name.", hint="Name another --out.", where=str(self.path)
            )
        foreign = sorted({entry.name for entry in self.path.iterdir()} - self._files)
        if foreign and not self._overwrite:
            raise OutputError(
                f"the folder holds what this command never writes ({', '.join(foreign[:5])}).",
                hint="Name another --out, or allow it with --overwrite.",
                where=str(self.path),
            )

    def __enter__(self) -> OutputFolder:
        self._made = [p for p in self.path.parents if not p.exists()]
        try:
            self.path.parent.mkdir(parents=True, exist_ok=True)
            made = tempfile.mkdtemp(prefix=f".{self.path.name}.", dir=self.path.parent)
        except OSError as fault:
            raise OutputError(
                f"cannot write there ({fault.strerror}).",
                hint="Name another --out.",
                where=str(self.path),
            ) from fault
        self.begun = Path(made)
        self.begun.chmod(0o755)
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        value: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        if kind is not None:
            shutil.rmtree(self.begun, ignore_errors=True)
            with suppress(OSError):  # somebody else may have begun to use them
                for folder in self._made:
                    folder.rmdir()

    def write(self, name: str, content: bytes | str) -> None:
        """Write one file."""
        data = content.encode() if isinstance(content, str) else content
        (self.begun / name).write_bytes(data)

    def finish(self) -> list[Path]:
        """Put the folder in its place and return the paths of the files."""
        self._refuse_foreign()
        if self.path.exists():
            old = Path(tempfile.mkdtemp(prefix=f".{self.path.name}.", dir=self.path.parent))
            self.path.rename(old / "replaced")
            self.begun.rename(self.path)
            shutil.rmtree(old)
        else:
            self.begun.rename(self.path)
        return sorted(self.path.iterdir())


class DocumentRows:
    """Streams `documents.parquet` and `set_aside.jsonl` while batches come in."""

    def __init__(self, folder: Path, names: list[str], by: tuple[str, ...]) -> None:
        self._names = names
        self._by = by
        self._table = pq.ParquetWriter(
            folder / "documents.parquet", self._schema(), compression="zstd"
        )
        self._flaws = (folder / "set_aside.jsonl").open("wb")

    def _schema(self) -> pa.Schema:
        fixed = [("source", pa.string()), ("line", pa.int64()), ("id", pa.string())]
        slices = [(f"slice:{field}", pa.string()) for field in self._by]
        counts = [(name, pa.int64()) for name in ("bytes", "characters", "words")]
        own = [
            (f"{name}:{column}", kind)
            for name in self._names
            for column, kind in (
                ("tokens", pa.int64()), ("unknown_tokens", pa.int64()),
                ("byte_spelled_characters", pa.int64()), ("lossless", pa.bool_()),
            )
        ]  # fmt: skip
        return pa.schema([*fixed, *slices, *counts, *own])

    def add(self, outcome: Outcome) -> None:
        """Write the rows of one batch."""
        self._write_flaws(outcome.batch.set_aside)
        batch = outcome.batch
        if not batch.texts:
            return
        columns: list[object] = [
            [batch.source] * len(batch),
            batch.lines,
            batch.identifiers or [None] * len(batch),
            *(batch.slices[field] for field in self._by),
            *(outcome.text_rows[name] for name in ("bytes", "characters", "words")),
        ]
        for own in outcome.rows:
            columns += [own["tokens"], own["unknown_tokens"], own["byte_spelled_characters"]]
            columns.append(own["lossless_documents"].astype(bool))
        schema = self._schema()
        arrays = [pa.array(c, type=f.type) for c, f in zip(columns, schema, strict=True)]
        self._table.write_batch(pa.record_batch(arrays, schema=schema))

    def _write_flaws(self, flaws: Iterable[Flaw]) -> None:
        for flaw in flaws:
            row = {
                "source": flaw.source,
                "line": flaw.line,
                "reason": flaw.reason,
                "detail": flaw.detail,
            }
            self._flaws.write(orjson.dumps(row, option=orjson.OPT_APPEND_NEWLINE))

    def close(self) -> None:
        """Finish both files."""
        self._table.close()
        self._flaws.close()
