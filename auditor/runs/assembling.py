"""From the tallies of a finished run to the document of `audit.json`."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

from auditor.figures import lengths, usage, values
from auditor.figures.catalogue import REPEATED_DOCUMENTS, WHY_UNDEFINED
from auditor.figures.values import Basis
from auditor.report import contract
from auditor.runs.plan import Plan
from auditor.runs.tallied import AuditTallies, DocumentTallies
from auditor.tallies.corpus import FlawsTally
from auditor.tallies.groups import ALL
from auditor.tallies.whitespace import COLUMNS
from auditor.vocabulary import VocabularyFacts

Json = dict[str, Any]
_COUNTS = ("documents", "bytes", "characters", "words", "tokens")
_FATES = COLUMNS[2:7]


def assemble(
    plan: Plan,
    facts: list[VocabularyFacts],
    tallies: AuditTallies,
    sources: list[str],
    settings: Json,
) -> Json:
    """Return the document of `audit.json`."""
    several = len(facts) > 1
    vocabularies = [
        _vocabulary(own, place, tallies, plan, relative=several) for place, own in enumerate(facts)
    ]
    return contract.audit(
        settings={**plan.numeric_settings(), **settings},
        corpus=_corpus(tallies, sources),
        vocabularies=vocabularies,
    )


def _corpus(tallies: AuditTallies, sources: list[str]) -> Json:
    moments = tallies.documents[0].moments
    counts = {name: moments.total(ALL, name) for name in _COUNTS if name != "tokens"}
    return {
        "sources": sources,
        "digest": tallies.corpus.digest.digest,
        **counts,
        "set_aside": flaws_as_json(tallies.corpus.set_aside, sources),
        "mended": flaws_as_json(tallies.corpus.mended, sources),
    }


def flaws_as_json(tally: FlawsTally, sources: list[str]) -> Json:
    """Return counts by reason, and the first flaws with their places."""
    first = [
        {
            "source": sources[flaw.source],
            "line": None if flaw.line < 0 else flaw.line,
            "reason": flaw.reason,
            "detail": flaw.detail,
        }
        for flaw in tally.first
    ]
    reasons = dict(sorted(tally.reasons.items()))
    return {"records": tally.reasons.total(), "reasons": reasons, "first": first}


def _vocabulary(
    facts: VocabularyFacts, place: int, tallies: AuditTallies, plan: Plan, *, relative: bool
) -> Json:
    tally, contents = tallies.documents[place], tallies.contents[place]
    lacks = facts.lacks | (frozenset() if plan.repeats else frozenset({"repeats"}))
    basis = Basis(tally.moments, tally.origins or tally.moments, lacks)
    slices = {
        key: _slice(key, tally, basis, graphemes=plan.graphemes, relative=relative)
        for key in (ALL, *(key for key in tally.moments.slices() if key != ALL))
    }
    if plan.repeats:
        distinct = len(tallies.corpus.digest.seen)
        repeated = values.proportion(tallies.measured - distinct, tallies.measured)
        slices[ALL]["figures"][REPEATED_DOCUMENTS.name] = repeated.as_json()
    used = contents.usage.occurrences
    slices[ALL]["usage"] = usage.describe(used, facts.entries, facts.rankable)
    return {**facts_as_json(facts), "slices": slices}


def facts_as_json(facts: VocabularyFacts) -> Json:
    """Return what is known of a vocabulary without a corpus."""
    return {
        "name": facts.name,
        "source": facts.source,
        "digest": facts.digest,
        "family": facts.family,
        "entries": facts.entries,
        "space_convention": facts.spaces.convention,
        "prefix_added": facts.spaces.prefix_added,
        "overhead": {"single": facts.overhead[0], "pair": facts.overhead[1]},
        "limit": {
            "value": facts.limit.value,
            "declared": [asdict(declared) for declared in facts.limit.declared],
            "notes": list(facts.limit.notes),
        },
        "unknown": facts.unknown,
        "byte_pieces": facts.byte_pieces,
        "control_strings": facts.control,
        "decoder": facts.has_decoder,
        "notes": list(facts.notes),
    }


def _slice(
    key: str, tally: DocumentTallies, basis: Basis, *, graphemes: bool, relative: bool
) -> Json:
    names = (*_COUNTS, "graphemes") if graphemes else _COUNTS
    return {
        "counts": {name: tally.moments.total(key, name) for name in names},
        "figures": values.as_json(values.figures_of(key, basis, relative=relative)),
        "lengths": lengths.describe(tally.lengths.histogram(key)),
        "whitespace": [_whitespace(kind, row, basis) for kind, row in tally.whitespace.rows(key)],
    }


def _whitespace(kind: str, row: dict[str, int], basis: Basis) -> Json:
    found: Json = {"kind": kind, "occurrences": row["occurrences"], "tokens": row["tokens"]}
    if "decoder" in basis.lacks:
        return {**found, "fates": None, "bytes": row["bytes"], "note": WHY_UNDEFINED["decoder"]}
    return {**found, "fates": {fate: row[fate] for fate in _FATES}, "bytes": row["bytes"]}
