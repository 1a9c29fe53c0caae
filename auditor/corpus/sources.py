"""Which files make up a corpus."""

from __future__ import annotations

import difflib
import glob
import os
import stat
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import BinaryIO

from auditor.corpus import compression, formats
from auditor.corpus.compression import Compression
from auditor.corpus.streams import Pipe, PipeReader, Stream, read_head
from auditor.errors import CorpusError

# They describe a saved data set and lie beside its tables.
_DESCRIPTIONS = {"state.json", "dataset_info.json", "dataset_dict.json"}
_STANDARD_INPUT = "standard input"


@dataclass(frozen=True, slots=True)
class Named:
    """A file that is called by a name of its own wherever it is spoken of."""

    path: Path
    name: str


class Source:
    """One file, or a pipe.

    ``name`` is the one that was given, else what the user wrote or what was found below it;
    ``size`` its bytes on the disk (``None`` for a pipe).
    """

    def __init__(
        self, path: Path | None, pipe: Pipe | None = None, name: str | None = None
    ) -> None:
        self.path = path
        self.name = name or (_STANDARD_INPUT if path is None else _readable(path))
        self.size = None if path is None or pipe is not None else path.stat().st_size
        self._pipe = pipe
        self._looked: dict[str | None, tuple[Compression | None, formats.Format | None]] = {}

    def __repr__(self) -> str:
        return f"Source({self.name!r})"

    @contextmanager
    def open(self, *, keep: bool = False) -> Iterator[Stream]:
        """Open the expanded bytes; ``keep`` what is read of a pipe for the next opening."""
        packed = self._look(None)[0]
        raw = self._raw(keep=keep)
        stream = Stream(raw, packed)
        stream.path = self.path if packed is None and self._pipe is None else None
        try:
            yield stream
        finally:
            stream.close()

    def format(self, encoding: str | None = None) -> formats.Format:
        """Return what the file holds, read in ``encoding``; raises CorpusError if nothing tells."""
        found = self._look(encoding)[1]
        if found is None and self._pipe is not None:
            return "text"
        if found is None:
            raise _unknown_format(self.name)
        return found

    def _raw(self, *, keep: bool) -> BinaryIO | PipeReader:
        if self._pipe is not None:
            return self._pipe.reader(keep=keep)
        try:
            return Path(self.path or "").open("rb")
        except OSError as fault:
            raise CorpusError(f"cannot be opened ({fault.strerror}).", where=self.name) from fault

    def _look(self, encoding: str | None) -> tuple[Compression | None, formats.Format | None]:
        if encoding not in self._looked:
            raw = self._raw(keep=True)
            packed = compression.sniff(read_head(raw, 16))
            raw.close()
            stream = Stream(self._raw(keep=True), packed)
            head = read_head(stream, formats.HEAD)
            whole = len(head) < formats.HEAD
            stream.close()
            if encoding is not None:
                head = head.decode(encoding, "replace").encode("utf-8", "replace")
            self._looked[encoding] = packed, formats.decide(self.name, head, whole=whole)
        return self._looked[encoding]


def find_sources(arguments: Sequence[str | Named]) -> list[Source]:
    """Return the sources that ``arguments`` name, in their order, each file once.

    An argument is a file, a folder, a glob (``**`` goes into folders) or ``-`` for standard input.
    A folder is searched to its depth in the order of names, for files of known suffix; names that
    begin with a dot, the descriptions beside saved data sets, and README.md where tables or JSON
    lie in the folder, are passed over. Raises CorpusError when something is missing, empty, of
    unknown format, or remote.
    """
    found: list[Source] = []
    seen: set[str] = set()
    for argument in arguments:
        if isinstance(argument, Named):
            found.append(Source(argument.path, name=argument.name))
            continue
        if argument == "-":
            paths: list[Path | None] = [None]
        else:
            paths = list(_paths(argument))
        for path in paths:
            identity = "-" if path is None else os.path.realpath(path)
            if identity not in seen:
                seen.add(identity)
                found.append(_source(path))
    return found


def _source(path: Path | None) -> Source:
    if path is None:
        return Source(None, Pipe(None, _STANDARD_INPUT))
    if not stat.S_ISREG(path.stat().st_mode):
        return Source(path, Pipe(path, str(path)))
    source = Source(path)
    if formats.by_suffix(path.name) is None:
        source.format()
    return source


def _paths(argument: str) -> list[Path]:
    if "://" in argument:
        raise CorpusError(
            "remote input is not built in this version.",
            hint="Copy the file here first and name the copy.", where=argument,
        )  # fmt: skip
    path = Path(argument)
    if path.is_dir():
        return _folder(path)
    if path.exists():
        return [path]
    if glob.has_magic(argument):
        return _glob(argument)
    raise _missing(path)


def _glob(pattern: str) -> list[Path]:
    # Path.glob refuses absolute patterns.
    matches = [Path(match) for match in sorted(glob.glob(pattern, recursive=True))]  # noqa: PTH207
    files = [m for m in matches if not m.is_dir() and m.name not in _DESCRIPTIONS]
    if "**" not in pattern:
        files += [path for match in matches if match.is_dir() for path in _folder(match)]
    if not files:
        raise CorpusError("no file matches.", hint="Look at the folder's names.", where=pattern)
    return files


def _folder(folder: Path) -> list[Path]:
    files = sorted(_walk(folder, set()), key=lambda path: path.parts)
    if any(formats.by_suffix(path.name) != "text" for path in files):
        files = [path for path in files if path.name.lower() != "readme.md"]
    if not files:
        raise CorpusError(
            "the folder holds no file that can be read.",
            hint=f"Known: {formats.KNOWN}.", where=str(folder),
        )  # fmt: skip
    return files


def _walk(folder: Path, above: set[str]) -> Iterator[Path]:
    real = os.path.realpath(folder)
    if real in above:
        return
    try:
        entries = sorted(folder.iterdir())
    except OSError as fault:
        raise CorpusError(f"cannot be listed ({fault.strerror}).", where=str(folder)) from fault
    for path in entries:
        if path.name.startswith("."):
            continue
        if path.is_dir():
            yield from _walk(path, above | {real})
        elif path.is_file() and path.name not in _DESCRIPTIONS and formats.by_suffix(path.name):
            yield path


def _missing(path: Path) -> CorpusError:
    if not path.parent.is_dir():
        return CorpusError("there is no such folder.", where=str(path.parent))
    names = [entry.name for entry in path.parent.iterdir()]
    near = difflib.get_close_matches(path.name, sorted(names), n=3)
    hint = f"Near it: {', '.join(near)}." if near else None
    return CorpusError("there is no such file.", hint=hint, where=str(path))


def _unknown_format(name: str) -> CorpusError:
    return CorpusError(
        "the format is unknown.", hint=f"Give it the suffix of what it is: {formats.KNOWN}.",
        where=name,
    )  # fmt: skip


def _readable(path: Path) -> str:
    return os.fsencode(path).decode("utf-8", "replace")
