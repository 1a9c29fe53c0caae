"""The comparison for a person: page, terminal and table, safe whatever the corpora hold."""

from __future__ import annotations

import csv
import html
import io
import re
from itertools import pairwise
from pathlib import Path

import pytest
import regex
from rich.cells import cell_len

from auditor.comparing.document import Tables
from auditor.report import answers, comparison_answers, comparison_page, formatting
from auditor.report.comparison_charts import Axis, Point, points
from auditor.report.comparison_tables import differences
from auditor.report.comparison_terminal import summary
from auditor.report.page import environment
from auditor.report.tables import as_csv
from tests.unit.comparing.test_comparing import compared, named, other, set_figure
from tests.unit.report import material
from tests.unit.report.test_page import Read

FILES = [Path("reports/spring--to--autumn/comparison.json")]
CONTROL = r"[\x00-\x09\x0b-\x1f\x7f-\x9f\u200b\u202e]"


def tables(name: str) -> Tables:
    """Return tables whose words and characters are hostile."""
    words = [
        {"vocabulary": name, "word": text, "extra_tokens": "9", "broken": text[:4]}
        for text in (material.HOSTILE, material.UNSAFE, "mooring\x1b[2J")
    ]
    character = {"vocabulary": name, "character": "\x1b", "code_point": "U+001B", "name": "",
                 "script": "Common", "count": "3", "fate": "unknown"}  # fmt: skip
    mark = {**character, "character": "\u0301", "code_point": "U+0301",
            "name": "COMBINING ACUTE ACCENT"}  # fmt: skip
    return Tables(words, [character, mark])


def document(*, hostile: bool = False, several: bool = False):
    """Return a comparison in which fertility rose, slices come and go, and words moved."""
    names = [f"{material.HOSTILE}{material.UNSAFE}" if hostile else "harbour"]
    names += [material.WIDE] if several else []
    before, after = named(*names), other(named(*names))
    set_figure(after, "fertility", material.value(2.4, 2.3, 2.5))
    held = after["vocabularies"][0]["slices"]
    held["lang=fr"] = held.pop("station=3")
    made = compared(before, after, tables=(Tables([], []), tables(names[0])))
    made["settings"]["different_settings"] = [
        {"what": "words", "before": "icu", "after": material.HOSTILE if hostile else "whitespace"}
    ]
    return made


@pytest.mark.parametrize("several", [False, True])
def test_the_page_is_well_formed_and_nothing_in_it_is_run(several):
    """Markup of slices, vocabularies, words and settings stays text; nothing is fetched."""
    text = comparison_page.render(document(hostile=True, several=several))
    read = Read(text)
    assert read.open == []
    assert [tag for tag, _ in read.elements if tag in ("script", "b", "link", "img")] == []
    assert text.count("<style>") == text.count("</style>") == 1
    assert re.findall(CONTROL, text) == []
    text.encode("utf-8")
    assert any("<script>alert('buoy')</script>" in found for found in read.texts["bdi"])
    places = read.attributes("id")
    assert len(places) == len(set(places))
    assert {target[1:] for target in read.attributes("href")} <= set(places)
    assert all(target.startswith("#") for target in read.attributes("href"))
    assert "default-src 'none'; style-src 'unsafe-inline'; img-src data:" in read.attributes(
        "content"
    )


def test_the_page_speaks_without_sight():
    """Headings in order, captions, scopes, named drawings, scrolled parts that take the focus."""
    read = Read(comparison_page.render(document(several=True)))
    levels = [int(tag[1]) for tag, _ in read.elements if re.fullmatch("h[1-6]", tag)]
    assert levels.count(1) == 1
    assert all(below - above <= 1 for above, below in pairwise(levels))
    assert len(read.texts["caption"]) == len(read.texts["table"])
    assert all(held.get("scope") for tag, held in read.elements if tag == "th")
    images = [held for tag, held in read.elements if tag == "svg" and held.get("role") == "img"]
    places = set(read.attributes("id"))
    assert len(images) == 6  # ratios, shares and slices of two vocabularies
    assert all(set(held["aria-labelledby"].split()) <= places for held in images)
    wide = [held for _, held in read.elements if held.get("class") == "wide"]
    assert all(held["tabindex"] == "0" and held["aria-label"] for held in wide)


def test_the_page_does_not_change_the_names_of_other_pages():
    """Templates share what they know unless each page keeps its own to itself."""
    comparison_page.render(document())
    shared = environment()
    assert "told" not in shared.globals
    assert "change" not in shared.filters


