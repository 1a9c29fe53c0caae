"""Audit a text corpus against a subword vocabulary, before any compute is paid for.

>>> import auditor
>>> audit = auditor.assess("notes.jsonl", "my-model/", by="lang")
>>> audit.figures, audit.words, auditor.plan_length(audit).length
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from auditor.api.calls import Reading, assess, compare, domain, inspect, languages, plan_length
    from auditor.errors import AuditError

# Name → the module that holds it: imported when it is asked for, so that the command line's help
# stays quick.
_HOMES = {
    "AuditError": "auditor.errors",
    "Reading": "auditor.api.calls",
    "assess": "auditor.api.calls",
    "compare": "auditor.api.calls",
    "domain": "auditor.api.calls",
    "inspect": "auditor.api.calls",
    "languages": "auditor.api.calls",
    "plan_length": "auditor.api.calls",
}

__all__ = [
    "AuditError",
    "Reading",
    "assess",
    "compare",
    "domain",
    "inspect",
    "languages",
    "plan_length",
]


def __getattr__(name: str) -> Any:  # noqa: ANN401 - functions and classes alike
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    found = getattr(importlib.import_module(_HOMES[name]), name)
    globals()[name] = found
    return found


def __dir__() -> list[str]:
    return sorted({*globals(), *_HOMES})
