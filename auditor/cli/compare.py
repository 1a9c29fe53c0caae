"""`auditor compare`: what differs between two audits, by how much and how surely."""

from __future__ import annotations

from pathlib import Path

import click

EXAMPLE = """\b
Examples:
  auditor compare reports/spring/ reports/autumn/
  auditor compare reports/notes/ reports/notes/ --vocab old --vocab-after new
"""


@click.command("compare", epilog=EXAMPLE, short_help="Say what differs between two audits.")
@click.argument("before")
@click.argument("after")
@click.option("--vocab", metavar="NAME", help="The vocabulary to compare [default: all in common].")
@click.option(
    "--vocab-after", metavar="NAME", help="The vocabulary of AFTER, where it is another one."
)
@click.option(
    "--allow-different-settings",
    "different",
    is_flag=True,
    help="Go on where the audits measured in different ways; the report says so.",
)
@click.option("--no-excerpts", is_flag=True, help="Leave the words of the corpora out.")
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    metavar="FOLDER",
    help="Where to write [default: reports/<before>--to--<after>].",
)
@click.option("--overwrite", is_flag=True, help="Replace a folder that holds something else.")
@click.option(
    "--json", "as_json", is_flag=True, help="Print comparison.json alone on standard output."
)
@click.option("--quiet", is_flag=True, help="Print nothing but errors.")
def command(
    before: str,
    after: str,
    vocab: str | None,
    vocab_after: str | None,
    different: bool,
    no_excerpts: bool,
    out: Path | None,
    overwrite: bool,
    as_json: bool,
    quiet: bool,
) -> None:
    """Compare the audits BEFORE and AFTER, each an audit.json or its folder.

    Two corpora under one vocabulary, or one corpus under two. Nothing is measured again.
    """
    from auditor.cli.printing import print_comparison
    from auditor.runs.differences import Wanted, compare_audits

    wanted = Wanted(vocab, vocab_after, different, not no_excerpts)
    written = compare_audits(before, after, wanted, out, overwrite=overwrite)
    print_comparison(written, as_json=as_json, quiet=quiet)
