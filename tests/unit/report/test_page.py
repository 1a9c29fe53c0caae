"""The page: complete, safe whatever the corpus holds, usable without sight or colours."""

from __future__ import annotations

import hashlib
import re
from base64 import b64encode
from html.parser import HTMLParser
from itertools import pairwise

import pytest

from auditor.figures.catalogue import CATALOGUE, RELATIVE_TOKENS
from auditor.policy import judge, read_policy
from auditor.report import answers
from auditor.report.page import render
from auditor.report.questions import QUESTIONS
from tests.unit.report import material

VOID = {"meta", "link", "br", "img", "input", "hr"}


class Read(HTMLParser):
    """Collects what the tests ask of a page: elements, their attributes and their text."""

    def __init__(self, page: str) -> None:
        super().__init__()
        self.elements: list[tuple[str, dict[str, str | None]]] = []
        self.texts: dict[str, list[str]] = {}
        self.open: list[str] = []
        self.feed(page)
        self.close()

    def handle_starttag(self, tag, attrs):
        self.elements.append((tag, dict(attrs)))
        if tag not in VOID:
            self.open.append(tag)
            self.texts.setdefault(tag, []).append("")

    def handle_endtag(self, tag):
        assert self.open.pop() == tag

    def handle_data(self, data):
        for tag in set(self.open):
            self.texts[tag][-1] += data

    def attributes(self, name: str) -> list[str]:
        return [held[name] for _, held in self.elements if held.get(name)]


def page(*names: str) -> str:
    return render(material.audit(*names), material.worst(*names))


def test_every_element_is_closed():
    """The markup is well formed, whatever the corpus holds."""
    assert Read(page("harbour", material.HOSTILE)).open == []


def test_markup_of_the_corpus_stays_text():
    """A slice, a word, a file and a vocabulary that spell a script are shown, not run."""
    text = page(material.HOSTILE)
    read = Read(text)
    assert [tag for tag, _ in read.elements if tag in ("b", "link", "img")] == []
    assert [held for tag, held in read.elements if tag == "script"] == [
        {"type": "application/json", "id": "held"}, {},
    ]  # fmt: skip
    assert text.count("<style>") == text.count("</style>") == 1
    assert any("<script>alert('buoy')</script>" in found for found in read.texts["bdi"])


def test_no_control_character_comes_through():
    """Unprintable characters of the corpus are written as code points, and the page encodes."""
    text = page(f"harbour {material.UNSAFE}")
    text.encode("utf-8")
    assert re.findall(r"[\x00-\x09\x0b-\x1f\x7f-\x9f\u200b\u202e]", text) == []
    assert "⟨U+202E⟩" in text


def test_nothing_is_fetched():
    """No address but places in the page itself, and a policy that forbids the rest."""
    read = Read(page())
    assert all(target.startswith("#") for target in read.attributes("href"))
    assert read.attributes("src") == []
    digest = b64encode(hashlib.sha256(read.texts["script"][1].encode()).digest()).decode()
    policy = (
        f"default-src 'none'; script-src 'sha256-{digest}'; style-src 'unsafe-inline';"
        " img-src data:"
    )
    assert policy in read.attributes("content")


def test_every_figure_is_named_and_linked_to_its_definition():
    """Each figure of the catalogue stands in a table and leads to where it is defined."""
    read = Read(page("harbour", "tide"))
    linked, places = set(read.attributes("href")), read.attributes("id")
    names = [figure.name for figure in (*CATALOGUE, RELATIVE_TOKENS)]
    assert {f"#figure-{name}" for name in names} <= linked
    assert len(places) == len(set(places))
    assert {target[1:] for target in linked} <= set(places)


def test_each_figure_belongs_to_one_question():
    """No figure of the catalogue is asked for twice or left out."""
    held = [name for question in QUESTIONS for name in question.figures]
    assert sorted(held) == sorted(
        [*(figure.name for figure in CATALOGUE), "relative_tokens", "repeated_documents"]
    )


def test_undefined_is_a_dash_with_its_note():
    """A figure without a value says why."""
    rows = ["".join(row.split()) for row in Read(page()).texts["tr"]]
    assert "lossless_documents–thevocabularyhasnodecoder" in rows


def test_headings_come_in_order():
    """One first heading, the questions in order, and no level left out."""
    read = Read(page("harbour", "tide"))
    levels = [int(tag[1]) for tag, _ in read.elements if re.fullmatch("h[1-6]", tag)]
    assert levels.count(1) == 1
    assert levels[0] == 1
    assert all(below - above <= 1 for above, below in pairwise(levels))
    assert read.texts["h2"][0] == "At a glance"
    assert read.texts["h2"][1:8] == [question.title for question in QUESTIONS]


def test_tables_and_drawings_speak():
    """Tables have a caption, headings a scope, drawings a name; scrolled parts take the focus."""
    read = Read(page("harbour", "tide"))
    elements = read.elements
    assert len(read.texts["caption"]) == len(read.texts["table"])
    assert all(held.get("scope") for tag, held in elements if tag == "th")
    images = [held for tag, held in elements if tag == "svg" and held.get("role") == "img"]
    places = set(read.attributes("id"))
    assert len(images) == 9
    assert all(set(held["aria-labelledby"].split()) <= places for held in images)
    wide = [held for _, held in elements if held.get("class") == "wide"]
    assert all(held["tabindex"] == "0" and held["aria-label"] for held in wide)
    assert {"main", "nav", "header", "footer"} <= {tag for tag, _ in elements}


