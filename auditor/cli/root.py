"""The command `auditor`: its sub-commands are imported only when they are asked for."""

from __future__ import annotations

import importlib
import sys
from typing import Any

import click

from auditor.errors import AuditError

# Name → module; the module holds a click command called `command`.
_COMMANDS = {
    "assess": "auditor.cli.assess",
    "check": "auditor.cli.check",
    "compare": "auditor.cli.compare",
    "domain": "auditor.cli.domain",
    "inspect": "auditor.cli.inspect",
    "languages": "auditor.cli.languages",
    "plan-length": "auditor.cli.plan_length",
}

BAD_INPUT = 2
INTERNAL_FAULT = 3


class LazyGroup(click.Group):
    """A group that imports a sub-command when it is called: help stays quick."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Return the names of the sub-commands."""
        del ctx
        return sorted(_COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """Return the sub-command of that name."""
        del ctx
        if cmd_name not in _COMMANDS:
            return None
        command: click.Command = importlib.import_module(_COMMANDS[cmd_name]).command
        return command


def _show_versions(ctx: click.Context, _: click.Parameter, asked: bool) -> None:
    if not asked or ctx.resilient_parsing:
        return
    from auditor.report.contract import made_with

    for name, version in made_with().items():
        click.echo(f"{name} {version}")
    ctx.exit()


@click.group(
    cls=LazyGroup,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 80},
)
@click.option(
    "--version",
    is_flag=True,
    is_eager=True,
    expose_value=False,
    callback=_show_versions,
    help="Show the versions that a figure depends on, and exit.",
)
def root() -> None:
    """Audit a text corpus against a subword vocabulary, before any compute is paid for."""


def main(arguments: list[str] | None = None) -> None:
    """Run the command line and exit: 0 done, 1 a policy is not met, 2 bad input, 3 a fault."""
    sys.exit(_run(arguments))


def _run(arguments: list[str] | None) -> int:
    try:
        result: Any = root.main(args=arguments, prog_name="auditor", standalone_mode=False)
    except click.exceptions.Abort:
        click.echo("Interrupted; nothing was written.", err=True)
        return BAD_INPUT
    except click.ClickException as fault:
        fault.show()
        return BAD_INPUT
    except AuditError as fault:
        click.echo(_explained(fault), err=True)
        return BAD_INPUT
    except Exception as fault:
        import traceback

        traceback.print_exc()
        click.echo(f"A fault of the tool itself, not of your input: {fault!r}.", err=True)
        return INTERNAL_FAULT
    return result if isinstance(result, int) else 0


def _explained(fault: AuditError) -> str:
    lines = [f"Error: {fault.where}: {fault.message}" if fault.where else f"Error: {fault.message}"]
    told = [*lines, f"  {fault.hint}"] if fault.hint else lines
    return "\n".join("\n".join(map(_printable, text.split("\n"))) for text in told)


def _printable(line: str) -> str:
    """Return a line without what could move the cursor: messages quote files and their text."""
    if line.isprintable():
        return line
    from auditor.report.tables import printable

    return printable(line)
