"""The public functions: each reads a corpus, measures it, and returns the result.

A corpus (``source``) is a path or glob; a pandas or Arrow table, or another that offers the Arrow
stream interface; or an iterable of texts, of mappings, or of `Path`. A vocabulary is a path or
``hub:ORG/NAME``; several make one result. All raise `auditor.errors.AuditError` for what the caller
can mend; then nothing is written.

``workers`` is the number of processes; more than one needs the calling script's own work under
``if __name__ == "__main__"``, as Python's spawned processes import it again. No figure depends on
it.
"""

from __future__ import annotations

import shutil
from collections.abc import Callable, Iterable, Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, replace
from fractions import Fraction
from pathlib import Path
from tempfile import TemporaryDirectory, mkdtemp
from typing import Any, Literal

from auditor.api import given
from auditor.api.results import (
    AuditResult,
    ComparisonResult,
    DomainResult,
    InspectionResult,
    LanguagesResult,
    PlanResult,
)
from auditor.corpus import Named, ReadOptions
from auditor.corpus.options import Unit
from auditor.planning.model import ModelShape, parse_model
from auditor.planning.plan import Wishes
from auditor.planning.ranking import USUAL, weights_of
from auditor.policy import read_policy
from auditor.runs import auditing, audits, differences, inspecting, lengths
from auditor.runs import domain as vetting
from auditor.runs import languages as tongues
from auditor.runs.audits import Audit
from auditor.runs.plan import Plan
from auditor.runs.reading import Progress
from auditor.runs.vetted import DomainWishes
from auditor.vocabulary import VocabularySpec

Vocabularies = str | Path | Iterable[str | Path]
Names = str | Iterable[str]
Tell = Callable[[Progress], None] | None


@dataclass(frozen=True)
class Reading:
    """How a corpus is read, for whatever is not usual; the same settings as the command line's.

    ``text`` names the field or fields of the text; ``unit`` is what one document is in plain text;
    ``words`` are by UAX #29 (``icu``) or by whitespace.
    """

    text: Names = ()
    limit: int | None = None
    unit: Unit = "record"
    words: Literal["icu", "whitespace"] = "icu"
    control_strings: Literal["parse", "text"] = "parse"
    pattern: str | None = None
    encoding: str | None = None
    strict: bool = False
    workers: int = 1


def assess(
    source: Any,  # noqa: ANN401 - paths, tables, iterables: see above
    vocab: Vocabularies,
    *,
    by: Names = (),
    limit: int | None = None,
    text: Names = (),
    origin: str | None = None,
    graphemes: bool = False,
    repeats: bool = False,
    excerpts: bool = True,
    whole: bool = False,
    policy: str | Path | None = None,
    reading: Reading | None = None,
    out: str | Path | None = None,
    overwrite: bool = False,
    progress: Tell = None,
) -> AuditResult:
    """Measure ``source`` against one vocabulary or several: `auditor assess`.

    ``by`` names fields whose values are measured apart; ``limit`` is in positions, template
    included (``None``: as the files declare); ``policy`` is a file of bounds, whose verdicts the
    result holds. ``progress`` is called after every batch.
    """
    bounds = None if policy is None else read_policy(Path(policy))
    reading = _reading(reading, limit=limit, text=text)
    with _spooled(source) as corpus, _folder(out) as (folder, held):
        plan = replace(
            _plan(corpus, vocab, by, reading, origin=origin),
            graphemes=graphemes, repeats=repeats, excerpts=excerpts, whole=whole,
        )  # fmt: skip
        done = auditing.assess(plan, folder, overwrite=overwrite, progress=progress, policy=bounds)
        return AuditResult(done.audit, done.folder, held, done.verdicts)


