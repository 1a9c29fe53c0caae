"""`auditor languages`: which languages a vocabulary serves badly, by how much, and why."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from auditor.cli import progress, shared

EXAMPLE = """\b
Examples:
  auditor languages notes.jsonl --vocab my-model/ --by lang
  auditor languages pairs.jsonl --vocab my-model/ --by lang --parallel id --reference en
"""


@click.command("languages", epilog=EXAMPLE, short_help="Compare what languages cost, and why.")
@click.argument("corpus", nargs=-1, required=True)
@click.option(
    "--vocab",
    "vocabularies",
    multiple=True,
    required=True,
    metavar="VOCAB",
    help="Folder, file or hub:ORG/NAME (local cache). Repeatable.",
)
@click.option(
    "--parallel",
    metavar="FIELD",
    help="The field that says which records hold the same content.",
)
@click.option(
    "--reference",
    "references",
    multiple=True,
    metavar="LABEL",
    help="The language to compare with. Repeatable.",
)
@shared.reading
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    metavar="FOLDER",
    help="Where to write [default: reports/<corpus>--<vocabulary>--languages].",
)
@click.option("--overwrite", is_flag=True, help="Replace a folder that holds something else.")
@click.option(
    "--json", "as_json", is_flag=True, help="Print languages.json alone on standard output."
)
@click.option("--quiet", is_flag=True, help="Print nothing but errors.")
def command(
    corpus: tuple[str, ...],
    vocabularies: tuple[str, ...],
    references: tuple[str, ...],
    out: Path | None,
    overwrite: bool,
    as_json: bool,
    quiet: bool,
    **options: Any,  # noqa: ANN401 - the shared options, checked by `plan_of`
) -> None:
    """Compare the languages of CORPUS, which --by FIELD names: cost, room, scripts, labels.

    CORPUS as for assess. With --parallel, translations of the same content are compared pair by
    pair, which is the strongest evidence there is.
    """
    from auditor.cli.printing import print_languages
    from auditor.runs.languages import compare_languages

    plan = shared.plan_of(corpus, vocabularies, graphemes=True, **options)
    shown = progress.for_terminal(quiet=quiet)
    try:
        written = compare_languages(plan, references, out, overwrite=overwrite, progress=shown)
    finally:
        if shown:
            shown.close()
    print_languages(written, as_json=as_json, quiet=quiet)
