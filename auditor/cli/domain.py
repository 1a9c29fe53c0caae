"""`auditor domain`: does a vocabulary fit a domain, compared with what, and which fits best."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from auditor.cli import progress, shared

EXAMPLE = """\b
Examples:
  auditor domain notes.jsonl --vocab my-model/ --general everyday.txt
  auditor domain notes.jsonl --vocab my-model/ --vocab other/ \\
      --general reports/everyday--my-model/ --weigh tokens=1,losses=20
"""


@click.command("domain", epilog=EXAMPLE, short_help="Vet vocabularies for a new domain.")
@click.argument("corpus", nargs=-1, required=True)
@click.option(
    "--vocab",
    "vocabularies",
    multiple=True,
    required=True,
    metavar="VOCAB",
    help="A candidate: folder, file or hub:ORG/NAME (local cache). Repeatable.",
)
@click.option(
    "--general",
    multiple=True,
    metavar="CORPUS|AUDIT",
    help="General text to compare with, or one audit of it. Repeatable.",
)
@click.option(
    "--general-text",
    metavar="FIELD[,FIELD]",
    help="The text field(s) of the general corpus [default: as --text].",
)
@click.option(
    "--terms",
    type=click.Path(path_type=Path),
    metavar="FILE",
    help="A glossary: one term a line, or CSV with term, variant, weight.",
)
@click.option(
    "--weigh",
    metavar="NAME=N[,NAME=N]",
    help="What the ranking weighs: tokens, losses, terms, parameters"
    " [default: tokens=1,losses=10,terms=1].",
)
@click.option(
    "--width",
    type=click.IntRange(min=1),
    metavar="N",
    help="Width of the model: parameters of its tables.",
)
@click.option(
    "--model",
    metavar="SHAPE",
    help="layers=12,width=768,heads=12,inner=3072 or a config.json: FLOPs a document, too.",
)
@click.option(
    "--seed",
    type=click.IntRange(min=0),
    default=0,
    show_default=True,
    metavar="N",
    help="Draws the words that are tried, and the changes of them.",
)
@shared.reading
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    metavar="FOLDER",
    help="Where to write [default: reports/<corpus>--<vocabulary>--domain].",
)
@click.option("--overwrite", is_flag=True, help="Replace a folder that holds something else.")
@click.option("--no-excerpts", is_flag=True, help="Leave words of the corpus out of the reports.")
@click.option("--json", "as_json", is_flag=True, help="Print domain.json alone on standard output.")
@click.option("--quiet", is_flag=True, help="Print nothing but errors.")
def command(
    corpus: tuple[str, ...],
    vocabularies: tuple[str, ...],
    **options: Any,  # noqa: ANN401 - most are the shared ones, checked by `plan_of`
) -> None:
    """Vet candidate vocabularies for the domain of CORPUS, beside general text.

    CORPUS as for assess. It names what is lost first, then what it costs, which candidate comes
    first by what you weigh, and what would help.
    """
    from auditor.cli.printing import print_domain
    from auditor.planning.model import parse_model
    from auditor.planning.ranking import USUAL, parse_weights
    from auditor.runs.domain import vet_domain
    from auditor.runs.vetted import DomainWishes

    if options["width"] and options["model"]:
        raise click.UsageError("--width and --model both name a width: give one of them.")
    reading = {name: options[name] for name in shared.READING_NAMES}
    plan = shared.plan_of(corpus, vocabularies, excerpts=not options["no_excerpts"], **reading)
    general_text = options["general_text"]
    wishes = DomainWishes(
        general=options["general"],
        general_text=tuple(general_text.split(",")) if general_text else None,
        weights=parse_weights(options["weigh"]) if options["weigh"] else dict(USUAL),
        width=options["width"],
        shape=parse_model(options["model"]) if options["model"] else None,
        terms=options["terms"],
        seed=options["seed"],
    )
    shown = progress.for_terminal(quiet=options["quiet"])
    try:
        written = vet_domain(
            plan, wishes, options["out"], overwrite=options["overwrite"], progress=shown
        )
    finally:
        if shown:
            shown.close()
    print_domain(written, as_json=options["as_json"], quiet=options["quiet"])
