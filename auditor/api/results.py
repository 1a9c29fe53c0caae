"""What the public functions return: documents, data frames and pages of a finished run."""

from __future__ import annotations

import shutil
import weakref
from abc import ABC, abstractmethod
from collections.abc import Iterable
from functools import cached_property
from pathlib import Path
from typing import Any

import pandas as pd
from markupsafe import escape

from auditor.errors import OutputError
from auditor.report import (
    answers,
    comparison_answers,
    comparison_tables,
    contract,
    domain_tables,
    language_tables,
    plan_tables,
    tables,
)
from auditor.report.questions import QUESTIONS
from auditor.runs.audits import Audit

Json = dict[str, Any]

_SHOWN = ("fertility", "continued_words", "bytes_per_token", "unknown_words",
          "byte_spelled_characters", "dropped_characters", "truncated_documents",
          "lossless_documents")  # fmt: skip
# Columns of CSV files that hold text; whatever they hold, it is no missing value.
_TEXT = dict.fromkeys(
    (
        "vocabulary", "word", "broken", "entry", "text", "becomes", "character", "code_point",
        "name", "script", "fate", "first_source",
    ),
    str,
)  # fmt: skip


class Result(ABC):
    """A finished run: ``document`` is what its JSON file holds, ``folder`` where its files lie.

    The folder is temporary, and lives as long as the result, unless the run was given another;
    `save` keeps a copy.
    """

    def __init__(self, document: Json, folder: Path, held: Path | None) -> None:
        self.document = document
        self.folder = folder
        if held is not None:
            weakref.finalize(self, shutil.rmtree, held, ignore_errors=True)

    def to_json(self) -> str:
        """Return the JSON file's text."""
        return contract.dump(self.document).decode()

    def to_html(self) -> str:
        """Return the page, a whole file of HTML that needs no other."""
        return (self.folder / "report.html").read_text(encoding="utf-8")

    def save(self, folder: str | Path) -> Path:
        """Copy everything that was written into ``folder``, which must not exist yet."""
        target = Path(folder)
        if target.exists():
            raise OutputError(
                "the folder exists.", hint="Name one that does not.", where=str(target)
            )
        return Path(shutil.copytree(self.folder, target))

    def _repr_html_(self) -> str:
        """Return what a notebook shows: sentences and a table, all of it escaped."""
        told = "".join(f"<li>{escape(sentence)}</li>" for sentence in self._sentences())
        return f"<ul>{told}</ul>{self._shown().to_html(index=False, na_rep='–')}"

    @abstractmethod
    def _sentences(self) -> Iterable[str]:
        """Return what there is to say, most important first."""

    @abstractmethod
    def _shown(self) -> pd.DataFrame:
        """Return the main figures."""


class AuditResult(Result):
    """An audit; may be handed to `plan_length` and, as general text, to `domain`.

    ``verdicts`` is the document of `policy.json`, ``None`` without a policy.
    """

    def __init__(
        self, document: Json, folder: Path, held: Path | None, verdicts: Json | None = None
    ) -> None:
        super().__init__(document, folder, held)
        self.verdicts = verdicts

    @cached_property
    def figures(self) -> pd.DataFrame:
        """One row a vocabulary, slice and figure, as in `figures.csv`."""
        return tables.figures(self.document).infer_objects()

    @cached_property
    def lengths(self) -> pd.DataFrame:
        """The exact histogram: one row a vocabulary, slice and length, as in `lengths.csv`."""
        return tables.lengths(self.document).infer_objects()

    @cached_property
    def words(self) -> pd.DataFrame:
        """The words that cost most, and those lost most often, as in `words.csv`."""
        return _read(self.folder / "words.csv")

    @cached_property
    def characters(self) -> pd.DataFrame:
        """Every character that did not come through whole, as in `characters.csv`."""
        return _read(self.folder / "characters.csv")

    @cached_property
    def documents(self) -> pd.DataFrame:
        """One row a document, as in `documents.parquet`."""
        return pd.read_parquet(self.folder / "documents.parquet")

    def as_audit(self) -> Audit:
        """Return the audit as a run that goes on from it takes it."""
        return Audit(self.document, self.folder / "audit.json")

    def _sentences(self) -> Iterable[str]:
        audit = self.document
        for own in audit["vocabularies"]:
            yield f"{own['name']}: {answers.headline(own)}."
            for question in QUESTIONS:
                if question.key not in {"slices", "aside"}:
                    yield "".join(question.answer(own, audit)[0])
        yield from ("".join(sentence) for sentence in answers.set_aside(audit["corpus"]))

    def _shown(self) -> pd.DataFrame:
        figures = self.figures
        whole = figures[(figures["slice"] == "all") & figures["figure"].isin(_SHOWN)]
        return whole.drop(columns=["slice"])


