"""Comparing audits from the command line: files, streams, exit codes, messages."""

from __future__ import annotations

import csv
from pathlib import Path

import jsonschema
import orjson
import pytest

from auditor.report import contract
from tests.unit.cli.conftest import NOTICES, VOCABULARY

OTHER = VOCABULARY.replace("bytelevel", "unigram")


@pytest.fixture
def audits(run):
    """Write audits: the notices' two halves, under one vocabulary, another, and both."""
    lines = Path(NOTICES).read_bytes().splitlines(keepends=True)
    halves = {"spring": lines[:240], "autumn": lines[240:]}
    for name, held in halves.items():
        Path(f"{name}.jsonl").write_bytes(b"".join(held))
    for out, corpus, *vocabularies in (
        ("s", "spring", VOCABULARY), ("a", "autumn", VOCABULARY), ("u", "spring", OTHER),
        ("both", "spring", VOCABULARY, OTHER), ("ua", "autumn", OTHER),
    ):  # fmt: skip
        named = [word for name in vocabularies for word in ("--vocab", name)]
        assert run("assess", f"{corpus}.jsonl", *named, "--by", "lang", "--out", out).code == 0
    return run


def test_two_corpora_under_one_vocabulary(audits):
    """Everything is written; the summary fits 80 columns; a second run replaces it."""
    for _ in range(2):
        said = audits("compare", "s", "a/audit.json")
        assert said.code == 0, said.err
    folder = Path("reports/s--to--a")
    assert {path.name for path in folder.iterdir()} == {
        "comparison.json", "differences.csv", "report.html",
    }  # fmt: skip
    assert f"Written to {folder}" in said.out
    assert max(map(len, said.out.splitlines())) <= 80
    document = orjson.loads((folder / "comparison.json").read_bytes())
    jsonschema.validate(document, contract.schema("comparison"))
    sides = [orjson.loads(Path(f"{name}/audit.json").read_bytes()) for name in "sa"]
    for own in document["differences"]:
        for side, audit in zip(("before", "after"), sides, strict=True):
            slices = audit["vocabularies"][0]["slices"][own["slice"]]
            figure = {**slices["figures"], **slices.get("usage", {})}[own["figure"]]
            assert own[side] == {end: figure[end] for end in ("value", "low", "high")}
    with (folder / "differences.csv").open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    assert len(rows) == len(document["differences"]) + 6 * len(document["lengths"])
    moved = document["pairs"][0]["words"]
    assert moved["counts"]["moved"] > 0
    assert "words.csv lists the words that cost most" in moved["note"]


def test_one_corpus_under_two_vocabularies(audits):
    """From two audits, or within one; the note says that paired intervals are narrower."""
    said = audits("compare", "s", "u", "--out", "c", "--json")
    one = orjson.loads(said.out)
    assert one == orjson.loads(Path("c/comparison.json").read_bytes())
    assert one["same_corpus"]
    assert {own["critical_distance"] for own in one["lengths"]} == {None}
    names = ("harbour-bytelevel", "harbour-unigram")
    call = ("compare", "both", "both", "--vocab", names[0], "--vocab-after", names[1])
    within = orjson.loads(audits(*call, "--json").out)
    assert Path("reports/harbour-bytelevel--to--harbour-unigram").is_dir()
    for figure in ("fertility", "truncated_documents"):
        found = [
            next(own for own in held["differences"] if own["figure"] == figure)["difference"]
            for held in (one, within)
        ]
        assert found[0] == found[1]
    assert "paired" in " ".join(one["notes"])


def test_vocabularies_in_common_are_paired(audits):
    """One of two is in the other audit."""
    assert audits("compare", "both", "a", "--out", "c", "--quiet").out == ""
    pairs = orjson.loads(Path("c/comparison.json").read_bytes())["pairs"]
    assert [(own["before"]["name"], own["same_vocabulary"]) for own in pairs] == [
        ("harbour-bytelevel", True)
    ]


def test_different_settings_are_named_and_can_be_allowed(audits):
    """Exit code 2 and nothing written; allowed, the report says so."""
    audits("assess", "autumn.jsonl", "--vocab", VOCABULARY, "--words", "whitespace", "--limit",
           "64", "--out", "w", "--quiet")  # fmt: skip
    said = audits("compare", "s", "w", "--out", "c")
    assert (said.code, Path("c").exists()) == (2, False)
    assert "words: 'icu' and 'whitespace'" in said.err
    assert "limit" in said.err
    assert "--allow-different-settings" in said.err
    allowed = audits("compare", "s", "w", "--out", "c", "--allow-different-settings")
    assert allowed.code == 0
    assert "The two audits differ in words" in " ".join(allowed.out.split())
    assert "The two audits differ in words" in Path("c/report.html").read_text()
    command = Path("c/report.html").read_text()
    assert "auditor compare s/audit.json w/audit.json --allow-different-settings" in command


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        (("s", "gone"), "gone: there is no audit"),
        (("spring.jsonl", "a"), "spring.jsonl: there is no audit"),
        (("s", "ua"), "corpus and vocabulary at once"),
        (("s", "a", "--vocab", "harbor"), "it holds no vocabulary 'harbor'"),
        (("both", "both", "--vocab-after", "harbour-unigrum"), "harbour-unigram"),
        (("s",), "AFTER"),
        (("s", "a", "--out", "spring.jsonl"), "there is a file of that name"),
        (("s", "a", "--out", "s"), "--overwrite"),
    ],
)
def test_what_cannot_be_compared_is_told(audits, arguments, told):
    """Exit code 2, the place, the remedy."""
    said = audits("compare", *arguments)
    assert said.code == 2
    assert told in said.err
    assert "Traceback" not in said.err
    assert not Path("reports").exists()


