"""The document of `domain.json`, laid out from the tallies of a finished run."""

from __future__ import annotations

from dataclasses import asdict, dataclass, field
from pathlib import Path
from typing import Any

import numpy as np

from auditor.corpus import Named
from auditor.encoding.digits import digit_groups
from auditor.encoding.steadiness import costs_of, ways_of
from auditor.figures import sidebyside
from auditor.figures.growth import growth
from auditor.figures.kinds import Worst, kinds_as_json
from auditor.figures.steadiness import steadiness
from auditor.figures.values import Value
from auditor.inspection.digits import digits_as_json
from auditor.planning import fit, ranking
from auditor.planning.histogram import LengthHistogram
from auditor.planning.model import ModelShape
from auditor.report import domain_answers, tables
from auditor.runs import yardstick
from auditor.runs.assembling import assemble
from auditor.runs.audits import Audit
from auditor.runs.plan import Plan
from auditor.runs.reading import Reading
from auditor.runs.tallied import AuditTallies, ContentTallies
from auditor.runs.vetting import HALF, NOT_NFC, DomainTallies
from auditor.runs.yardstick import Yardstick
from auditor.tallies.groups import ALL
from auditor.tallies.wordcounts import WordCountsTally
from auditor.text.perturbing import changes, share_of
from auditor.vocabulary import VocabularyFacts, open_vocabulary

Json = dict[str, Any]
# Words that are drawn from the corpus to try how steadily they are broken.
DRAWS = 5000
# The costliest stretches of a kind of text that are listed.
STRETCHES = 50


@dataclass(frozen=True)
class DomainWishes:
    """What a vetting is asked for beside reading the corpus.

    ``general`` names the text that is the yardstick, or one earlier audit; ``general_text`` its
    text fields where they are others. ``weights`` are those of the ranking. ``width`` or ``shape``
    say what model pays. ``terms`` is the file of a glossary. ``seed`` draws
    words and changes of them.
    """

    general: tuple[str | Named | Audit, ...] = ()
    general_text: tuple[str, ...] | None = None
    weights: dict[str, float] = field(default_factory=lambda: dict(ranking.USUAL))
    width: int | None = None
    shape: ModelShape | None = None
    terms: Path | None = None
    seed: int = 0


@dataclass
class Tried:
    """What was found by trying the vocabularies: one item each."""

    steadiness: list[Json] = field(default_factory=list)
    digits: list[Json] = field(default_factory=list)


def try_out(plan: Plan, facts: list[VocabularyFacts], words: WordCountsTally, seed: int) -> Tried:
    """Return how steadily each vocabulary breaks words drawn from the corpus, and digits."""
    total = sum(r * n for r, n in words.frequencies().items())
    drawn = words.drawn(DRAWS, total, share_of(seed))
    altered = changes(drawn, seed)
    found = Tried()
    for spec, own in zip(plan.vocabularies, facts, strict=True):
        vocabulary = open_vocabulary(spec)
        found.digits.append({"vocabulary": own.name, **digits_as_json(digit_groups(vocabulary))})
        if not drawn:
            continue
        ways = ways_of(vocabulary, drawn, parse_control=plan.parse_control)
        held = steadiness(drawn, ways, costs_of(vocabulary, drawn, altered))
        found.steadiness.append(held if plan.excerpts else {**held, "worst": []})
    return found


def _called(general: str | Named | Audit) -> str:
    if isinstance(general, Audit):
        return str(general.path)
    return general.name if isinstance(general, Named) else general