def test_page_and_terminal_say_the_same():
    """What differs, how many would by chance, which settings differ, which slices are alone."""
    held = document()
    page = " ".join(html.unescape(re.sub("<[^>]+>", "", comparison_page.render(held))).split())
    shown = " ".join(summary(held, files=FILES, colour=False).split())
    for told in (
        *comparison_answers.counted(held), *comparison_answers.settings(held),
        *comparison_answers.only_one(held["pairs"][0]),
    ):  # fmt: skip
        assert "".join(told) in page
        assert "".join(told) in shown
    for told in (comparison_answers.MANY, answers.EXCERPTS, *comparison_answers.notes(held)):
        assert told in page
        assert told in shown
    assert comparison_answers.METHOD in page
    assert comparison_answers.METHOD in shown
    assert "fertility 1.840 2.40 +0.56 higher, worse*" in shown
    assert "Written to reports/spring--to--autumn" in shown


@pytest.mark.parametrize("width", [60, 80])
@pytest.mark.parametrize("several", [False, True])
def test_the_terminal_is_kept_to_and_safe(width, several):
    """Hostile, wide and long names stay within the window and cannot move the cursor."""
    text = summary(document(hostile=True, several=several), files=FILES, colour=False, width=width)
    assert max(map(cell_len, text.splitlines())) <= width
    assert regex.findall(r"[\p{C}--\n]|[\p{Zl}\p{Zp}]", text, flags=regex.V1) == []
    assert "◌\u0301 U+0301" in text


def test_the_table_holds_every_difference_as_it_is():
    """A row each, then distances and quantiles; hostile keys come back as they were."""
    held = document(hostile=False)
    rows = list(csv.DictReader(io.StringIO(as_csv(differences(held)), newline="")))
    assert len(rows) == len(held["differences"]) + 6 * len(held["lengths"])
    for row, own in zip(rows, held["differences"], strict=False):
        assert (row["slice"], row["figure"]) == (own["slice"], own["figure"])
        assert row["difference"] == ("" if own["difference"] is None else str(own["difference"]))
        assert row["verdict"] == (own["verdict"] or "")
    assert any(row["slice"] == f"lang={material.HOSTILE}" for row in rows)
    distances = [row for row in rows if row["figure"] == "length_distance"]
    assert [float(row["difference"]) for row in distances] == [
        own["distance"] for own in held["lengths"]
    ]


@pytest.mark.parametrize(
    ("name", "held", "shown", "ends"),
    [
        ("fertility", (0.134, 0.021, 0.247), "+0.13", "+0.02 to +0.25"),
        ("fertility", (-0.00134, -0.0021, -0.0005), "−0.00134", "−0.00210 to −0.00050"),
        ("unknown_words", (-0.0234, -0.07, 0.02), "−2.3", "−7.0 to +2.0"),
        ("unknown_words", (0.0, -0.01, 0.01), "0.0", "−1.0 to +1.0"),
        ("fertility", (0.5, None, None), "+0.50", None),
        ("fertility", (None, None, None), "–", None),
        ("length", (1200, -4125.6, 4314.2), "+1,200", "−4,126 to +4,314"),
        ("rank_95_frequency", (0, None, None), "0", None),
    ],
)
def test_differences_are_written_with_their_sign(name, held, shown, ends):
    """Shares in points, two digits of the interval's half width, whole lengths."""
    found = dict(zip(("difference", "low", "high"), held, strict=True))
    assert formatting.difference(name, found) == shown
    assert formatting.difference_interval(name, found) == ends


def test_the_drawing_holds_0_and_every_interval():
    """The axis reaches from the lowest end to the highest and names 0."""
    rows = [Point("a", 2.0, 1.0, 3.0, "+2", shown=True), Point("b", 0.5, None, None, "+0.5",
                                                             shown=False)]  # fmt: skip
    read = Read(str(points("k", "title", rows)))
    assert "0" in read.texts["text"]
    assert len([1 for _, held in read.elements if held.get("class") == "interval"]) == 1
    assert [held["class"] for tag, held in read.elements if "dot" in (held.get("class") or "")] == [
        "dot shown", "dot",
    ]  # fmt: skip
    assert Read(str(points("k", "title", [Point("a", 0.0, 0.0, 0.0, "0", shown=False)]))).open == []
    axis = Axis(0.2, -1.0, 1.0)
    assert [axis.place(n) for n in (-9.0, -1.0, 0.0, 1.0)] == [
        "20.00%", "20.00%", "51.00%", "82.00%",
    ]  # fmt: skip
    assert 0 in axis.ticks()
