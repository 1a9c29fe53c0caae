"""What a command prints when it is done."""

from __future__ import annotations

import os
import sys
from typing import TYPE_CHECKING, Any

import click

from auditor.report import contract

if TYPE_CHECKING:
    from auditor.runs.auditing import Written
    from auditor.runs.differences import WrittenComparison
    from auditor.runs.domain import WrittenDomain
    from auditor.runs.inspecting import WrittenInspection
    from auditor.runs.languages import WrittenLanguages
    from auditor.runs.lengths import WrittenPlan

WIDTH = 80


def print_audit(written: Written, *, as_json: bool, quiet: bool) -> None:
    """Print the audit: the machine form alone, nothing, or the summary for a person."""
    if as_json:
        click.echo(contract.dump(written.audit).decode(), nl=False)
    if written.verdicts is not None and (as_json or quiet):
        print_verdicts(written.verdicts, as_json=False, quiet=quiet, beside=True)
    elif not (as_json or quiet):
        from auditor.report import terminal

        summary = terminal.summary(
            written.audit,
            files=written.files,
            worst=written.worst_words,
            policy=written.verdicts,
            width=_width(),
            colour=_colour(),
        )
        click.echo(summary, nl=False)


def print_verdicts(
    verdicts: dict[str, Any], *, as_json: bool, quiet: bool, beside: bool = False
) -> None:
    """Print the verdicts of a policy: the machine form, or what a person reads.

    ``beside`` sends them to standard error, as `audit.json` has standard output; ``quiet`` leaves
    nothing but failed bounds, which go to standard error too.
    """
    from auditor.report import policy_terminal, terminal

    if as_json:
        click.echo(contract.dump(verdicts).decode(), nl=False)
        return
    if quiet and verdicts["outcome"] != "fail":
        return
    shown = policy_terminal.failures(verdicts) if quiet else policy_terminal.parts(verdicts)
    beside = beside or quiet
    told = terminal.rendered(shown, width=_width(), colour=_colour() and not beside)
    click.echo(told, nl=False, err=beside)


def print_plan(written: WrittenPlan, *, as_json: bool, quiet: bool) -> None:
    """Print the plan: the machine form alone, nothing, or the summary for a person."""
    if as_json:
        click.echo(contract.dump(written.plan).decode(), nl=False)
    elif not quiet:
        from auditor.report import plan_terminal

        summary = plan_terminal.summary(
            written.plan, files=written.files, width=_width(), colour=_colour()
        )
        click.echo(summary, nl=False)


def print_languages(written: WrittenLanguages, *, as_json: bool, quiet: bool) -> None:
    """Print the comparison: the machine form alone, nothing, or the summary for a person."""
    if as_json:
        click.echo(contract.dump(written.document).decode(), nl=False)
    elif not quiet:
        from auditor.report import language_terminal

        summary = language_terminal.summary(
            written.document, files=written.files, width=_width(), colour=_colour()
        )
        click.echo(summary, nl=False)


def print_domain(written: WrittenDomain, *, as_json: bool, quiet: bool) -> None:
    """Print the vetting: the machine form alone, nothing, or the summary for a person."""
    if as_json:
        click.echo(contract.dump(written.document).decode(), nl=False)
    elif not quiet:
        from auditor.report import domain_terminal

        summary = domain_terminal.summary(
            written.document, files=written.files, width=_width(), colour=_colour()
        )
        click.echo(summary, nl=False)


def print_inspection(written: WrittenInspection, *, as_json: bool, quiet: bool) -> None:
    """Print the inspection: the machine form alone, nothing, or the summary for a person."""
    if as_json:
        click.echo(contract.dump(written.document).decode(), nl=False)
    elif not quiet:
        from auditor.report import inspection_terminal

        summary = inspection_terminal.summary(
            written.document, files=written.files, width=_width(), colour=_colour()
        )
        click.echo(summary, nl=False)


def print_comparison(written: WrittenComparison, *, as_json: bool, quiet: bool) -> None:
    """Print the comparison: the machine form alone, nothing, or the summary for a person."""
    if as_json:
        click.echo(contract.dump(written.document).decode(), nl=False)
    elif not quiet:
        from auditor.report import comparison_terminal

        summary = comparison_terminal.summary(
            written.document, files=written.files, width=_width(), colour=_colour()
        )
        click.echo(summary, nl=False)


def _width() -> int:
    return min(WIDTH, os.get_terminal_size().columns) if sys.stdout.isatty() else WIDTH


def _colour() -> bool:
    return sys.stdout.isatty() and "NO_COLOR" not in os.environ
