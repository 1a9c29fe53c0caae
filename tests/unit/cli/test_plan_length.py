"""Length planning from the command line."""

from __future__ import annotations

import csv
from pathlib import Path

import orjson
import pytest

from tests.unit.cli.conftest import DEMO, NOTICES, VOCABULARY


def test_it_plans_a_corpus_and_says_where(run):
    """The default folder is named by corpus and vocabulary; no line is wider than 80."""
    said = run("plan-length", NOTICES, "--vocab", VOCABULARY, "--by", "lang")
    folder = Path("reports/safety_notices--harbour-bytelevel--length-plan")
    assert said.code == 0
    assert {path.name for path in folder.iterdir()} == {"plan.json", "plan.csv", "report.html"}
    assert f"Written to {folder}" in said.out
    assert max(map(len, said.out.splitlines())) <= 80


def test_it_plans_an_audit_by_folder_or_file_without_the_corpus(run):
    """The corpus may be gone; the audit's own name is in the folder's."""
    corpus = Path("notices.jsonl")
    corpus.write_bytes(Path(NOTICES).read_bytes())
    assert run("assess", "notices.jsonl", "--vocab", VOCABULARY, "--out", "first").code == 0
    corpus.unlink()
    assert run("plan-length", "first").code == 0
    assert run("plan-length", "first/audit.json", "--out", "again").code == 0
    written = [
        Path(folder, "plan.json").read_bytes() for folder in ("reports/first--length-plan", "again")
    ]
    assert written[0] == written[1]


def test_an_audit_of_several_vocabularies_asks_which(run):
    """Never the first by chance; the name of one is enough."""
    other = str(DEMO / "vocabularies" / "harbour-wordpiece")
    run("assess", NOTICES, "--vocab", VOCABULARY, "--vocab", other, "--out", "a")
    said = run("plan-length", "a")
    assert said.code == 2
    assert "harbour-bytelevel, harbour-wordpiece" in said.err
    said = run("plan-length", "a", "--vocab", "harbour-wordpiece", "--json")
    assert orjson.loads(said.out)["vocabulary"]["name"] == "harbour-wordpiece"


def test_json_is_alone_on_standard_output(run):
    """`--json` prints `plan.json` and nothing else."""
    said = run("plan-length", NOTICES, "--vocab", VOCABULARY, "--out", "p", "--json")
    assert orjson.loads(said.out) == orjson.loads(Path("p/plan.json").read_bytes())


def test_the_table_holds_every_candidate_and_slice(run):
    """One row a number; a figure's interval stands in its row."""
    run("plan-length", NOTICES, "--vocab", VOCABULARY, "--by", "lang", "--out", "p", "--quiet")
    plan = orjson.loads(Path("p/plan.json").read_bytes())
    with Path("p/plan.csv").open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    held = {(int(row["length"]), row["slice"], row["figure"]): row for row in rows}
    for own in plan["candidates"]:
        for key, part in {"all": own, **own["slices"]}.items():
            row = held[own["length"], key, "truncated_documents"]
            figure = part["truncated_documents"]
            assert (int(row["numerator"]), float(row["value"])) == (
                figure["numerator"], figure["value"],
            )  # fmt: skip
        assert (
            int(held[own["length"], "all", "packs.best_fit.packs"]["value"])
            == (own["packs"]["best_fit"]["packs"])
        )


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        ((NOTICES,), "--vocab"),
        ((NOTICES, "--vocab", VOCABULARY, "--candidates", "a lot"), "256,512"),
        ((NOTICES, "--vocab", VOCABULARY, "--candidates", "2"), "no room for a token"),
        ((NOTICES, "--vocab", VOCABULARY, "--accept-truncated", "few"), "1% or 0.01"),
        ((NOTICES, "--vocab", VOCABULARY, "--accept-truncated", "100%"), "below 100%"),
        ((NOTICES, "--vocab", VOCABULARY, "--overlap", "5000"), "never advance"),
        ((NOTICES, "--vocab", VOCABULARY, "--pair", "answer"), "no field answer"),
        ((NOTICES, "--vocab", VOCABULARY, "--model", "layers=2,width=7"), "heads, inner"),
        (("-", "--vocab", VOCABULARY), "read only once"),
        (("first", "--pair", "answer"), "an audit holds no texts"),
        (("first", "--vocab", "other"), "holds no vocabulary other"),
        (("cut.json",), "cannot be read"),
        (("old.json",), "version 0"),
    ],
)
def test_what_cannot_be_done_is_said_and_nothing_written(run, arguments, told):
    """Each message names the option or the place; the exit code is 2."""
    run("assess", NOTICES, "--vocab", VOCABULARY, "--out", "first", "--quiet")
    whole = Path("first/audit.json").read_bytes()
    Path("cut.json").write_bytes(whole[: len(whole) // 2])
    Path("old.json").write_bytes(whole.replace(b'"version": 1', b'"version": 0', 1))
    said = run("plan-length", *arguments, "--out", "p")
    assert (said.code, Path("p").exists()) == (2, False)
    assert told in " ".join(said.err.split())


def test_a_folder_with_other_files_is_refused(run):
    """An audit is not replaced by a plan, nor anything else."""
    run("assess", NOTICES, "--vocab", VOCABULARY, "--out", "a", "--quiet")
    said = run("plan-length", "a", "--out", "a")
    assert said.code == 2
    assert Path("a/audit.json").exists()
    assert "--overwrite" in said.err
