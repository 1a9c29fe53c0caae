"""`auditor inspect`: what a vocabulary is made of, and what is wrong with it."""

from __future__ import annotations

from pathlib import Path

import click

EXAMPLE = """\b
Examples:
  auditor inspect my-model/
  auditor inspect my-model/ other/ --model my-model/config.json
"""


@click.command("inspect", epilog=EXAMPLE, short_help="Look into a vocabulary: no corpus needed.")
@click.argument("vocabularies", nargs=-1, required=True, metavar="VOCAB...")
@click.option(
    "--width",
    type=click.IntRange(min=1),
    metavar="N",
    help="Width of the model: parameters of the embedding.",
)
@click.option(
    "--model",
    metavar="SHAPE",
    help="layers=12,width=768,heads=12,inner=3072 or a config.json: the embedding's share, too.",
)
@click.option(
    "--control-strings",
    type=click.Choice(["parse", "text"]),
    default="parse",
    show_default=True,
    help="Text that spells a control token: as the library does, or as text.",
)
@click.option(
    "--pattern",
    type=click.Path(exists=True, dir_okay=False, path_type=Path),
    metavar="FILE",
    help="The splitting pattern of a rank file.",
)
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    metavar="FOLDER",
    help="Where to write [default: reports/<vocabulary>--inspection].",
)
@click.option("--overwrite", is_flag=True, help="Replace a folder that holds something else.")
@click.option(
    "--json", "as_json", is_flag=True, help="Print inspection.json alone on standard output."
)
@click.option("--quiet", is_flag=True, help="Print nothing but errors.")
def command(
    vocabularies: tuple[str, ...],
    width: int | None,
    model: str | None,
    control_strings: str,
    pattern: Path | None,
    out: Path | None,
    overwrite: bool,
    as_json: bool,
    quiet: bool,
) -> None:
    """Look into one vocabulary or several: entries by kind, never produced, files that disagree.

    VOCAB: folder, file or hub:ORG/NAME (local cache). Others are compared with the first.
    """
    from auditor.cli.printing import print_inspection
    from auditor.planning.model import parse_model
    from auditor.runs.inspecting import inspect
    from auditor.vocabulary import VocabularySpec

    if width and model:
        raise click.UsageError("--width and --model both name a width: give one of them.")
    spelled = pattern.read_text(encoding="utf-8") if pattern else None
    specs = [VocabularySpec(name, control_strings, spelled) for name in vocabularies]
    written = inspect(
        specs,
        out,
        width=width,
        shape=parse_model(model) if model else None,
        overwrite=overwrite,
    )
    print_inspection(written, as_json=as_json, quiet=quiet)