def test_nothing_in_common_is_told(audits):
    """Both sides' vocabularies are listed."""
    other = VOCABULARY.replace("bytelevel", "wordpiece")
    audits("assess", "autumn.jsonl", "--vocab", other, "--vocab", VOCABULARY.replace(
        "bytelevel", "sentencepiece"), "--out", "n", "--quiet")  # fmt: skip
    said = audits("compare", "s", "n")
    assert said.code == 2
    assert "no vocabulary in common (harbour-bytelevel; and harbour-wordpiece" in said.err
    assert "--vocab-after" in said.err


def test_tables_that_are_not_there_are_said(audits):
    """Without words.csv the rest is compared; `--no-excerpts` leaves words out."""
    Path("a/words.csv").unlink()
    said = audits("compare", "s", "a", "--out", "c")
    assert "no words.csv beside the audit after" in " ".join(said.out.split())
    assert orjson.loads(Path("c/comparison.json").read_bytes())["pairs"][0]["characters"]["counts"]
    audits("compare", "s", "s", "--out", "d", "--no-excerpts")
    words = orjson.loads(Path("d/comparison.json").read_bytes())["pairs"][0]["words"]
    assert (words["moved"], words["note"]) == ([], "left out on request")


@pytest.mark.parametrize(
    ("content", "told"),
    [
        (b"word,count\nkeel,2\n", "its columns are not"),
        (b"", "its columns are not"),
        (b"vocabulary,word,count,pieces,extra_tokens,broken,unknown\nharbour,keel,2\n", "row 1"),
        (
            b"vocabulary,word,count,pieces,extra_tokens,broken,unknown\nh,k,2,3,\xc2\xb2,b,no\n",
            "row 1",
        ),
        (b"vocabulary,word,count,pieces,extra_tokens,broken,unknown\n\xff\n", "utf-8"),
        (b'vocabulary,word,count,pieces,extra_tokens,broken,unknown\n"h', "cannot be read"),
    ],
)
def test_a_damaged_table_is_told(audits, content, told):
    """Never taken for words that vanished."""
    Path("a/words.csv").write_bytes(content)
    said = audits("compare", "s", "a")
    assert said.code == 2
    assert "a/words.csv: the table cannot be read" in said.err
    assert told in said.err


def test_words_that_look_like_absent_values_and_long_ones_are_words(audits):
    """`NA`, `null` and a word of 200,000 letters, written by an audit and read back."""
    usual = csv.field_size_limit()
    texts = ["NA null nan", "x" * 200_000]
    records = b"".join(orjson.dumps({"text": text}) + b"\n" for text in texts)
    Path("odd.jsonl").write_bytes(records)
    call = ("assess", "odd.jsonl", "--vocab", OTHER, "--out", "odd", "--quiet")
    assert audits(*call).code == 0
    assert audits("compare", "u", "odd", "--out", "c", "--quiet").code == 0
    words = orjson.loads(Path("c/comparison.json").read_bytes())["pairs"][0]["words"]
    found = {row["word"] for row in words["appeared"]}
    with Path("odd/words.csv").open(encoding="utf-8") as stream:
        lines = stream.read().splitlines()[1:]
    assert len(found) == words["counts"]["appeared"]
    assert {line.split(",")[1] for line in lines} == found
    assert csv.field_size_limit() == usual


def test_hostile_text_in_both_corpora(run):
    """Slices and words with tags and escape sequences, in every form that is written."""
    hostile = "</td><script>\x1b[31m\u202e"
    for name in ("one", "two"):
        records = [{"text": f"{hostile} buoy {name} {n}", "lang": hostile} for n in range(5)]
        Path(f"{name}.jsonl").write_bytes(b"".join(orjson.dumps(r) + b"\n" for r in records))
        run("assess", f"{name}.jsonl", "--text", "text", "--vocab", VOCABULARY, "--by", "lang",
            "--words", "whitespace", "--out", name, "--quiet")  # fmt: skip
    said = run("compare", "one", "two", "--out", "c")
    assert said.code == 0, said.err
    assert "\x1b" not in said.out
    assert "\u202e" not in said.out
    page = Path("c/report.html").read_text(encoding="utf-8")
    assert "<script>" not in page
    assert "\x1b" not in page
    with Path("c/differences.csv").open(encoding="utf-8", newline="") as stream:
        assert f"lang={hostile}" in {row["slice"] for row in csv.DictReader(stream)}


def test_help_names_every_option_and_an_example(run):
    """In 80 columns; both new commands stand in the list of commands."""
    said = run("compare", "--help")
    assert "--allow-different-settings" in said.out
    assert "auditor compare reports/spring/ reports/autumn/" in said.out
    assert max(map(len, said.out.splitlines())) <= 80
    assert max(map(len, run("check", "--help").out.splitlines())) <= 80
    listed = run("--help").out
    assert {"assess", "check", "compare"} <= set(listed.split())
