"""`auditor assess`: the main job."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from auditor.cli import progress, shared

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
    "--origin",
    metavar="FIELD",
    help="What documents were drawn from together; intervals are over it.",
)
@shared.reading
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
@click.option(
    "--whole", is_flag=True, help="Encode every document whole: slower, the same figures."
)
@shared.bounds
@click.option("--json", "as_json", is_flag=True, help="Print audit.json alone on standard output.")
@click.option("--quiet", is_flag=True, help="Print nothing but errors.")
def command(
    corpus: tuple[str, ...],
    vocabularies: tuple[str, ...],
    out: Path | None,
    overwrite: bool,
    no_excerpts: bool,
    policy: Path | None,
    undecided: str,
    as_json: bool,
    quiet: bool,
    **options: Any,  # noqa: ANN401 - the shared options, checked by `plan_of`
) -> int:
    """Measure CORPUS against one vocabulary or several, and write the whole audit.

    CORPUS: files, folders, globs, or - for standard input. Text, JSON lines, JSON, CSV, TSV,
    Parquet, Arrow; each also .gz .zst .bz2 .xz.

    With --policy the exit code is 1 when a bound is not met.
    """
    from auditor.cli.printing import print_audit
    from auditor.policy import read_policy
    from auditor.runs.auditing import assess

    bounds = read_policy(policy) if policy else None
    plan = shared.plan_of(corpus, vocabularies, excerpts=not no_excerpts, **options)
    shown = progress.for_terminal(quiet=quiet)
    try:
        written = assess(plan, out, overwrite=overwrite, progress=shown, policy=bounds)
    finally:
        if shown:
            shown.close()
    print_audit(written, as_json=as_json, quiet=quiet)
    return shared.policy_code(written.verdicts, undecided)
