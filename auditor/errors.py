"""The one tree of errors: what happened, where, and what to do next."""

from __future__ import annotations


class AuditError(Exception):
    """Something the user can mend.

    ``message`` says what happened in one sentence, ``where`` names the place (file, file:line,
    option) and ``hint`` the remedy.
    """

    def __init__(self, message: str, *, hint: str | None = None, where: str | None = None) -> None:
        super().__init__(message, hint, where)
        self.message = message
        self.hint = hint
        self.where = where

    def __str__(self) -> str:
        place = f"{self.where}: " if self.where else ""
        remedy = f" {self.hint}" if self.hint else ""
        return f"{place}{self.message}{remedy}"

    def __reduce__(self) -> tuple[object, ...]:
        return _rebuild, (type(self), self.message, self.hint, self.where)


def _rebuild(
    kind: type[AuditError], message: str, hint: str | None, where: str | None
) -> AuditError:
    return kind(message, hint=hint, where=where)


class CorpusError(AuditError):
    """The corpus cannot be found, read or understood."""


class GlossaryError(AuditError):
    """A glossary cannot be read, or contradicts itself."""


class VocabularyError(AuditError):
    """A vocabulary cannot be found, opened or trusted."""


class SettingsError(AuditError):
    """Options that contradict each other or the input."""


class OutputError(AuditError):
    """The audit cannot be written where it was asked to be."""


class MergeError(AuditError):
    """Two tallies or audits that were made with different settings."""
