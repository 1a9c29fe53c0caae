"""Vetting vocabularies for a domain from the command line."""

from __future__ import annotations

import csv
from pathlib import Path

import orjson
import pytest

from tests.unit.cli.conftest import DEMO, NOTICES, VOCABULARY

OTHER = str(DEMO / "vocabularies" / "harbour-wordpiece")
EVERYDAY = str(DEMO / "everyday.txt")
BOTH = ("--vocab", VOCABULARY, "--vocab", OTHER)


def test_it_writes_the_vetting_and_says_where(run):
    """The best candidate first; no line is wider than 80; the cautions are said."""
    said = run("domain", NOTICES, *BOTH, "--general", EVERYDAY)
    folder = Path("reports/safety_notices--harbour-bytelevel-and-1-more--domain")
    assert said.code == 0
    assert {path.name for path in folder.iterdir()} == {
        "domain.json", "candidates.csv", "penalty.csv", "kinds.csv", "terms.csv", "words.csv",
        "report.html",
    }  # fmt: skip
    flat = " ".join(said.out.split())
    assert f"Written to {folder}" in flat
    assert "do not measure how well a model does its task" in flat
    assert "may hold personal data" in flat
    assert max(map(len, said.out.splitlines())) <= 80
    assert flat.index("loses no character of this corpus") < flat.index("tokens a word")


def test_without_general_text_it_says_that_figures_stand_alone(run):
    """In the terminal and on the page."""
    said = run("domain", NOTICES, "--vocab", VOCABULARY, "--out", "d")
    assert "the figures stand alone" in " ".join(said.out.split())
    assert "the figures stand alone" in Path("d/report.html").read_text(encoding="utf-8")


def test_json_is_alone_on_standard_output(run):
    """`--json` prints `domain.json` and nothing else."""
    said = run("domain", NOTICES, *BOTH, "--out", "d", "--json")
    assert orjson.loads(said.out) == orjson.loads(Path("d/domain.json").read_bytes())


def test_the_tables_hold_what_the_document_holds(run):
    """A row a figure and side; a row a figure and candidate."""
    run("domain", NOTICES, *BOTH, "--general", EVERYDAY, "--out", "d", "--quiet")
    document = orjson.loads(Path("d/domain.json").read_bytes())
    tables = {}
    for name in ("candidates", "penalty"):
        with Path(f"d/{name}.csv").open(encoding="utf-8", newline="") as stream:
            tables[name] = list(csv.DictReader(stream))
    assert len(tables["penalty"]) == len(document["penalty"])
    for row, held in zip(tables["penalty"], document["penalty"], strict=True):
        assert (row["vocabulary"], row["figure"]) == (held["vocabulary"], held["figure"])
        ratio = held["ratio"]["value"]
        assert (float(row["ratio"]) if row["ratio"] else None) == ratio
    lost = [row for row in tables["candidates"] if row["figure"] == "lost_characters"]
    assert [int(row["numerator"]) for row in lost] == [
        own["lost_characters"]["numerator"] for own in document["candidates"]
    ]


def test_words_are_left_out_on_request(run):
    """`--no-excerpts`: no word of the corpus in the table or on the page."""
    run("domain", NOTICES, "--vocab", VOCABULARY, "--out", "d", "--quiet", "--no-excerpts")
    assert Path("d/words.csv").read_text(encoding="utf-8").count("\n") == 1
    assert "left out with --no-excerpts" in Path("d/report.html").read_text(encoding="utf-8")


def test_text_of_the_corpus_is_escaped_everywhere(run, tmp_path):
    """Markup in a word, and a terminal's escape sequence, come out as text."""
    hostile = "<script>alert(1)</script> \x1b[31mrot\x1b[0m </style>"
    path = tmp_path / "hostile.jsonl"
    path.write_bytes(b"".join(orjson.dumps({"text": f"{hostile} {n}"}) + b"\n" for n in range(5)))
    said = run("domain", str(path), "--vocab", VOCABULARY, "--out", "d")
    page = Path("d/report.html").read_text(encoding="utf-8")
    assert said.code == 0
    assert page.count("<script") == 1
    assert page.count("</style>") == 1
    assert "\x1b" not in page + said.out


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        (("--weigh", "speed=1"), "'speed' is nothing that can be weighed"),
        (("--width", "64", "--model", "layers=1,width=8,heads=1,inner=8"), "both name a width"),
        (("--general", "nowhere.txt"), "nowhere.txt"),
        (("--general", NOTICES, "--general-text", "body"), "body"),
    ],
)
def test_a_wrong_call_says_what_and_writes_nothing(run, arguments, told):
    """Exit code 2, one message, no folder."""
    said = run("domain", NOTICES, "--vocab", VOCABULARY, "--out", "d", *arguments)
    assert said.code == 2
    assert told in said.err
    assert said.out == ""
    assert not Path("d").exists()


def test_the_command_on_the_page_makes_the_same_again(run):
    """The line under "How is this repeated?" is run as it stands."""
    import html
    import re
    import shlex

    run("domain", NOTICES, *BOTH, "--general", EVERYDAY, "--weigh", "tokens=1,losses=20",
        "--model", "layers=1,width=8,heads=1,inner=8", "--by", "lang", "--out", "d",
        "--quiet")  # fmt: skip
    page = Path("d/report.html").read_text(encoding="utf-8")
    line = html.unescape(re.search(r"<pre><bdi>(.*?)</bdi></pre>", page, re.DOTALL)[1])
    words = shlex.split(line)
    assert words[0] == "auditor"
    run(*words[1:], "--out", "again", "--quiet")
    assert Path("again/domain.json").read_bytes() == Path("d/domain.json").read_bytes()
