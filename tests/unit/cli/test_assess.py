"""The main job from the command line."""

from __future__ import annotations

import gzip
from pathlib import Path

import orjson
import pyarrow.parquet as pq
import pytest

from tests.unit.cli.conftest import NOTICES, VOCABULARY

FILES = {
    "audit.json", "run.json", "figures.csv", "lengths.csv", "words.csv", "characters.csv",
    "documents.parquet", "set_aside.jsonl", "report.html",
}  # fmt: skip


def test_it_writes_the_whole_audit_and_says_where(run):
    """The default folder is named by corpus and vocabulary; the paths end the summary."""
    said = run("assess", NOTICES, "--vocab", VOCABULARY, "--by", "lang")
    folder = Path("reports/safety_notices--harbour-bytelevel")
    assert said.code == 0
    assert {path.name for path in folder.iterdir()} == FILES
    assert "Written to reports/safety_notices--harbour-bytelevel" in said.out
    assert max(map(len, said.out.splitlines())) <= 80


def test_it_can_be_run_twice(run):
    """An earlier audit in the folder is replaced, and the folder beside it left clean."""
    for _ in range(2):
        assert run("assess", NOTICES, "--vocab", VOCABULARY).code == 0
    assert [path.name for path in Path("reports").iterdir()] == [
        "safety_notices--harbour-bytelevel"
    ]


def test_a_folder_with_other_files_is_refused_unless_allowed(run):
    """What no audit wrote is never deleted by chance."""
    Path("out").mkdir()
    Path("out/thesis.txt").write_text("mine")
    said = run("assess", NOTICES, "--vocab", VOCABULARY, "--out", "out")
    assert (said.code, Path("out/thesis.txt").read_text()) == (2, "mine")
    assert "thesis.txt" in said.err
    assert "--overwrite" in said.err
    assert run("assess", NOTICES, "--vocab", VOCABULARY, "--out", "out", "--overwrite").code == 0


def test_json_is_alone_on_standard_output(run):
    """`--json` prints `audit.json` and nothing else."""
    said = run("assess", NOTICES, "--vocab", VOCABULARY, "--out", "a", "--json")
    assert orjson.loads(said.out) == orjson.loads(Path("a/audit.json").read_bytes())


def test_quiet_prints_nothing(run):
    """`--quiet` leaves both streams empty."""
    said = run("assess", NOTICES, "--vocab", VOCABULARY, "--out", "a", "--quiet")
    assert (said.code, said.out, said.err) == (0, "", "")


def test_documents_can_be_found_again(run):
    """`documents.parquet` holds each document's place and tokens, which add up to the total."""
    run("assess", NOTICES, "--vocab", VOCABULARY, "--by", "lang", "--out", "a")
    table = pq.read_table("a/documents.parquet").to_pydict()
    audit = orjson.loads(Path("a/audit.json").read_bytes())
    counts = audit["vocabularies"][0]["slices"]["all"]["counts"]
    assert sum(table["harbour-bytelevel:tokens"]) == counts["tokens"]
    assert table["line"] == list(range(1, 481))
    assert set(table["slice:lang"]) == set(audit["vocabularies"][0]["slices"]) - {"all"}


def test_excerpts_can_be_left_out(run):
    """With `--no-excerpts` no word of the corpus stands in the page or in words.csv."""
    run("assess", NOTICES, "--vocab", VOCABULARY, "--out", "a", "--no-excerpts")
    assert len(Path("a/words.csv").read_text().splitlines()) == 1
    assert "·" not in Path("a/report.html").read_text().split("<main")[1].split("Definitions")[0]


def test_several_vocabularies_stand_side_by_side(run):
    """`relative_tokens` of the first one is 1, with tokens over tokens."""
    other = VOCABULARY.replace("bytelevel", "wordpiece")
    run("assess", NOTICES, "--vocab", VOCABULARY, "--vocab", other, "--out", "a", "--quiet")
    first, second = orjson.loads(Path("a/audit.json").read_bytes())["vocabularies"]
    figures = [v["slices"]["all"]["figures"]["relative_tokens"] for v in (first, second)]
    assert figures[0]["value"] == 1.0
    assert figures[1]["numerator"] == second["slices"]["all"]["counts"]["tokens"]
    assert figures[1]["denominator"] == first["slices"]["all"]["counts"]["tokens"]


def test_a_compressed_corpus_gives_the_same_digest(run):
    """gzip changes the source's name and nothing that is counted."""
    Path("n.jsonl.gz").write_bytes(gzip.compress(Path(NOTICES).read_bytes()))
    for name, corpus in (("a", NOTICES), ("b", "n.jsonl.gz")):
        assert run("assess", corpus, "--vocab", VOCABULARY, "--out", name).code == 0
    one, other = (orjson.loads(Path(n, "audit.json").read_bytes()) for n in "ab")
    assert one["vocabularies"] == other["vocabularies"]
    assert one["corpus"]["digest"] == other["corpus"]["digest"]


@pytest.mark.parametrize("option", ["--text", "--by", "--limit", "--whole", "--batch-bytes"])
def test_help_names_every_option_and_an_example(run, option):
    """Help reads in 80 columns and ends with an example."""
    said = run("assess", "--help")
    assert option in said.out
    assert "auditor assess notes.jsonl --vocab" in said.out
    assert max(map(len, said.out.splitlines())) <= 80


def test_versions_are_named(run):
    """`--version` names what a figure depends on."""
    said = run("--version")
    assert {"auditor", "tokenizers", "icu", "unicode"} <= {
        line.split()[0] for line in said.out.splitlines()
    }
