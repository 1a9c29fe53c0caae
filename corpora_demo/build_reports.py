"""Makes the sample reports of `reports/samples/` from the demo corpus again.

`python corpora_demo/build_reports.py` writes them; `--check` compares instead and exits 1 when a
stored one is stale. `run.json` and `documents.parquet` are left out: the one holds times, the other
bytes that belong to a version of a library.
"""

from __future__ import annotations

import shutil
import sys
import tempfile
from collections.abc import Callable
from dataclasses import replace
from functools import partial
from pathlib import Path
from typing import Any

import orjson

from auditor.corpus import ReadOptions
from auditor.planning.model import parse_model
from auditor.planning.plan import Wishes
from auditor.report import (
    comparison_page,
    domain_page,
    inspection_page,
    language_page,
    page,
    plan_page,
)
from auditor.runs.auditing import assess
from auditor.runs.differences import Wanted, compare_audits
from auditor.runs.domain import vet_domain
from auditor.runs.inspecting import inspect
from auditor.runs.languages import compare_languages
from auditor.runs.lengths import plan_from_corpus
from auditor.runs.plan import Plan
from auditor.runs.vetted import DomainWishes
from auditor.vocabulary import VocabularySpec

ROOT = Path(__file__).resolve().parent.parent
SAMPLES = ROOT / "reports" / "samples"
DEMO = "corpora_demo"
VOCABULARIES = f"{DEMO}/vocabularies"
LEFT_OUT = {"run.json", "documents.parquet"}


def plan(corpus: str, *vocabularies: str, by: tuple[str, ...] = ("lang",)) -> Plan:
    """Return the plan of one sample; names are relative to the checkout, as a user would type."""
    specs = tuple(VocabularySpec(f"{VOCABULARIES}/{name}") for name in vocabularies)
    return Plan((f"{DEMO}/{corpus}",), specs, ReadOptions(by=by))


PLANS = {
    "inspection-notes": plan(
        "inspection_notes.jsonl", "harbour-bytelevel", "harbour-wordpiece", "harbour-unigram"
    ),
    "safety-notices": plan("safety_notices.jsonl", "harbour-sentencepiece"),
    "damaged-notes": plan("damaged.jsonl", "harbour-wordpiece"),
}


LENGTH_PLAN = "inspection-notes--length-plan"
LANGUAGES = "safety-notices--languages"
INSPECTION = "harbour-wordpiece--inspection"
INSPECTED = ("harbour-wordpiece", "harbour-bytelevel")
DOMAIN = "inspection-notes--domain"
COMPARISON = "damaged-notes--to--inspection-notes"
# The document that each kind of page is rendered from.
HELD = {
    LENGTH_PLAN: "plan.json",
    LANGUAGES: "languages.json",
    DOMAIN: "domain.json",
    INSPECTION: "inspection.json",
    COMPARISON: "comparison.json",
}
MODEL = "layers=4,width=256,heads=4,inner=1024"

Render = Callable[[dict[str, Any]], str]


def build(folder: Path) -> dict[str, Render]:
    """Write every sample below ``folder``; return how each one's page is rendered from its JSON."""
    pages: dict[str, Render] = {}
    for name, sample in PLANS.items():
        done = assess(sample, folder / name, overwrite=True)
        pages[name] = partial(page.render, worst=done.worst_words, details=done.details)
        for path in done.files:
            if path.name in LEFT_OUT:
                path.unlink()
    weighed = plan("inspection_notes.jsonl", "harbour-sentencepiece")
    wishes = Wishes(model=parse_model(MODEL))
    plan_from_corpus(weighed, wishes, out=folder / LENGTH_PLAN, overwrite=True)
    pages[LENGTH_PLAN] = plan_page.render
    reading = ReadOptions(by=("lang",), parallel="notice")
    notices = plan("safety_notices.jsonl", "harbour-bytelevel", "harbour-unigram")
    compared = replace(notices, read=reading, graphemes=True)
    compare_languages(compared, ("en",), folder / LANGUAGES, overwrite=True)
    pages[LANGUAGES] = language_page.render
    candidates = plan(
        "inspection_notes.jsonl", "harbour-bytelevel", "harbour-wordpiece", "harbour-unigram",
        "harbour-sentencepiece", by=(),
    )  # fmt: skip
    against = DomainWishes(
        general=(f"{DEMO}/everyday.txt",),
        shape=parse_model(MODEL),
        terms=Path(f"{DEMO}/glossary.csv"),
    )
    vetted = vet_domain(candidates, against, folder / DOMAIN, overwrite=True)
    pages[DOMAIN] = partial(domain_page.render, worst=vetted.worst_words)
    specs = [VocabularySpec(f"{VOCABULARIES}/{name}") for name in INSPECTED]
    inspect(specs, folder / INSPECTION, width=256, overwrite=True)
    pages[INSPECTION] = inspection_page.render
    # The stored audits are compared, by the names that a user would type: paths stand in the JSON.
    stored = (f"reports/samples/{name}" for name in COMPARISON.split("--to--"))
    wanted = Wanted(before="harbour-wordpiece", after="harbour-wordpiece")
    compare_audits(*stored, wanted, folder / COMPARISON, overwrite=True)
    pages[COMPARISON] = comparison_page.render
    return pages


def stale(fresh: Path, pages: dict[str, Render]) -> list[str]:
    """Return the stored files that differ from ``fresh``, versions of libraries aside."""
    names = {p.relative_to(fresh) for p in fresh.rglob("*") if p.is_file()}
    stored = {p.relative_to(SAMPLES) for p in SAMPLES.rglob("*") if p.is_file()}
    changed = [
        name
        for name in names & stored
        if name.suffix != ".html" and _comparable(fresh / name) != _comparable(SAMPLES / name)
    ]
    old = [f"{name}/report.html" for name, render in pages.items() if _stale_page(name, render)]
    return [*map(str, sorted([*(names ^ stored), *changed])), *old]


def _comparable(path: Path) -> object:
    if path.suffix != ".json":
        return path.read_bytes()
    return {k: v for k, v in orjson.loads(path.read_bytes()).items() if k != "made_with"}


def _stale_page(name: str, render: Render) -> bool:
    """Return whether the stored page is not what its stored JSON renders to today."""
    stored = SAMPLES / name / "report.html"
    held = SAMPLES / name / HELD.get(name, "audit.json")
    if not (held.is_file() and stored.is_file()):
        return True
    return render(orjson.loads(held.read_bytes())) != stored.read_text(encoding="utf-8")


def main() -> int:
    """Write or check the samples; return the exit code."""
    if "--check" not in sys.argv[1:]:
        shutil.rmtree(SAMPLES, ignore_errors=True)
        build(SAMPLES)
        return 0
    with tempfile.TemporaryDirectory() as folder:
        differing = stale(Path(folder), build(Path(folder)))
    for name in differing:
        print(f"stale: reports/samples/{name}; run python corpora_demo/build_reports.py")
    return 1 if differing else 0


if __name__ == "__main__":
    sys.exit(main())
