"""What one vocabulary does to each language, as `languages.json` holds it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict
from typing import Any

from auditor.figures.catalogue import COST_FIGURES
from auditor.figures.paired import ratio_of_totals
from auditor.figures.values import Basis, compute
from auditor.planning import parity
from auditor.planning.histogram import LengthHistogram
from auditor.runs.plan import Plan
from auditor.runs.tallied import AuditTallies
from auditor.runs.tongues import (
    CONTRADICTS,
    MIXED,
    SPENT,
    LanguageTallies,
    Mismatch,
    VocabularyTallies,
)
from auditor.text import labels
from auditor.vocabulary import VocabularyFacts
from auditor.vocabulary.forms import FormPair

Json = dict[str, Any]

POWERS = (1.0, 0.7, 0.5, 0.3)
CHARACTERS_SHOWN = 20
PAIRS_SHOWN = 500
_FIGURES = (
    "fertility", "pieces_per_word", "continued_words", "characters_per_token", "bytes_per_token",
    "unknown_words", "unknown_characters", "byte_spelled_characters", "dropped_characters",
    "changed_words", "truncated_documents", "truncated_tokens", "relative_tokens",
)  # fmt: skip


def labels_as_json(named: Mapping[str, str], own: LanguageTallies, first: list[Mismatch]) -> Json:
    """Return what there is to know of the labels ``named`` (slice key → label)."""
    rows: list[Json] = []
    for key, text in named.items():
        label = labels.label_of(text)
        counts = {name: held["documents"] for name, held in own.labels.rows(key)}
        against = {
            name.removeprefix(CONTRADICTS): count
            for name, count in counts.items()
            if name.startswith(CONTRADICTS)
        }
        rows.append(
            {
                "label": text,
                "known": label.known,
                "expected_scripts": sorted(label.scripts),
                "contradicting": against,
                "mixed": counts.get(MIXED, 0),
                "few_letters": counts.get("few letters", 0),
            }
        )
    return {
        "rows": rows,
        "unknown": sorted(row["label"] for row in rows if not row["known"]),
        "near_duplicates": labels.near_duplicates(list(named.values())),
        "contradicting": sum(sum(row["contradicting"].values()) for row in rows),
        "first": [asdict(mismatch) for mismatch in first],
        "rule": {
            "letters_at_least": labels.ENOUGH_LETTERS,
            "words_at_least": labels.ENOUGH_WORDS,
            "share_in_expected_scripts_at_most": labels.AT_MOST_INSIDE,
        },
    }


class VocabularyLanguages:
    """What one vocabulary does to each language, from the tallies of a finished run."""

    def __init__(
        self,
        plan: Plan,
        place: int,
        facts: VocabularyFacts,
        audit: Json,
        tallies: AuditTallies,
        own: LanguageTallies,
        named: Mapping[str, str],
        entries: Mapping[str, int],
        forms: list[FormPair],
    ) -> None:
        self._facts = facts
        self._entries = entries
        self._forms = forms
        self._mismatched = {
            key: sum(
                held["documents"]
                for name, held in own.labels.rows(key)
                if name.startswith(CONTRADICTS)
            )
            for key in named
        }
        self._audit = audit
        self._named = named
        self._tallies: VocabularyTallies = own.vocabularies[place]
        moments = tallies.documents[place].moments
        self._basis = Basis(moments, moments, facts.lacks)
        self._parallel = plan.read.parallel is not None
        self._tokens = own.parallel.by_slice(f"tokens:{place}") if self._parallel else {}
        self._words = own.parallel.by_slice("words") if self._parallel else {}

    def compare(self, references: list[str]) -> Json:
        """Return the part of `languages.json` for this vocabulary, costliest language first."""
        figures = {key: self._figures(key) for key in self._named}
        premiums = {
            reference: {
                key: parity.premium(self._tokens.get(key, {}), self._tokens.get(reference, {}))
                for key in self._named
            }
            for reference in (references if self._parallel else ())
        }
        rows = [self._language(key, figures, premiums, references) for key in self._named]
        first = premiums[references[0]] if premiums else {}
        ranked_by = "premium" if premiums else "tokens_per_grapheme"
        rows.sort(key=lambda row: (-_cost(row, ranked_by), row["language"]))
        counts = {row["language"]: row["counts"] for row in rows}
        return {
            **{name: own for name, own in self._audit.items() if name != "slices"},
            "ranked_by": ranked_by,
            "languages": rows,
            "spread": self._spread(first),
            "scatter": self._scatter(rows, references),
            "mixture": parity.mixture(counts, POWERS),
            "normal_forms": [asdict(pair) for pair in self._forms],
        }

    def _spread(self, premiums: Mapping[str, Json]) -> Json | None:
        found = parity.spread(self._tokens, premiums)
        if found is None:
            return None
        ends = {end: self._named[found[end]] for end in ("highest", "lowest")}
        return {**found, **ends}

    def _scatter(self, rows: list[Json], references: list[str]) -> Json | None:
        """Return pairs of the costliest language, for a drawing: the first by content."""
        if not self._parallel or not references:
            return None
        keys = {label: key for key, label in self._named.items()}
        ours = self._tokens.get(keys[rows[0]["language"]], {})
        pairs = parity.pairs_of(ours, self._tokens.get(references[0], {}))
        return {
            "language": rows[0]["language"],
            "reference": self._named[references[0]],
            "of": len(pairs),
            "pairs": [list(pair) for pair in pairs[:PAIRS_SHOWN]],
        }

    def _figures(self, key: str) -> Json:
        held = self._audit["slices"][key]["figures"]
        costs = {own.name: compute(own, key, self._basis).as_json() for own in COST_FIGURES}
        return {**{name: held[name] for name in _FIGURES if name in held}, **costs}

    def _language(
        self,
        key: str,
        figures: Mapping[str, Json],
        premiums: Mapping[str, Mapping[str, Json]],
        references: list[str],
    ) -> Json:
        held = self._audit["slices"][key]
        over = [
            {"reference": self._named[reference], **own[key]} for reference, own in premiums.items()
        ]
        weaker = [
            {
                "reference": self._named[reference],
                **parity.relative(figures[key], figures[reference]),
            }
            for reference in references
        ]
        row: Json = {
            "language": self._named[key],
            "documents": held["counts"]["documents"],
            "counts": held["counts"],
            "figures": figures[key],
            "lengths": {name: own for name, own in held["lengths"].items() if name != "histogram"},
            "premium": over[0] if over else None,
            "further_premiums": over[1:],
            "relative": weaker,
            "scripts": self._scripts(key),
            "cost": self._spent(key),
            "characters": self._characters(key),
            "normal_form": self._form(key),
            "label_mismatch": self._mismatched[key],
        }
        worth = self._reference_words(key, references)
        row["room"] = parity.room(figures[key], self._facts.room, worth)
        histogram = LengthHistogram.of(held["lengths"]["histogram"])
        row["remedies"] = parity.remedies(row, histogram, self._facts.limit.value)
        return row

    def _reference_words(self, key: str, references: list[str]) -> Json | None:
        """Return the first reference's words per token of this language, on the same content."""
        if not self._parallel or not references:
            return None
        theirs = self._words.get(references[0], {})
        pairs = parity.pairs_of(theirs, self._tokens.get(key, {}))
        return ratio_of_totals(pairs).as_json()

    def _scripts(self, key: str) -> list[Json]:
        rows = list(self._tallies.scripts.rows(key))
        total = sum(row["characters"] for _, row in rows)
        found = [
            {
                "script": name,
                **row,
                "share": row["characters"] / total if total else None,
                "tokens_per_character": (
                    row["tokens"] / row["characters"] if row["characters"] else None
                ),
                "byte_spelled_share": (
                    row["byte_spelled_characters"] / row["characters"]
                    if row["characters"]
                    else None
                ),
                "entries": self._entries.get(name, 0),
            }
            for name, row in rows
        ]
        return sorted(found, key=lambda row: (-row["characters"], row["script"]))

    def _spent(self, key: str) -> Json:
        return next((row for name, row in self._tallies.spent.rows(key) if name == SPENT), {})

    def _characters(self, key: str) -> list[Json]:
        rows: list[Json] = [
            {"character": name, **row} for name, row in self._tallies.characters.rows(key)
        ]
        costly = sorted(rows, key=lambda row: (row["count"] - row["tokens"], row["character"]))
        return costly[:CHARACTERS_SHOWN]

    def _form(self, key: str) -> Json:
        none = {"documents": 0, "characters": 0, "tokens": 0, "tokens_as_nfc": 0}
        return next((row for _, row in self._tallies.forms.rows(key)), none)


def _cost(row: Json, ranked_by: str) -> float:
    costs = row["figures"] if ranked_by != "premium" else row["premium"]
    name = ranked_by if ranked_by != "premium" else "ratio_of_totals"
    return float(costs[name]["value"] or 0)
