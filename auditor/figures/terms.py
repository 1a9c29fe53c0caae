"""What a vocabulary makes of the terms of a glossary: term by term, and as shares.

A term is in one of five states, by the first that holds: *unknown* (a character of it is under an
unknown token), *dropped* (nothing stands for a character of it), *whole* (one token touches it),
*two*, *three or more*. Beside these, it is *byte-spelled* when a character of it is under byte
tokens, and its *words are whole* when each is touched by one token and nothing is lost: a term of
several words cannot be whole where tokens end with words.

The state of a term is that of the term as given, after a space. A glossary is no sample of
anything, so that its shares have no interval.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from fractions import Fraction
from typing import Any

from auditor.corpus.glossary import Glossary, Term
from auditor.encoding.breaking import Breaking
from auditor.encoding.constructed import AFTER_SPACE, Constructed
from auditor.tallies.terms import TermRow, TermsTally
from auditor.text.cases import AS_GIVEN

Json = dict[str, Any]

UNKNOWN, DROPPED, WHOLE, TWO, MORE = "unknown", "dropped", "whole", "two", "three_or_more"
STATES = (WHOLE, TWO, MORE, UNKNOWN, DROPPED)
BYTE_SPELLED, WORDS_WHOLE = "byte_spelled", "words_whole"
# The most frequent forms of a term are listed; how many more there are is said.
FORMS_SHOWN = 200


def state_of(breaking: Breaking | TermRow) -> str:
    """Return the state of a term that is broken so."""
    if breaking.unknown:
        return UNKNOWN
    if breaking.dropped or breaking.tokens == 0:
        return DROPPED
    return {1: WHOLE, 2: TWO}.get(breaking.tokens, MORE)


def terms_as_json(
    glossary: Glossary, constructed: Sequence[Constructed], tally: TermsTally
) -> Json:
    """Return ``{"terms": [...], "summary": {...}}`` for one vocabulary, in the glossary's order.

    ``constructed`` is what `construct` returns for the vocabulary and glossary, ``tally`` what was
    found in the corpus.
    """
    rows: dict[str, list[tuple[TermRow, int]]] = {term.term: [] for term in glossary.terms}
    for row, count in tally.rows():
        rows[row.term].append((row, count))
    placed: dict[str, list[Constructed]] = {}
    for own in constructed:
        placed.setdefault(own.spelling, []).append(own)
    every = [
        _TermFigures(term, [c for s in term.spellings for c in placed[s]], rows[term.term])
        for term in glossary.terms
    ]
    return {
        "terms": [own.as_json(weighted=glossary.weighted) for own in every],
        "summary": _summary(every, weighted=glossary.weighted),
    }


class _TermFigures:
    """One term: how it is broken where it was put, and where it was found."""

    def __init__(
        self, term: Term, constructed: list[Constructed], rows: list[tuple[TermRow, int]]
    ) -> None:
        self.term = term
        self.rows = rows
        self.occurrences = sum(count for _, count in rows)
        self._constructed = constructed
        self.reference = next(
            own.breakings[AFTER_SPACE]
            for own in constructed
            if own.spelling == term.term and own.case == AS_GIVEN
        )

    def as_json(self, *, weighted: bool) -> Json:
        forms = self._forms()
        others = forms[FORMS_SHOWN:]
        return {
            "term": self.term.term,
            "variants": list(self.term.variants),
            "weight": _number(self.term.weight) if weighted else None,
            "state": state_of(self.reference),
            **_breaking_as_json(self.reference),
            "occurrences": self.occurrences,
            "running_text": _shares((row, Fraction(count)) for row, count in self.rows),
            "forms": forms[:FORMS_SHOWN],
            "other_forms": {
                "forms": len(others),
                "count": sum(form["count"] for form in others),
            }
            if others
            else None,
            "constructed": [
                {
                    "spelling": own.spelling,
                    "case": own.case,
                    "form": own.form,
                    "positions": {
                        place: {"state": state_of(b), "tokens": b.tokens, "broken": b.broken}
                        for place, b in own.breakings.items()
                    },
                }
                for own in self._constructed
            ],
        }

    def _forms(self) -> list[Json]:
        """Return the forms in the corpus, the most frequent first; ways to be broken likewise."""
        found: dict[str, list[Json]] = {}
        for row, count in self.rows:
            way = {"state": state_of(row), **_breaking_as_json(row), "count": count}
            found.setdefault(row.form, []).append(way)
        forms = [
            {
                "form": form,
                "count": sum(way["count"] for way in ways),
                "ways": sorted(ways, key=lambda way: (-way["count"], way["broken"])),
            }
            for form, ways in found.items()
        ]
        return sorted(forms, key=lambda form: (-form["count"], form["form"]))


def _breaking_as_json(breaking: Breaking | TermRow) -> Json:
    return {
        "broken": breaking.broken,
        "tokens": breaking.tokens,
        "broken_words": breaking.broken_words,
        "unknown": bool(breaking.unknown),
        "byte_spelled": bool(breaking.byte_spelled),
        "dropped": bool(breaking.dropped),
    }


def _summary(every: list[_TermFigures], *, weighted: bool) -> Json:
    rows = [(row, Fraction(count)) for own in every for row, count in own.rows]
    return {
        "terms": len(every),
        "spellings": sum(len(own.term.spellings) for own in every),
        "in_corpus": sum(own.occurrences > 0 for own in every),
        "occurrences": sum(own.occurrences for own in every),
        "not_in_corpus": [own.term.term for own in every if not own.occurrences],
        "by_term": _shares((own.reference, Fraction(1)) for own in every),
        "by_weight": _shares((own.reference, own.term.weight) for own in every)
        if weighted
        else None,
        "by_use": _shares((own.reference, Fraction(own.occurrences)) for own in every),
        "running_text": _shares(rows),
    }


def _shares(weighed: Iterable[tuple[Breaking | TermRow, Fraction]]) -> Json:
    """Return of each state, and of what may go with any, the weight and its share of all."""
    sums = dict.fromkeys((*STATES, BYTE_SPELLED, WORDS_WHOLE), Fraction(0))
    whole = Fraction(0)
    for breaking, weight in weighed:
        state = state_of(breaking)
        whole += weight
        sums[state] += weight
        sums[BYTE_SPELLED] += weight if breaking.byte_spelled else 0
        kept = state not in {UNKNOWN, DROPPED} and not breaking.broken_words
        sums[WORDS_WHOLE] += weight if kept else 0
    return {
        name: {
            "count": _number(own),
            "of": _number(whole),
            "share": float(own / whole) if whole else None,
        }
        for name, own in sums.items()
    }


def _number(value: Fraction) -> int | float:
    return int(value) if value.denominator == 1 else float(value)
