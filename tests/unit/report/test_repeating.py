"""What is needed to make an audit again."""

from __future__ import annotations

import shlex

from auditor.report.repeating import blocks, command, command_notes
from tests.unit.report import material


def test_the_command_gives_back_what_was_asked():
    """Quoted for a shell, it names files, vocabularies and every setting that is not usual."""
    audit = material.audit("harbour", "it's tide")
    words = shlex.split(command(audit))
    assert words == [
        "auditor", "assess", *audit["corpus"]["sources"], "--vocab", "models/harbour",
        "--vocab", "models/it's tide", "--text", "note", "--by", "lang", "--by", "station",
        "--limit", "128",
    ]  # fmt: skip


def test_many_files_are_not_listed():
    """Eleven files are called CORPUS, and a note says where they are listed."""
    audit = material.audit()
    audit["corpus"]["sources"] = [f"notes-{number}.txt" for number in range(11)]
    assert shlex.split(command(audit))[2] == "CORPUS"
    assert command_notes(audit) == ["CORPUS stands for 11 files, listed in the JSON beside."]


def test_a_pattern_is_named_as_a_file():
    """The pattern itself stands under the settings, the command asks for its file."""
    audit = material.audit()
    audit["settings"]["pattern"] = r"\p{L}+"
    assert command(audit).endswith("--limit 128 --pattern FILE")
    assert len(command_notes(audit)) == 1
    assert ("pattern", r"\p{L}+") in dict(blocks(audit))["Settings"]


def test_every_setting_and_version_is_told():
    """Nothing that changes a number, or made it, is left out."""
    audit = material.audit()
    told = dict(blocks(audit))
    assert [name for name, _ in told["Settings"]] == list(audit["settings"])
    assert [name for name, _ in told["Made with"]] == list(audit["made_with"])
