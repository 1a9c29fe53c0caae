"""The command line: one file a command; each parses, makes one call of the library and prints."""

from __future__ import annotations

from auditor.cli.root import main

__all__ = ["main"]