def test_the_same_audit_gives_the_same_page():
    """Nothing of the clock or the machine enters."""
    assert page("harbour", "tide") == page("harbour", "tide")


@pytest.mark.parametrize(("slices", "names", "most"), [(10, 1, 300_000), (100, 3, 3_000_000)])
def test_the_page_stays_small(monkeypatch, slices, names, most):
    """The size follows the slices and vocabularies, within what a mail takes."""
    monkeypatch.setattr(material, "SLICES", ("lang=th", *(f"lang=l{n}" for n in range(slices))))
    vocabularies = [f"harbour {number}" for number in range(names)]
    assert len(page(*vocabularies).encode()) < most


def test_many_slices_are_all_tabled_and_some_drawn(monkeypatch):
    """Of 530 slices 60 are drawn, and a note says so; the table holds each."""
    monkeypatch.setattr(material, "SLICES", ("lang=th", *(f"lang=l{n}" for n in range(529))))
    read = Read(page())
    rows = [row for row in read.texts["tr"] if row.strip().startswith("lang=")]
    drawn = [held for tag, held in read.elements if tag == "svg" and held.get("class") == "dot"]
    losses = 6  # of the one vocabulary, by kind
    assert (len(rows), len(drawn)) == (530, 60 + losses)
    assert any(
        "45 costliest and the 15 cheapest of 530" in told for told in read.texts["figcaption"]
    )


def test_excerpts_carry_a_caution_and_can_be_left_out():
    """Words come with a caution about personal data; without them there is none."""
    assert answers.EXCERPTS in page()
    without = render(material.audit(), [])
    assert answers.EXCERPTS not in without
    assert "cal·ib·ration" not in without


def test_lost_words_have_their_table():
    """Words that hold an unknown token are shown apart, however little they cost."""
    captions = [" ".join(caption.split()) for caption in Read(page()).texts["caption"]]
    assert "The words lost most often, harbour" in captions


def test_a_vocabulary_without_a_limit_is_drawn():
    """Without a limit no line is drawn and the caption says so."""
    text = render(material.audit(limit=None), [])
    assert "No limit is known." in text
    assert 'class="limit"' not in text


def colours(block: str) -> dict[str, str]:
    return dict(re.findall(r"--(\w+): (#[0-9a-f]{6})", block))


def luminance(colour: str) -> float:
    """Relative luminance as WCAG 2.2 defines it."""
    channels = [int(colour[place : place + 2], 16) / 255 for place in (1, 3, 5)]
    red, green, blue = (
        value / 12.92 if value <= 0.04045 else ((value + 0.055) / 1.055) ** 2.4
        for value in channels
    )
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


@pytest.mark.parametrize("scheme", [0, 1])
def test_colours_contrast(scheme):
    """Text reaches 4.5:1 and the drawings 3:1 (WCAG 2.2, 1.4.3 and 1.4.11), light and dark."""
    found = [
        held for held in map(colours, re.findall(r":root \{(.*?)\}", page(), re.DOTALL)) if held
    ]
    held = found[scheme]

    def contrast(first: str, second: str) -> float:
        light, dark = sorted((luminance(held[first]), luminance(held[second])), reverse=True)
        return (light + 0.05) / (dark + 0.05)

    for ink in ("ink", "quiet", "strong", "over"):
        assert contrast(ink, "paper") >= 4.5
        assert contrast(ink, "panel") >= 4.5
    assert contrast("mark", "paper") >= 3


def test_a_policy_comes_first_and_is_safe(tmp_path):
    """Its verdicts stand before the answers, linked to definitions, and nothing in them is run."""
    (tmp_path / "limits.toml").write_text(
        "[all]\nfertility = {min = 1}\np95 = {max = 600}\n"
        '["lang=*"]\ncontinued_words = {max = 0.13, on = "interval"}\n'
    )
    audit = material.audit(material.HOSTILE, f"tide {material.UNSAFE}")
    verdicts = {**judge(read_policy(tmp_path / "limits.toml"), audit), "policy": material.HOSTILE}
    text = render(audit, [], policy=verdicts)
    read = Read(text)
    assert read.open == []
    assert [tag for tag, _ in read.elements if tag in ("b", "link", "img")] == []
    assert [tag for tag, _ in read.elements].count("script") == 2
    assert re.findall(r"[\x00-\x09\x0b-\x1f\x7f-\x9f\u200b\u202e]", text) == []
    places = read.attributes("id")
    assert {target[1:] for target in read.attributes("href")} <= set(places)
    assert len(places) == len(set(places))
    assert read.texts["h2"][0] == "Does it keep to the policy?"
    begun = (re.match("FAILS|undecided|holds", row.strip()) for row in read.texts["tr"])
    assert [word[0] for word in begun if word] == [
        *["FAILS"] * 2,
        *["undecided"] * 12,
        *["holds"] * 2,
    ]
    assert "further documents are like these" in text
