"""Documents whose script contradicts their label, against 900 paragraphs labelled by reading."""

from __future__ import annotations

from pathlib import Path

import orjson
import pytest

from auditor.corpus import ReadOptions
from auditor.runs.languages import compare_languages
from auditor.runs.plan import Plan
from auditor.vocabulary import VocabularySpec
from tests.outside.guide import digest, fetch_guide, guide_paragraphs
from tests.unit.runs.conftest import DEMO

pytestmark = pytest.mark.outside

LABELS = Path(__file__).with_name("guide_labels.tsv")
RULED_ON, HELD_OUT, SECOND_READER = "1", "2", "3"
READINGS = {"contradicts", "fits", "no-prose"}


@pytest.fixture(scope="module")
def judged(tmp_path_factory):
    """Return (sample, label by reading, listed by a run) of each paragraph that is still the same.

    The package's text may change a little with a new version; most of it must be there.
    """
    folder = tmp_path_factory.mktemp("guide")
    texts = {row["id"]: row for row in guide_paragraphs(fetch_guide(folder))}
    lines = LABELS.read_text(encoding="utf-8").splitlines()
    rows = [line.split("\t") for line in lines if not line.startswith("#")]
    same = [row for row in rows if row[1] in texts and digest(texts[row[1]]["text"]) == row[2]]
    assert len(rows) == len({row[1] for row in rows}) == 900
    assert len(same) >= 855
    for sample in (RULED_ON, HELD_OUT, SECOND_READER):
        assert {row[3] for row in same if row[0] == sample} == READINGS
    corpus = folder / "paragraphs.jsonl"
    corpus.write_bytes(b"".join(orjson.dumps(texts[row[1]]) + b"\n" for row in same))
    spec = VocabularySpec(str(DEMO / "vocabularies" / "harbour-bytelevel"))
    plan = Plan((str(corpus),), (spec,), ReadOptions(by=("lang",)), graphemes=True)
    done = compare_languages(plan, (), folder / "l")
    listed = (done.folder / "doubtful_labels.jsonl").read_bytes().splitlines()
    found = [orjson.loads(line) for line in listed]
    lines_listed = {row["line"] for row in found if row["finding"] == "contradicts"}
    return [(row[0], row[3], place in lines_listed) for place, row in enumerate(same, 1)]


@pytest.mark.parametrize(
    ("sample", "precision", "recall"),
    [(RULED_ON, 0.95, 0.70), (HELD_OUT, 0.95, 0.80), (SECOND_READER, 0.95, 0.80)],
)
def test_what_is_listed_contradicts_by_reading_too(judged, sample, precision, recall):
    """Measured: precision 100 % on all; recall 77 % where the rule was set, 86 and 85 % on the
    others.

    What is missed are mostly headings and single short sentences, which are too little to say; also
    sentences all in capitals, and some that quote a long title in the label's own script.
    """
    own = [(label == "contradicts", listed) for name, label, listed in judged if name == sample]
    right = sum(truth and listed for truth, listed in own)
    assert right >= precision * sum(listed for _, listed in own)
    assert right >= recall * sum(truth for truth, _ in own)
    assert right > 40
