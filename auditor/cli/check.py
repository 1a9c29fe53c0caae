"""`auditor check`: whether an earlier audit keeps to a policy."""

from __future__ import annotations

from pathlib import Path

import click

from auditor.cli import shared

EXAMPLE = """\b
Example:
  auditor check reports/notes--my-model/ --policy limits.toml
"""


@click.command("check", epilog=EXAMPLE, short_help="Hold an earlier audit against a policy.")
@click.argument("audit")
@shared.bounds
@click.option("--json", "as_json", is_flag=True, help="Print policy.json alone on standard output.")
@click.option("--quiet", is_flag=True, help="Print nothing but errors and bounds that fail.")
def command(audit: str, policy: Path | None, undecided: str, as_json: bool, quiet: bool) -> int:
    """Say whether the figures of AUDIT, an audit.json or its folder, keep to a policy.

    Nothing is measured or written. The exit code is 1 when a bound is not met.
    """
    from auditor.cli.printing import print_verdicts
    from auditor.policy import judge, read_policy
    from auditor.runs.audits import demanded_audit

    if policy is None:
        raise click.UsageError("Missing option '--policy': what is the audit held against?")
    bounds = read_policy(policy)
    verdicts = judge(bounds, demanded_audit(audit).document)
    print_verdicts(verdicts, as_json=as_json, quiet=quiet)
    return shared.policy_code(verdicts, undecided)
