"""The summary for a terminal: in order, within its width, and safe whatever the corpus holds."""

from __future__ import annotations

from pathlib import Path

import jsonschema
import pytest
import regex
from rich.cells import cell_len

from auditor.policy import judge, read_policy
from auditor.report import answers, contract
from auditor.report.questions import QUESTIONS
from auditor.report.terminal import summary
from tests.unit.report import material

FILES = [Path("reports/notes--harbour/audit.json"), Path("reports/notes--harbour/report.html")]


def told(*names: str, **options) -> str:
    given = {"files": FILES, "colour": False, "worst": material.worst(*names), **options}
    return summary(material.audit(*names), **given)


def test_the_material_follows_the_schema():
    """What the tests render is a document that a run could write."""
    jsonschema.validate(material.audit("harbour", "tide"), contract.schema())


@pytest.mark.parametrize("vocabularies", [1, 2, 3, 5])
def test_every_line_fits(vocabularies):
    """Wide and combining scripts, long names and hostile keys stay within 80 cells."""
    names = [f"{material.WIDE}{number}" for number in range(vocabularies)]
    lines = told(*names).splitlines()
    assert max(map(cell_len, lines)) <= 80


def test_a_narrow_window_is_kept_to():
    """Nothing reaches beyond a window of 60 cells."""
    assert max(map(cell_len, told("harbour", "tide", width=60).splitlines())) <= 60


def test_no_control_character_comes_through():
    """Corpus text cannot move the cursor, ring the bell or turn the writing direction."""
    text = told(f"harbour{material.UNSAFE}", "tide")
    assert regex.findall(r"[\p{C}--\n]|[\p{Zl}\p{Zp}]", text, flags=regex.V1) == []


def test_markup_in_the_corpus_is_shown_as_written():
    """Square brackets and colons are text, neither styles nor pictures."""
    assert "[bold]gale[/bold] :warning:: bpe" in told("[bold]gale[/bold] :warning:")


def test_questions_come_in_order():
    """Every question is asked once, in the order of the design."""
    lines = told().splitlines()
    titles = [question.title for question in QUESTIONS]
    assert [line for line in lines if line in titles] == titles


def test_colour_is_asked_for():
    """Escape sequences appear with colour and never without."""
    assert "\x1b[" in told(colour=True)
    assert "\x1b" not in told(colour=False)


def test_undefined_is_a_dash_with_its_reason():
    """A figure without a value says why."""
    assert "Lossless documents: – (the vocabulary has no decoder)." in told()
    assert "– (no words in this slice)" in told()


def test_the_costliest_slices_and_the_cheapest_are_named():
    """Of the slices by language the five costliest stand first, then the cheapest defined."""
    text = told().split("Which slices pay more?")[1]
    assert "6.500 (6.450 to 6.550); 12.0% cut" in text
    assert text.index("6.500 (") < text.index("5.500 (") < text.index("1.500 (")


def test_cautions_are_said_when_they_apply():
    """Unequal cost and cut text carry a caution; without slices and cuts there is none."""
    flat = " ".join(told().split())
    assert answers.LANGUAGES_DIFFER in flat
    assert answers.CUT_IS_LOST in flat
    plain = material.audit()
    plain["vocabularies"][0]["slices"] = {"all": material.a_slice(1.2) | {
        "usage": plain["vocabularies"][0]["slices"]["all"]["usage"]}}  # fmt: skip
    figures = plain["vocabularies"][0]["slices"]["all"]["figures"]
    figures["truncated_documents"] = material.value(0.0, 0.0, 0.02)
    quiet = " ".join(summary(plain, files=[], colour=False).split())
    assert answers.LANGUAGES_DIFFER not in quiet
    assert answers.CUT_IS_LOST not in quiet


def test_the_folder_is_named_once():
    """What was written stands under its common folder."""
    text = told()
    assert text.count("reports/notes--harbour") == 1
    assert "audit.json, report.html" in text


def test_words_without_excerpts_are_not_shown():
    """Without the worst words no word of the corpus and no caution about them appears."""
    text = told(worst=())
    assert "cal·ib·ration" not in text
    assert "personal data" not in text


def test_a_policy_comes_first_and_fits(tmp_path):
    """What fails stands at the top, within 80 cells, without control characters."""
    (tmp_path / "limits.toml").write_text(
        '[all]\nfertility = {min = 1}\n["lang=*"]\nfertility = {max = 1.6, on = "interval"}\n'
    )
    audit = material.audit(f"harbour{material.UNSAFE}", material.WIDE)
    verdicts = judge(read_policy(tmp_path / "limits.toml"), audit)
    text = summary(audit, files=FILES, colour=False, policy=verdicts)
    assert max(map(cell_len, text.splitlines())) <= 80
    assert regex.findall(r"[\p{C}--\n]|[\p{Zl}\p{Zp}]", text, flags=regex.V1) == []
    assert text.index("FAILS: fertility in all") < text.index(QUESTIONS[0].title)
    assert "undecided: fertility in lang=th under" in text
    assert "no words in this slice" in " ".join(text.split())
