"""Makes the sample reports of `reports/samples/` from the demo corpus again.

`python corpora_demo/build_reports.py` writes them; `--check` compares instead and exits 1 when a
stored one is stale. `run.json` and `documents.parquet` are left out: the one holds times, the other
bytes that belong to a version of a library.
"""

from __future__ import annotations

import shutil
import sys
import tempfile
from pathlib import Path

import orjson

from auditor.corpus import ReadOptions
from auditor.report import page
from auditor.runs.auditing import Written, assess
from auditor.runs.plan import Plan
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


def build(folder: Path) -> dict[str, Written]:
    """Write every sample below ``folder`` and return the audits by name."""
    done = {}
    for name, sample in PLANS.items():
        done[name] = assess(sample, folder / name, overwrite=True)
        for path in done[name].files:
            if path.name in LEFT_OUT:
                path.unlink()
    return done


def stale(fresh: Path, done: dict[str, Written]) -> list[str]:
    """Return the stored files that differ from ``fresh``, versions of libraries aside."""
    names = {p.relative_to(fresh) for p in fresh.rglob("*") if p.is_file()}
    stored = {p.relative_to(SAMPLES) for p in SAMPLES.rglob("*") if p.is_file()}
    changed = [
        name
        for name in names & stored
        if name.suffix != ".html" and _comparable(fresh / name) != _comparable(SAMPLES / name)
    ]
    pages = [f"{name}/report.html" for name in PLANS if _stale_page(name, done[name])]
    return [*map(str, sorted([*(names ^ stored), *changed])), *pages]


def _comparable(path: Path) -> object:
    if path.name != "audit.json":
        return path.read_bytes()
    return {k: v for k, v in orjson.loads(path.read_bytes()).items() if k != "made_with"}


def _stale_page(name: str, written: Written) -> bool:
    """Return whether the stored page is not what its stored audit renders to today."""
    audit = SAMPLES / name / "audit.json"
    stored = SAMPLES / name / "report.html"
    if not (audit.is_file() and stored.is_file()):
        return True
    return page.render(orjson.loads(audit.read_bytes()), written.worst_words) != stored.read_text()


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
