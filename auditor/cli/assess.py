"""`auditor assess`: the main job."""

from __future__ import annotations

from pathlib import Path
from typing import cast

import click

from auditor.cli import progress

EXAMPLE = """\b
Example:
  auditor assess notes.jsonl --vocab my-model/ --by lang --limit 512
"""


@click.command("assess", epilog=EXAMPLE, short_help="Measure a corpus; write the whole audit.")
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
    "--text", metavar="FIELD[,FIELD]", help="The field(s) that hold the text; several are joined."
)
@click.option(
    "--by",
    multiple=True,
    metavar="FIELD",
    help="Measure each value of this field apart. Repeatable.",
)
@click.option(
    "--limit",
    type=click.IntRange(min=1),
    metavar="N",
    help="Positions the model takes, template included [default: as its files declare].",
)
@click.option(
    "--unit",
    type=click.Choice(["record", "line", "paragraph", "file"]),
    default="record",
    show_default=True,
    help="What one document is, in plain text.",
)
@click.option(
    "--words",
    type=click.Choice(["icu", "whitespace"]),
    default="icu",
    show_default=True,
    help="Words by UAX #29 with dictionaries, or by whitespace.",
)
@click.option(
    "--control-strings",
    type=click.Choice(["parse", "text"]),
    default="parse",
    show_default=True,
    help="Text that spells a control token: as the library does, or as text.",
)
@click.option(
    "--origin",
    metavar="FIELD",
    help="What documents were drawn from together; intervals are over it.",
)
@click.option(
    "--pattern",
    type=click.Path(exists=True, dir_okay=False, path_type=Path),
    metavar="FILE",
    help="The splitting pattern of a rank file.",
)
@click.option("--encoding", metavar="NAME", help="Encoding of the files [default: UTF-8].")
@click.option("--graphemes", is_flag=True, help="Count grapheme clusters too.")
@click.option(
    "--repeats", is_flag=True, help="Count repeated documents (16 bytes of memory for each)."
)
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    metavar="FOLDER",
    help="Where to write [default: reports/<corpus>--<vocabulary>].",
)
@click.option("--overwrite", is_flag=True, help="Replace a folder that holds something else.")
@click.option(
    "--no-excerpts", is_flag=True, help="Leave the words of the corpus out of what is written."
)
@click.option("--strict", is_flag=True, help="End at the first damaged record, with its place.")
@click.option(
    "--workers",
    type=click.IntRange(min=0),
    default=0,
    metavar="N",
    help="Processes [default: one a core for large corpora]; never changes a figure.",
)
@click.option(
    "--batch-bytes",
    type=click.IntRange(min=1),
    default=1 << 19,
    show_default=True,
    metavar="N",
    help="Text measured at a time; never changes a figure.",
)
@click.option(
    "--whole", is_flag=True, help="Encode every document whole: slower, the same figures."
)
@click.option("--json", "as_json", is_flag=True, help="Print audit.json alone on standard output.")
@click.option("--quiet", is_flag=True, help="Print nothing but errors.")
def command(
    corpus: tuple[str, ...],
    vocabularies: tuple[str, ...],
    text: str | None,
    by: tuple[str, ...],
    limit: int | None,
    unit: str,
    words: str,
    control_strings: str,
    origin: str | None,
    pattern: Path | None,
    encoding: str | None,
    graphemes: bool,
    repeats: bool,
    out: Path | None,
    overwrite: bool,
    no_excerpts: bool,
    strict: bool,
    workers: int,
    batch_bytes: int,
    as_json: bool,
    quiet: bool,
    whole: bool,
) -> None:
    """Measure CORPUS against one vocabulary or several, and write the whole audit.

    CORPUS: files, folders, globs, or - for standard input. Text, JSON lines, JSON, CSV, TSV,
    Parquet, Arrow; each also .gz .zst .bz2 .xz.
    """
    from auditor.cli.printing import print_audit
    from auditor.corpus import ReadOptions
    from auditor.corpus.options import Unit
    from auditor.runs.auditing import assess
    from auditor.runs.plan import Plan
    from auditor.vocabulary import VocabularySpec

    spelled = pattern.read_text(encoding="utf-8") if pattern else None
    specs = tuple(VocabularySpec(name, control_strings, spelled, limit) for name in vocabularies)
    options = ReadOptions(
        text=tuple(text.split(",")) if text else (), by=by, origin=origin, unit=cast("Unit", unit),
        encoding=encoding, batch_bytes=batch_bytes, strict=strict,
    )  # fmt: skip
    plan = Plan(
        corpus, specs, options, words=words, graphemes=graphemes, repeats=repeats,
        excerpts=not no_excerpts, workers=workers, whole=whole,
    )  # fmt: skip
    shown = progress.for_terminal(quiet=quiet)
    try:
        written = assess(plan, out, overwrite=overwrite, progress=shown)
    finally:
        if shown:
            shown.close()
    print_audit(written, as_json=as_json, quiet=quiet)
