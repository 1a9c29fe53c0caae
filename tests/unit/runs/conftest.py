"""The demo corpus, and a small corpus of every trouble, for whole runs."""

from __future__ import annotations

from pathlib import Path

import orjson
import pytest

from auditor.corpus import ReadOptions
from auditor.runs.plan import Plan
from auditor.vocabulary import VocabularySpec

DEMO = Path(__file__).parents[3] / "corpora_demo"
VOCABULARIES = (
    "harbour-bytelevel",
    "harbour-wordpiece",
    "harbour-unigram",
    "harbour-sentencepiece",
)
TROUBLE = (
    "", " ", "\n\n", "\t", "Buoy BZ-114/7 holds.", "Buoy BZ-114/7 holds.", "  two  spaces ",
    "naïve café, Ωmega 中文 हिन्दी 🌊", "[UNK] and <s> as text", "İstanbul STRASSE straße",
    "line\r\nline\u00a0x\u3000y\u200bz", "e\u0301 e\u0302\u0323", "สวัสดีครับ", "a\u2028b",
    "word " * 300, "😀" * 40, "\u0000\u0001 control", "1,234.5 m at 04:50",
)  # fmt: skip


@pytest.fixture
def trouble(tmp_path: Path) -> Path:
    """Return a JSON lines file of texts that are hard to count, in two languages."""
    path = tmp_path / "trouble.jsonl"
    rows = [
        {"id": number, "lang": "en" if number % 3 else None, "trip": number // 4, "text": text}
        for number, text in enumerate(TROUBLE * 12)
    ]
    path.write_bytes(b"".join(orjson.dumps(row) + b"\n" for row in rows))
    return path


def plan(corpus: Path, *names: str, **settings: object) -> Plan:
    """Return a plan for ``corpus`` and demo vocabularies, sliced by language."""
    reading = {key: settings.pop(key) for key in ("batch_bytes", "origin") if key in settings}
    specs = tuple(VocabularySpec(str(DEMO / "vocabularies" / name)) for name in names)
    options = ReadOptions(by=("lang",), **reading)  # type: ignore[arg-type]
    return Plan((str(corpus),), specs, options, **settings)  # type: ignore[arg-type]
