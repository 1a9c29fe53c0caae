"""Bounds on the figures of an audit, and whether they hold; knows audits only by their JSON."""

from auditor.policy.reading import (
    Bound,
    Policy,
    read_policy,
    refuse_unknown_fields,
    refuse_unknown_vocabularies,
)
from auditor.policy.verdicts import judge

__all__ = [
    "Bound",
    "Policy",
    "judge",
    "read_policy",
    "refuse_unknown_fields",
    "refuse_unknown_vocabularies",
]
