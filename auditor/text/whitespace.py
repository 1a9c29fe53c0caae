"""Runs of whitespace and of zero-width characters, and the kinds they belong to."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np
import numpy.typing as npt
import regex

from auditor.text import properties
from auditor.text.slices import distinct
from auditor.text.words import runs_of

if TYPE_CHECKING:
    from auditor.text.stretch import Stretch

Ints = npt.NDArray[np.int64]
Position = Literal["start", "middle", "end"]

KINDS = (
    "document edge",
    "CRLF",
    "blank line",
    "line end",
    "tab",
    "space run",
    "single space",
    "no-break space",
    "ideographic space",
    "other",
    "zero-width",
)
_POSITIONS: tuple[Position, ...] = ("start", "middle", "end")
_LINE_END = regex.compile(r"\r\n|[\n\r\v\f\x85\u2028\u2029]")
_INNER_KINDS = (
    ("CRLF", regex.compile(r".*\r\n.*", regex.DOTALL)),
    (
        "blank line",
        regex.compile(rf".*(?:{_LINE_END.pattern}).*(?:{_LINE_END.pattern}).*", regex.S),
    ),
    ("line end", regex.compile(rf".*(?:{_LINE_END.pattern}).*", regex.DOTALL)),
    ("tab", regex.compile(r".*\t.*", regex.DOTALL)),
    ("space run", regex.compile(r" {2,}")),
    ("single space", regex.compile(r" ")),
    ("no-break space", regex.compile(r"[\u00a0\u202f\u2007]+")),
    ("ideographic space", regex.compile(r"\u3000+")),
)


@dataclass(frozen=True, slots=True)
class RunForm:
    """One way a run occurs: its characters, and where in a document it stands."""

    text: str
    position: Position

    @property
    def kind(self) -> str:
        """The first kind of FIGURES that fits."""
        if self.text[0] in properties.ZERO_WIDTH:
            return "zero-width"
        if self.position != "middle":
            return "document edge"
        return next((kind for kind, form in _INNER_KINDS if form.fullmatch(self.text)), "other")


@dataclass(frozen=True, slots=True)
class Runs:
    """All runs of a stretch: positions and, for each, the index of its form in ``forms``."""

    starts: Ints
    ends: Ints
    form_of: Ints
    forms: list[RunForm]

    def __len__(self) -> int:
        return len(self.starts)

    @property
    def any_zero_width(self) -> bool:
        """Whether there is a run of zero-width characters."""
        return any(form.text[0] in properties.ZERO_WIDTH for form in self.forms)


def find_runs(stretch: Stretch) -> Runs:
    """Return the maximal runs of whitespace of ``stretch``, then those of zero-width characters."""
    zero_width = properties.zero_width_table()[stretch.points]
    found = [runs_of(stretch.whitespace, stretch.bounds), runs_of(zero_width, stretch.bounds)]
    starts = np.concatenate([run[0] for run in found])
    ends = np.concatenate([run[1] for run in found])
    places = _positions(stretch, starts, ends)
    texts, numbers = _texts(stretch, starts, ends)
    codes = numbers * len(_POSITIONS) + places
    present = np.flatnonzero(np.bincount(codes))
    form_of = np.zeros(present[-1] + 1 if len(present) else 0, dtype=np.int64)
    form_of[present] = np.arange(len(present))
    pairs = (divmod(code, len(_POSITIONS)) for code in present.tolist())
    forms = [RunForm(texts[number], _POSITIONS[place]) for number, place in pairs]
    return Runs(starts, ends, form_of[codes], forms)


def _texts(stretch: Stretch, starts: Ints, ends: Ints) -> tuple[list[str], Ints]:
    """Return the distinct runs, and which of them each run is."""
    numbers = np.empty(len(starts), dtype=np.int64)
    single = ends - starts == 1
    points = stretch.points[starts[single]]
    present = np.flatnonzero(np.bincount(points))
    number_of = np.zeros(present[-1] + 1 if len(present) else 0, dtype=np.int64)
    number_of[present] = np.arange(len(present))
    numbers[single] = number_of[points]
    number, longer = distinct(stretch.points, starts[~single], ends[~single])
    numbers[~single] = number + len(present)
    return [*map(chr, present.tolist()), *longer], numbers


def _positions(stretch: Stretch, starts: Ints, ends: Ints) -> Ints:
    """Return 0 for runs that begin a document, 2 for those that end one, 1 for the others."""
    document = stretch.document_of(starts)
    leads = starts == stretch.bounds[document]
    trails = ends == stretch.bounds[document + 1]
    if stretch.edges is not None:
        leads &= stretch.edges.begins[document]
        trails &= stretch.edges.ends[document]
    return np.where(leads, 0, np.where(trails, 2, 1)).astype(np.int64)
