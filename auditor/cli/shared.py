"""Options that several commands share, and the plan they make."""

from __future__ import annotations

from collections.abc import Callable
from functools import reduce
from pathlib import Path
from typing import TYPE_CHECKING, Any, cast

import click

if TYPE_CHECKING:
    from auditor.corpus.options import Unit
    from auditor.runs.plan import Plan

Command = Callable[..., Any]

# What a corpus is read with.
_READING = (
    click.option(
        "--text", metavar="FIELD[,FIELD]",
        help="The field(s) that hold the text; several are joined.",
    ),
    click.option(
        "--by", multiple=True, metavar="FIELD",
        help="Measure each value of this field apart. Repeatable.",
    ),
    click.option(
        "--limit", type=click.IntRange(min=1), metavar="N",
        help="Positions the model takes, template included [default: as its files declare].",
    ),
    click.option(
        "--unit", type=click.Choice(["record", "line", "paragraph", "file"]), default="record",
        show_default=True, help="What one document is, in plain text.",
    ),
    click.option(
        "--words", type=click.Choice(["icu", "whitespace"]), default="icu", show_default=True,
        help="Words by UAX #29 with dictionaries, or by whitespace.",
    ),
    click.option(
        "--control-strings", type=click.Choice(["parse", "text"]), default="parse",
        show_default=True,
        help="Text that spells a control token: as the library does, or as text.",
    ),
    click.option(
        "--pattern", type=click.Path(exists=True, dir_okay=False, path_type=Path), metavar="FILE",
        help="The splitting pattern of a rank file.",
    ),
    click.option("--encoding", metavar="NAME", help="Encoding of the files [default: UTF-8]."),
    click.option(
        "--strict", is_flag=True, help="End at the first damaged record, with its place."
    ),
    click.option(
        "--workers", type=click.IntRange(min=0), default=0, metavar="N",
        help="Processes [default: one a core for large corpora]; never changes a figure.",
    ),
    click.option(
        "--batch-bytes", type=click.IntRange(min=1), default=1 << 21, show_default=True,
        metavar="N", help="Text measured at a time; never changes a figure.",
    ),
)  # fmt: skip

_BOUNDS = (
    click.option(
        "--policy", type=click.Path(exists=True, dir_okay=False, path_type=Path), metavar="FILE",
        help="Bounds that the figures must keep to (TOML).",
    ),
    click.option(
        "--undecided", type=click.Choice(["pass", "fail"]), default="pass", show_default=True,
        help="What a bound that cannot be decided counts as.",
    ),
)  # fmt: skip
POLICY_NOT_MET = 1

READING_NAMES = (
    "text", "by", "limit", "unit", "words", "control_strings", "pattern", "encoding", "strict",
    "workers", "batch_bytes",
)  # fmt: skip


def reading(command: Command) -> Command:
    """Add the options of reading a corpus to ``command``."""
    return reduce(lambda made, option: option(made), reversed(_READING), command)


def bounds(command: Command) -> Command:
    """Add the options of a policy to ``command``."""
    return reduce(lambda made, option: option(made), reversed(_BOUNDS), command)


def policy_code(verdicts: dict[str, Any] | None, undecided: str) -> int:
    """Return the exit code of a policy's verdicts: 1 when a bound is not met."""
    outcome = "pass" if verdicts is None else verdicts["outcome"]
    not_met = outcome == "fail" or (outcome == "undecided" and undecided == "fail")
    return POLICY_NOT_MET if not_met else 0


def plan_of(
    corpus: tuple[str, ...],
    vocabularies: tuple[str, ...],
    *,
    text: str | None,
    by: tuple[str, ...],
    limit: int | None,
    unit: str,
    words: str,
    control_strings: str,
    pattern: Path | None,
    encoding: str | None,
    strict: bool,
    workers: int,
    batch_bytes: int,
    origin: str | None = None,
    pair: str | None = None,
    parallel: str | None = None,
    **more: bool,
) -> Plan:
    """Return the plan of a run from the options of ``reading`` and settings of its own."""
    from auditor.corpus import ReadOptions
    from auditor.runs.plan import Plan
    from auditor.vocabulary import VocabularySpec

    spelled = pattern.read_text(encoding="utf-8") if pattern else None
    specs = tuple(VocabularySpec(name, control_strings, spelled, limit) for name in vocabularies)
    options = ReadOptions(
        text=tuple(text.split(",")) if text else (), by=by, origin=origin, pair=pair,
        parallel=parallel, unit=cast("Unit", unit), encoding=encoding, batch_bytes=batch_bytes,
        strict=strict,
    )  # fmt: skip
    return Plan(corpus, specs, options, words=words, workers=workers, **more)
