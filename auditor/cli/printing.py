"""What a command prints when it is done."""

from __future__ import annotations

import os
import sys

import click

from auditor.report import contract, terminal
from auditor.runs.auditing import Written

WIDTH = 80


def print_audit(written: Written, *, as_json: bool, quiet: bool) -> None:
    """Print the audit: the machine form alone, nothing, or the summary for a person."""
    if as_json:
        click.echo(contract.dump(written.audit).decode(), nl=False)
    elif not quiet:
        colour = sys.stdout.isatty() and "NO_COLOR" not in os.environ
        width = min(WIDTH, os.get_terminal_size().columns) if sys.stdout.isatty() else WIDTH
        summary = terminal.summary(
            written.audit,
            files=written.files,
            worst=written.worst_words,
            width=width,
            colour=colour,
        )
        click.echo(summary, nl=False)
