"""Policies from the command line: exit codes, where verdicts go, what is written."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from pathlib import Path

import jsonschema
import orjson
import pytest

from auditor.report import contract
from tests.unit.cli.conftest import NOTICES, VOCABULARY

AUDIT = ("assess", NOTICES, "--vocab", VOCABULARY, "--by", "lang", "--out", "a")
HELD = "[all]\nfertility = {max = 9}\n"
FAILED = "[all]\nfertility = {max = 1}\n"
UNDECIDED = "[all]\nunknown_words = {max = 0.1}\n"  # a byte-level vocabulary has no unknown entry


@pytest.fixture
def policy(tmp_path):
    def write(text: str) -> str:
        (tmp_path / "limits.toml").write_text(text, encoding="utf-8")
        return "limits.toml"

    return write


@pytest.mark.parametrize(
    ("text", "options", "code"),
    [
        (HELD, (), 0),
        (FAILED, (), 1),
        (UNDECIDED, (), 0),
        (UNDECIDED, ("--undecided", "fail"), 1),
        (HELD, ("--undecided", "fail"), 0),
        (HELD + "unknown_words = {max = 0.1}\ntruncated_documents = {max = 1}\n", (), 0),
    ],
)
def test_the_exit_code_says_whether_it_is_met(run, policy, text, options, code):
    """1 when a bound fails, and on request when one is undecided; `check` says the same."""
    given = ("--policy", policy(text), *options)
    said = run(*AUDIT, *given)
    assert said.code == code
    checked = run("check", "a", *given)
    assert checked.code == code
    assert run("check", "a/audit.json", *given).out == checked.out
    headline = next(line for line in said.out.splitlines() if line.startswith("Policy limits.toml"))
    assert headline in checked.out
    assert max(map(len, (said.out + checked.out).splitlines())) <= 80


def test_verdicts_stand_beside_the_audit_and_on_the_page(run, policy):
    """`policy.json` follows its schema; `audit.json` knows nothing of a policy."""
    run(*AUDIT, "--quiet")
    plain = Path("a/audit.json").read_bytes()
    assert not Path("a/policy.json").exists()
    assert "policy" not in Path("a/report.html").read_text()
    run(*AUDIT, "--policy", policy(FAILED), "--quiet")
    assert Path("a/audit.json").read_bytes() == plain
    held = orjson.loads(Path("a/policy.json").read_bytes())
    jsonschema.validate(held, contract.schema("policy"))
    assert held["outcome"] == "fail"
    page = Path("a/report.html").read_text()
    assert page.index("Does it keep to the policy?") < page.index("Does this vocabulary fit")
    assert "FAILS" in page
    run(*AUDIT, "--quiet")  # and an audit without one replaces it
    assert not Path("a/policy.json").exists()


def test_json_stays_alone_on_standard_output(run, policy):
    """The verdicts go to standard error then; `check --json` prints `policy.json`."""
    said = run(*AUDIT, "--policy", policy(FAILED), "--json")
    assert said.code == 1
    assert orjson.loads(said.out) == orjson.loads(Path("a/audit.json").read_bytes())
    assert "FAILS: fertility in all" in said.err
    checked = run("check", "a", "--policy", "limits.toml", "--json")
    assert orjson.loads(checked.out) == orjson.loads(Path("a/policy.json").read_bytes())
    assert checked.err == ""


def test_quiet_tells_nothing_but_what_fails(run, policy):
    """On standard error, so that a job says why it stopped."""
    for name, told in ((HELD, False), (UNDECIDED, False), (FAILED, True)):
        for call in (AUDIT, ("check", "a")):
            said = run(*call, "--policy", policy(name), "--quiet")
            assert said.out == ""
            assert ("FAILS: fertility in all" in said.err) is told
            assert bool(said.err) is told


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("[all]\nfertilty = {max = 2}\n", "Nearest: fertility"),
        ('["tongue=en"]\nfertility = {max = 2}\n', "--by"),
        ('[all]\nfertility = {max = 2, vocabulary = "harbour"}\n', "Nearest: harbour-bytelevel"),
    ],
)
def test_what_is_wrong_is_told_before_anything_is_measured(run, policy, text, told):
    """Exit code 2, the place, the remedy; nothing is written."""
    said = run(*AUDIT, "--policy", policy(text))
    assert (said.code, Path("a").exists()) == (2, False)
    assert told in said.err
    assert "limits.toml: [" in said.err


def test_an_audit_is_kept_when_the_corpus_lacks_a_slice_that_the_policy_names(run, policy):
    """What took long to measure is written, and the message says how to go on."""
    text = '["lang=eng"]\nfertility = {max = 2}\n'
    said = run(*AUDIT, "--policy", policy(text))
    assert said.code == 2
    assert "Nearest: lang=en" in said.err
    assert "auditor check" in said.err
    assert Path("a/audit.json").exists()
    assert not Path("a/policy.json").exists()
    assert run("check", "a", "--policy", "limits.toml").code == 2


def test_check_needs_an_audit_and_a_policy(run, policy):
    """Both are named when they are missing."""
    run(*AUDIT, "--quiet")
    assert "--policy" in run("check", "a").err
    said = run("check", "gone", "--policy", policy(HELD))
    assert (said.code, "gone: there is no audit" in said.err) == (2, True)
    missing = run("check", "a", "--policy", "none.toml")
    assert (missing.code, "none.toml" in missing.err) == (2, True)


def test_hostile_text_neither_moves_the_cursor_nor_becomes_markup(run, policy):
    """A slice that holds an escape sequence and a tag, in summary, page and error message."""
    hostile = "</td><script>\x1b[31m\u202e"
    record = orjson.dumps({"text": "The buoy is adrift.", "lang": hostile}) + b"\n"
    Path("notes.jsonl").write_bytes(record)
    call = ("assess", "notes.jsonl", "--text", "text", "--vocab", VOCABULARY, "--by", "lang",
            "--out", "a")  # fmt: skip
    said = run(*call, "--policy", policy('["lang=*"]\nfertility = {max = 1}\n'))
    assert said.code == 1
    assert "\x1b" not in said.out
    assert "⟨U+001B⟩[31m⟨U+202E⟩" in said.out
    page = Path("a/report.html").read_text()
    assert page.count("<script>") == 1
    assert "&lt;script&gt;⟨U+001B⟩" in page
    for name in (r"lang=\u001b[31m", "lang=</td>"):
        wrong = run("check", "a", "--policy", policy(f'["{name}"]\nfertility = {{max = 1}}\n'))
        assert wrong.code == 2
        assert "\x1b" not in wrong.err + wrong.out


@pytest.mark.parametrize(("bound", "code"), [("1", 0), ("0.01", 1)])
def test_the_example_of_the_readme_works(tmp_path, monkeypatch, bound, code):
    """Its policy and its lines of shell, run as they stand, but for what the bounds are."""
    monkeypatch.chdir(tmp_path)
    readme = Path(__file__).parents[3].joinpath("README.md").read_text(encoding="utf-8")
    policy, _, rest = readme.split("```toml\n")[1].partition("```")
    lines = rest.split("```sh\n")[1].split("```")[0]
    for name in ("p95", "truncated", "byte_spelled"):
        assert name in policy
    met = re.sub(r"max = 0\.\d+", f"max = {bound}", policy).replace("max = 512", "max = 9999")
    Path("limits.toml").write_text(re.sub(r"max = (2\.5|3)\b", "max = 99", met))
    Path("notes.jsonl").symlink_to(NOTICES)
    Path("my-model").symlink_to(VOCABULARY)
    Path("auditor").write_text(f'#!/bin/sh\nexec "{sys.executable}" -m auditor "$@"\n')
    Path("auditor").chmod(0o755)
    paths = {
        "PATH": f"{tmp_path}:{os.environ['PATH']}",
        "PYTHONPATH": str(Path(NOTICES).parents[1]),
    }
    done = subprocess.run(
        ["sh", "-c", lines],
        env={**os.environ, **paths},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == code, done.stdout + done.stderr
    assert ("every bound holds" in done.stdout.splitlines()) is (code == 0)
    assert Path("audit/policy.json").exists()