class PlanResult(Result):
    """A length plan."""

    @cached_property
    def candidates(self) -> pd.DataFrame:
        """One row a length and slice, as in `plan.csv`."""
        return plan_tables.candidates(self.document).infer_objects()

    @property
    def length(self) -> int:
        """The maximum length that is recommended."""
        return int(self.document["recommended"]["length"])

    def _sentences(self) -> Iterable[str]:
        yield from self.document["recommended"]["because"]

    def _shown(self) -> pd.DataFrame:
        return self.candidates


class LanguagesResult(Result):
    """A comparison of languages."""

    @cached_property
    def languages(self) -> pd.DataFrame:
        """One row a vocabulary, language and figure, as in `languages.csv`."""
        return language_tables.languages(self.document).infer_objects()

    @cached_property
    def scripts(self) -> pd.DataFrame:
        """One row a vocabulary, language and script, as in `scripts.csv`."""
        return language_tables.scripts(self.document).infer_objects()

    def _sentences(self) -> Iterable[str]:
        for own in self.document["vocabularies"]:
            yield from own["answers"]

    def _shown(self) -> pd.DataFrame:
        figures = self.languages
        return figures[figures["figure"].isin(["fertility", "ratio_of_totals"])]


class InspectionResult(Result):
    """Vocabularies looked into."""

    @cached_property
    def entries(self) -> pd.DataFrame:
        """One row a vocabulary and entry, as in `entries.csv`."""
        return _read(self.folder / "entries.csv")

    @cached_property
    def unreachable(self) -> pd.DataFrame:
        """The entries that are never produced, as in `unreachable.csv`."""
        return _read(self.folder / "unreachable.csv")

    def _sentences(self) -> Iterable[str]:
        for own in self.document["vocabularies"]:
            yield f"{own['name']}: {answers.headline(own)}."
            yield from own["answers"]

    def _shown(self) -> pd.DataFrame:
        rows = (
            (own["name"], kind, number)
            for own in self.document["vocabularies"]
            for kind, number in own["kinds"].items()
        )
        return tables.frame(("vocabulary", "kind", "entries"), rows)


class ComparisonResult(Result):
    """Two audits compared."""

    @cached_property
    def differences(self) -> pd.DataFrame:
        """One row a figure of a slice, as in `differences.csv`."""
        return comparison_tables.differences(self.document).infer_objects()

    def _sentences(self) -> Iterable[str]:
        yield from ("".join(sentence) for sentence in comparison_answers.counted(self.document))
        yield from comparison_answers.notes(self.document)

    def _shown(self) -> pd.DataFrame:
        found = self.differences
        return found[(found["slice"] == "all") & found["figure"].isin(_SHOWN)]


class DomainResult(Result):
    """Candidates vetted for a domain."""

    @cached_property
    def candidates(self) -> pd.DataFrame:
        """One row a vocabulary and figure, as in `candidates.csv`."""
        return domain_tables.candidates(self.document).infer_objects()

    @cached_property
    def penalty(self) -> pd.DataFrame:
        """One row a vocabulary, slice and figure beside the general text's, as in `penalty.csv`."""
        return domain_tables.penalty(self.document).infer_objects()

    @cached_property
    def kinds(self) -> pd.DataFrame:
        """One row a vocabulary and kind of text, and its costliest stretches: `kinds.csv`."""
        return domain_tables.kinds(self.document).infer_objects()

    @cached_property
    def terms(self) -> pd.DataFrame:
        """One row a vocabulary, term, form and position, as in `terms.csv`."""
        return domain_tables.terms(self.document).infer_objects()

    @cached_property
    def words(self) -> pd.DataFrame:
        """The words that cost most, as in `words.csv`."""
        return _read(self.folder / "words.csv")

    @property
    def verdict(self) -> dict[str, list[str]]:
        """The sentences of the verdict: losses, cost, choice, help."""
        verdict: dict[str, list[str]] = self.document["verdict"]
        return verdict

    def _sentences(self) -> Iterable[str]:
        for sentences in self.verdict.values():
            yield from sentences

    def _shown(self) -> pd.DataFrame:
        figures = self.candidates
        named = figures["figure"].isin([*_SHOWN, "lost_characters"])
        return figures[named & figures["other"].isna()].drop(columns=["other"])


def _read(path: Path) -> pd.DataFrame:
    """Return a CSV file; the word "null" and the like stay the words that they are."""
    return pd.read_csv(path, dtype=_TEXT, keep_default_na=False, encoding="utf-8")