class Vetting:
    """Lays the document of `domain.json` out from the tallies of a finished run."""

    def __init__(
        self,
        plan: Plan,
        wishes: DomainWishes,
        reading: Reading,
        facts: list[VocabularyFacts],
        tallies: AuditTallies,
        own: DomainTallies,
        general: Yardstick | None,
        terms: list[Json],
        words: WordCountsTally,
        tried: Tried,
    ) -> None:
        settings: Json = {
            "fields": reading.fields.as_json(),
            "conversations": reading.conversations,
            "general": [_called(own) for own in wishes.general],
            "general_text": list(wishes.general_text or ()),
            "terms": None if wishes.terms is None else str(wishes.terms),
            "weights": wishes.weights,
            "seed": wishes.seed,
            "width": wishes.width,
            "model": None if wishes.shape is None else asdict(wishes.shape),
        }
        self._audit = assemble(plan, facts, tallies, reading.names, settings)
        self._wishes, self._facts = wishes, facts
        self._tallies, self._own, self._general = tallies, own, general
        self._terms, self._words = terms, words
        self._steady, self._digits, self._excerpts = tried.steadiness, tried.digits, plan.excerpts

    def document(self) -> Json:
        """Return the whole document."""
        audit = self._audit
        candidates = [self._candidate(place) for place in range(len(self._facts))]
        document: Json = {
            "format": "auditor/domain",
            "version": 1,
            "settings": audit["settings"],
            "made_with": audit["made_with"],
            "corpus": audit["corpus"],
            "general": None if self._general is None else self._general.about,
            "candidates": candidates,
            "penalty": self._penalty(),
            "terms": [
                {"vocabulary": facts.name, **row}
                for facts, own in zip(self._facts, self._terms, strict=bool(self._terms))
                for row in own["terms"]
            ],
            "kinds": self._kinds(),
            "digits": self._digits,
            "steadiness": [
                {"vocabulary": facts.name, **own}
                for facts, own in zip(self._facts, self._steady, strict=bool(self._steady))
            ],
            "growth": self._growth(),
            "ranking": self._ranking(candidates),
        }
        document["verdict"] = domain_answers.verdict(document)
        return document

    def _candidate(self, place: int) -> Json:
        held, facts = self._audit["vocabularies"][place], self._facts[place]
        whole = held["slices"][ALL]
        histogram = LengthHistogram.of(whole["lengths"]["histogram"])
        figures, limit = whole["figures"], facts.limit.value
        width, shape = self._wishes.width, self._wishes.shape
        words = tables.saved_at_most(self._tallies.contents[place].words)
        remedies = fit.remedies(
            figures, whole["counts"]["tokens"], histogram, limit, words, self._form(place)
        )
        return {
            **{name: own for name, own in held.items() if name != "slices"},
            "counts": whole["counts"],
            "figures": figures,
            "lengths": {n: own for n, own in whole["lengths"].items() if n != "histogram"},
            "usage": whole["usage"],
            "lost_characters": self._lost(place).as_json(),
            "paired": self._paired(place),
            "price": fit.price(facts.entries, limit, histogram, width, shape),
            "halves": self._halves(held["slices"]),
            "terms": self._terms[place]["summary"] if self._terms else None,
            "remedies": remedies,
        }

    def _form(self, place: int) -> dict[str, int]:
        rows = dict(self._own.forms[place].rows(ALL))
        return rows.get(NOT_NFC, {"documents": 0, "tokens": 0, "tokens_as_nfc": 0})

    def _lost(self, place: int) -> Value:
        return sidebyside.lost_share(self._own.side, ALL, place)

    def _paired(self, place: int) -> list[Json]:
        """Return the tokens and losses over those of each other candidate, paired by document."""
        side = self._own.side
        return [
            {
                "other": own.name,
                "tokens_ratio": sidebyside.tokens_ratio(side, ALL, place, other).as_json(),
                "loss_difference": sidebyside.loss_difference(side, ALL, place, other).as_json(),
            }
            for other, own in enumerate(self._facts)
            if other != place
        ]

    def _halves(self, slices: Json) -> Json:
        """Return each figure in both halves of the corpus, whichever of them hold a document."""
        halves = [slices.get(f"{HALF}={half}") for half in (1, 2)]
        return {
            "documents": [0 if h is None else h["counts"]["documents"] for h in halves],
            "figures": {
                name: [None if h is None else h["figures"][name]["value"] for h in halves]
                for name in slices[ALL]["figures"]
                if all(h is None or name in h["figures"] for h in halves)
            },
        }

    def _penalty(self) -> list[Json]:
        if self._general is None:
            return []
        return [
            row
            for held, limit, slices in zip(
                self._audit["vocabularies"],
                self._general.limits,
                self._general.slices,
                strict=True,
            )
            for row in yardstick.penalty(held, slices, limit)
        ]

    def _kinds(self) -> list[Json]:
        return [
            {"vocabulary": facts.name, **row}
            for facts, tally, contents in zip(
                self._facts, self._own.kinds, self._tallies.contents, strict=True
            )
            for row in kinds_as_json(tally, ALL, self._worst_stretches(contents))
        ]

    def _worst_stretches(self, contents: ContentTallies) -> dict[str, Worst]:
        if not self._excerpts:
            return {}
        return {
            kind: tables.worst_words(tally)[:STRETCHES] for kind, tally in contents.kinds.items()
        }

    def _growth(self) -> Json:
        """Return the growth of distinct words, and of used entries of each vocabulary."""
        entries = []
        for facts, contents in zip(self._facts, self._tallies.contents, strict=True):
            times, ids = np.unique(contents.usage.occurrences, return_counts=True)
            used = {t: n for t, n in zip(times.tolist(), ids.tolist(), strict=True) if t}
            unseen = facts.entries - sum(used.values())
            entries.append({"vocabulary": facts.name, **growth(used, unseen)})
        return {"words": growth(self._words.frequencies()), "entries": entries}

    def _ranking(self, candidates: list[Json]) -> Json:
        def by_name(*path: str) -> dict[str, Any]:
            found = {}
            for own in candidates:
                value: Any = own
                for key in path:
                    value = value[key]
                found[own["name"]] = value
            return found

        short = ranking.shortfalls(
            by_name("counts", "tokens"),
            {name: share or 0.0 for name, share in by_name("lost_characters", "value").items()},
            by_name("terms", "by_term", "words_whole", "share") if self._terms else {},
            by_name("entries"),
        )
        return ranking.rank(short, self._wishes.weights)