def plan_length(
    source: Any,  # noqa: ANN401 - as above, or an AuditResult, or the path of an audit
    vocab: str | Path | None = None,
    *,
    candidates: Iterable[int] = (),
    accept_truncated: float | Fraction = Fraction(1, 100),
    batch: int = 32,
    overlap: int | None = None,
    model: str | None = None,
    precision: str = "bfloat16",
    pair: str | None = None,
    by: Names = (),
    limit: int | None = None,
    text: Names = (),
    reading: Reading | None = None,
    out: str | Path | None = None,
    overwrite: bool = False,
    progress: Tell = None,
) -> PlanResult:
    """Weigh maximum lengths and recommend one: `auditor plan-length`.

    ``source`` may be an `AuditResult` or the path of an audit; then ``vocab`` names one of its
    vocabularies, and nothing is read again. ``model`` is a shape as text, or a `config.json`.
    """
    wishes = Wishes(
        lengths=tuple(sorted(set(candidates))),
        accepted=Fraction(str(accept_truncated)),
        batch=batch,
        overlap=overlap,
        model=parse_model(model) if model else None,
        precision=precision,
    )
    audit = _audit(source)
    with _folder(out) as (folder, held):
        if audit is not None:
            named = None if vocab is None else str(vocab)
            done = lengths.plan_from_audit(
                audit, wishes, vocabulary=named, limit=limit, out=folder, overwrite=overwrite
            )
            return PlanResult(done.plan, done.folder, held)
        if vocab is None:
            raise TypeError("plan_length() needs a vocabulary for a corpus")
        reading = _reading(reading, limit=limit, text=text)
        with _spooled(source) as corpus:
            plan = _plan(corpus, vocab, by, reading, pair=pair)
            done = lengths.plan_from_corpus(
                plan, wishes, out=folder, overwrite=overwrite, progress=progress
            )
            return PlanResult(done.plan, done.folder, held)


def languages(
    source: Any,  # noqa: ANN401 - as above
    vocab: Vocabularies,
    *,
    by: str,
    parallel: str | None = None,
    reference: Names = (),
    limit: int | None = None,
    text: Names = (),
    reading: Reading | None = None,
    out: str | Path | None = None,
    overwrite: bool = False,
    progress: Tell = None,
) -> LanguagesResult:
    """Compare what the languages that ``by`` names pay: `auditor languages`."""
    reading = _reading(reading, limit=limit, text=text)
    with _spooled(source) as corpus, _folder(out) as (folder, held):
        plan = replace(_plan(corpus, vocab, by, reading, parallel=parallel), graphemes=True)
        done = tongues.compare_languages(
            plan, _names(reference), folder, overwrite=overwrite, progress=progress
        )
        return LanguagesResult(done.document, done.folder, held)


def domain(
    source: Any,  # noqa: ANN401 - as above
    vocab: Vocabularies,
    *,
    general: Any = None,  # noqa: ANN401 - as ``source``, or an AuditResult, or an audit's path
    general_text: Names | None = None,
    terms: str | Path | None = None,
    weigh: Mapping[str, float] | None = None,
    seed: int = 0,
    width: int | None = None,
    model: str | None = None,
    excerpts: bool = True,
    by: Names = (),
    limit: int | None = None,
    text: Names = (),
    reading: Reading | None = None,
    out: str | Path | None = None,
    overwrite: bool = False,
    progress: Tell = None,
) -> DomainResult:
    """Vet candidate vocabularies for the domain of ``source``: `auditor domain`.

    ``terms`` is the file of a glossary. ``weigh`` holds the weights of the ranking by criterion
    (`auditor.planning.ranking.CRITERIA`).
    """
    shape: ModelShape | None = parse_model(model) if model else None
    reading = _reading(reading, limit=limit, text=text)
    with _spooled(source) as corpus, _general(general) as beside, _folder(out) as (folder, held):
        plan = replace(_plan(corpus, vocab, by, reading), excerpts=excerpts)
        wishes = DomainWishes(
            general=beside,
            general_text=None if general_text is None else _names(general_text),
            weights=dict(USUAL) if weigh is None else weights_of(weigh),
            seed=seed,
            width=width,
            shape=shape,
            terms=None if terms is None else Path(terms),
        )
        done = vetting.vet_domain(plan, wishes, folder, overwrite=overwrite, progress=progress)
        return DomainResult(done.document, done.folder, held)


