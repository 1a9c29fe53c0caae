"""`auditor plan-length`: which maximum length, what it cuts, wastes and costs."""

from __future__ import annotations

from fractions import Fraction
from pathlib import Path
from typing import Any

import click
from click.core import ParameterSource

from auditor.cli import progress, shared

EXAMPLE = """\b
Examples:
  auditor plan-length notes.jsonl --vocab my-model/ --by lang
  auditor plan-length reports/notes--my-model/ --accept-truncated 0.5%
"""


@click.command("plan-length", epilog=EXAMPLE, short_help="Pick a maximum length; form batches.")
@click.argument("corpus", nargs=-1, required=True, metavar="CORPUS|AUDIT...")
@click.option(
    "--vocab",
    "vocabulary",
    metavar="VOCAB",
    help="Folder, file or hub:ORG/NAME (local cache); with an audit, the name of one of its own.",
)
@click.option(
    "--candidates",
    metavar="N[,N...]",
    help="Lengths to weigh [default: found from the documents, up to the limit].",
)
@click.option(
    "--accept-truncated",
    "accepted",
    default="1%",
    show_default=True,
    metavar="SHARE",
    help="The share of documents that may be cut.",
)
@click.option(
    "--batch",
    type=click.IntRange(min=1),
    default=32,
    show_default=True,
    metavar="N",
    help="Documents in a batch.",
)
@click.option(
    "--overlap",
    type=click.IntRange(min=0),
    metavar="N",
    help="Tokens that two windows share [default: an eighth of the room].",
)
@click.option(
    "--pair",
    metavar="FIELD",
    help="The second text of two-part inputs; --text names the first.",
)
@click.option(
    "--model",
    metavar="SHAPE",
    help="layers=12,width=768,heads=12,inner=3072 or a config.json: costs in FLOPs and bytes.",
)
@click.option(
    "--precision",
    type=click.Choice(["float32", "float16", "bfloat16"]),
    default="bfloat16",
    show_default=True,
    help="Format of activations.",
)
@shared.reading
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    metavar="FOLDER",
    help="Where to write [default: reports/<corpus>--<vocabulary>--length-plan].",
)
@click.option("--overwrite", is_flag=True, help="Replace a folder that holds something else.")
@click.option("--json", "as_json", is_flag=True, help="Print plan.json alone on standard output.")
@click.option("--quiet", is_flag=True, help="Print nothing but errors.")
def command(
    corpus: tuple[str, ...],
    vocabulary: str | None,
    **options: Any,  # noqa: ANN401 - most are the shared ones, checked by `plan_of`
) -> None:
    """Weigh maximum lengths for CORPUS, or for the AUDIT of one, and recommend one.

    CORPUS as for assess. AUDIT: an audit.json or its folder; then nothing is read again, and what
    needs the texts (words and sentences cut, pairs) is left out.
    """
    from auditor.cli.printing import print_plan
    from auditor.planning.model import parse_model
    from auditor.planning.plan import Wishes
    from auditor.runs.audits import audit_at
    from auditor.runs.lengths import plan_from_audit, plan_from_corpus

    wishes = Wishes(
        lengths=_lengths(options["candidates"]),
        accepted=_share(options["accepted"]),
        batch=options["batch"],
        overlap=options["overlap"],
        model=parse_model(options["model"]) if options["model"] else None,
        precision=options["precision"],
    )
    where: dict[str, Any] = {"out": options["out"], "overwrite": options["overwrite"]}
    audit = audit_at(corpus[0]) if len(corpus) == 1 else None
    if audit is not None:
        _refuse_reading()
        written = plan_from_audit(
            audit, wishes, vocabulary=vocabulary, limit=options["limit"], **where
        )
    else:
        if vocabulary is None:
            raise click.UsageError("Missing option '--vocab': a corpus needs a vocabulary.")
        reading = {name: options[name] for name in (*shared.READING_NAMES, "pair")}
        plan = shared.plan_of(corpus, (vocabulary,), **reading)
        shown = progress.for_terminal(quiet=options["quiet"])
        try:
            written = plan_from_corpus(plan, wishes, progress=shown, **where)
        finally:
            if shown:
                shown.close()
    print_plan(written, as_json=options["as_json"], quiet=options["quiet"])


def _lengths(text: str | None) -> tuple[int, ...]:
    if text is None:
        return ()
    parts = [part.strip() for part in text.split(",")]
    if not all(part.isdigit() and int(part) for part in parts):
        raise click.BadParameter(f"{text!r} is no list of lengths such as 256,512.")
    return tuple(sorted({int(part) for part in parts}))


def _share(text: str) -> Fraction:
    """Return a share written as 1% or 0.01, exactly."""
    try:
        percent = text.endswith("%")
        return Fraction(text.rstrip("% ")) / (100 if percent else 1)
    except (ValueError, ZeroDivisionError):
        raise click.BadParameter(f"{text!r} is no share such as 1% or 0.01.") from None


def _refuse_reading() -> None:
    """Refuse options that ask for the texts, which an audit does not hold."""
    context = click.get_current_context()
    given = ParameterSource.COMMANDLINE
    for name in (*shared.READING_NAMES, "pair"):
        if name != "limit" and context.get_parameter_source(name) is given:
            option = f"--{name.replace('_', '-')}"
            raise click.UsageError(f"{option} needs the corpus: an audit holds no texts.")