def inspect(
    vocab: Vocabularies,
    *,
    width: int | None = None,
    model: str | None = None,
    control_strings: Literal["parse", "text"] = "parse",
    pattern: str | None = None,
    out: str | Path | None = None,
    overwrite: bool = False,
) -> InspectionResult:
    """Look into one vocabulary or several, without a corpus: `auditor inspect`."""
    paths = (vocab,) if isinstance(vocab, (str, Path)) else tuple(vocab)
    specs = [VocabularySpec(str(path), control_strings, pattern) for path in paths]
    with _folder(out) as (folder, held):
        done = inspecting.inspect(
            specs, folder, width=width, shape=parse_model(model) if model else None,
            overwrite=overwrite,
        )  # fmt: skip
        return InspectionResult(done.document, done.folder, held)


def compare(
    before: AuditResult | str | Path,
    after: AuditResult | str | Path,
    *,
    vocab: str | None = None,
    vocab_after: str | None = None,
    different_settings: bool = False,
    excerpts: bool = True,
    out: str | Path | None = None,
    overwrite: bool = False,
) -> ComparisonResult:
    """Compare two audits, each a result or the path of one: `auditor compare`.

    ``vocab`` names the vocabulary of both, or that of ``before``; ``different_settings`` goes on
    where the audits were made with others.
    """
    wanted = differences.Wanted(vocab, vocab_after or vocab, different_settings, excerpts)
    first, second = (
        str(own.folder if isinstance(own, AuditResult) else own) for own in (before, after)
    )
    with _folder(out) as (folder, held):
        done = differences.compare_audits(first, second, wanted, folder, overwrite=overwrite)
        return ComparisonResult(done.document, done.folder, held)


def _reading(reading: Reading | None, *, limit: int | None, text: Names) -> Reading:
    found = reading or Reading()
    return replace(found, limit=limit or found.limit, text=text or found.text)


def _plan(
    corpus: tuple[str | Named, ...],
    vocab: Vocabularies,
    by: Names,
    reading: Reading,
    *,
    origin: str | None = None,
    pair: str | None = None,
    parallel: str | None = None,
) -> Plan:
    paths = (vocab,) if isinstance(vocab, (str, Path)) else tuple(vocab)
    specs = tuple(
        VocabularySpec(str(path), reading.control_strings, reading.pattern, reading.limit)
        for path in paths
    )
    options = ReadOptions(
        text=_names(reading.text), by=_names(by), unit=reading.unit, encoding=reading.encoding,
        strict=reading.strict, origin=origin, pair=pair, parallel=parallel,
    )  # fmt: skip
    return Plan(corpus, specs, options, words=reading.words, workers=reading.workers)


def _names(names: Names) -> tuple[str, ...]:
    return (names,) if isinstance(names, str) else tuple(names)


def _audit(source: object) -> Audit | None:
    if isinstance(source, AuditResult):
        return source.as_audit()
    return audits.audit_at(str(source)) if isinstance(source, (str, Path)) else None


@contextmanager
def _spooled(source: Any) -> Iterator[tuple[str | Named, ...]]:  # noqa: ANN401
    with TemporaryDirectory(prefix="auditor-given-") as folder:
        yield given.corpus(source, Path(folder))


@contextmanager
def _general(source: Any) -> Iterator[tuple[str | Named | Audit, ...]]:  # noqa: ANN401
    if source is None:
        yield ()
    elif isinstance(source, AuditResult):
        yield (source.as_audit(),)
    else:
        with _spooled(source) as corpus:
            yield corpus


@contextmanager
def _folder(out: str | Path | None) -> Iterator[tuple[Path, Path | None]]:
    """Yield where to write, and the temporary folder that this is in, kept unless it fails."""
    if out is not None:
        yield Path(out), None
        return
    held = Path(mkdtemp(prefix="auditor-"))
    try:
        yield held / "result", held
    except BaseException:
        shutil.rmtree(held, ignore_errors=True)
        raise
