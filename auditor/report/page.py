"""The page a person reads: one file of HTML without scripts or outside parts."""

from __future__ import annotations

import hashlib
from base64 import b64encode
from collections.abc import Mapping, Sequence
from functools import cache
from importlib.resources import files
from typing import Any

import orjson
from jinja2 import Environment, PackageLoader, StrictUndefined
from markupsafe import Markup, escape

from auditor.report import answers, bins, charts, drawings, formatting, policy_answers
from auditor.report.answers import Excerpt, Sentence
from auditor.report.details import FATES as LOSS_FATES
from auditor.report.details import Details
from auditor.report.meanings import MEANINGS
from auditor.report.questions import QUESTIONS
from auditor.report.repeating import blocks, command, command_notes
from auditor.report.slices import anything_cut, costliest_first, sets, whole
from auditor.report.tables import words as word_rows
from auditor.tallies.words import BrokenWord

Json = Mapping[str, Any]
WorstWords = Sequence[tuple[str, list[tuple[BrokenWord, int]]]]

FATES = ("kept", "merged", "dropped", "unknown", "changed")
_COSTLIEST, _LOST = 40, 20
_DRAWN_COSTLY, _DRAWN_CHEAP = 45, 15
_TABLED = 1000
_SLICE_COLUMNS = (
    "fertility", "relative_tokens", "unknown_words", "byte_spelled_characters",
    "dropped_characters", "truncated_documents",
)  # fmt: skip
# A limit further out than this would squeeze the documents into a corner.
_LIMIT_DRAWN = 4


def render(
    audit: Json,
    worst: WorstWords,
    details: Sequence[Details] = (),
    policy: Json | None = None,
) -> str:
    """Return the page for an `audit.json` document and the costliest words of each vocabulary.

    ``worst`` holds (vocabulary, [(word, count), …]) in the order of `tables.worst_words`; empty
    when the audit was made without excerpts. ``details`` has one item a vocabulary; ``policy`` is a
    `policy.json` document. The same input
    gives the same text.
    """
    template = environment().get_template("report.html.jinja")
    return template.render(
        audit=audit,
        glance=_glance(audit),
        losses=drawings.losses(audit["vocabularies"]),
        beside=drawings.beside(audit["vocabularies"]),
        costly=[
            (name, drawings.costly(n, name, rows)) for n, (name, rows) in enumerate(worst) if rows
        ],
        ranks=[drawings.ranks(n, own) for n, own in enumerate(details) if len(own.ranks) > 1],
        details=[
            {
                "name": own.name,
                "characters": own.characters.to_dict("records"),
                "scripts": own.scripts,
                "drawing": drawings.scripts(number, own),
            }
            for number, own in enumerate(details)
            if own.scripts
        ],
        loss_fates=LOSS_FATES,
        **script_of("page.js"),
        tried=Markup(_tried(audit["vocabularies"])),  # noqa: S704 - numbers only
        policy=policy,
        slice_sets=[_set(number, audit, *found) for number, found in enumerate(sets(audit))],
        word_tables=[table for name, rows in worst for table in word_tables(name, rows)],
        anything_cut=any(map(anything_cut, audit["vocabularies"])),
        command=command(audit),
        command_notes=command_notes(audit),
        blocks=blocks(audit),
        **_length_drawings(audit["vocabularies"]),
    )


@cache
def environment() -> Environment:
    """Return the templates with the filters that write numbers and text."""
    environment = Environment(
        autoescape=True, loader=PackageLoader("auditor.report"), undefined=StrictUndefined,
        trim_blocks=True, lstrip_blocks=True, keep_trailing_newline=True,
    )  # fmt: skip
    environment.filters |= {
        "clean": formatting.clean,
        "code_points": lambda text: " ".join(f"U+{ord(c):04X}" for c in text),
        "headline": answers.headline,
        "count": formatting.count,
        "interval": lambda figure, name: formatting.interval(name, figure) or "",
        "interval_or_note": _interval_or_note,
        "length_value": lambda number: f"{number:,.1f}" if number % 1 else f"{int(number):,}",
        "marked": marked,
        "noted": lambda held, names: any(held[name]["note"] for name in held if name in names),
        "plural": formatting.plural,
        "quantile": formatting.quantile,
        "ranged": lambda figure, name: formatting.ranged(name, figure),
        "size": formatting.size,
        "value": lambda figure, name: formatting.value(name, figure),
    }
    environment.globals |= {
        "questions": QUESTIONS,
        "meanings": MEANINGS,
        "fates": FATES,
        "headline": answers.headline,
        "policy_answers": policy_answers,
        "key_of": _key_of,
        "how_to_read": answers.HOW_TO_READ,
        "languages_differ": answers.LANGUAGES_DIFFER,
        "cut_is_lost": answers.CUT_IS_LOST,
        "excerpts": answers.EXCERPTS,
    }
    return environment


def own_environment() -> Environment:
    """Return the same for one page, whose filters and names do not reach the others."""
    made = environment().overlay()
    made.filters, made.globals = dict(made.filters), dict(made.globals)
    return made


def marked(sentence: Sentence) -> Markup:
    """Return a sentence as markup, text of the corpus apart from the direction of the rest."""
    parts = (
        Markup("<bdi>{}</bdi>").format(part) if isinstance(part, Excerpt) else escape(part)
        for part in sentence
    )
    return Markup("").join(parts)


def _interval_or_note(figure: Json, name: str) -> str:
    if figure["note"]:
        return "none seen" if figure["numerator"] == 0 else str(figure["note"])
    return formatting.interval(name, figure) or ""


def script_of(name: str) -> dict[str, Any]:
    """Return a script of this package, and the hash by which the page's policy allows it alone."""
    text = (files("auditor.report") / "templates" / name).read_text(encoding="utf-8")
    digest = b64encode(hashlib.sha256(text.encode()).digest()).decode()
    return {"script": Markup(text), "script_hash": digest}  # noqa: S704 - a file of this package


def _tried(vocabularies: Sequence[Json]) -> str:
    """Return what the slider computes from, as JSON: documents by length of each vocabulary."""
    held = [
        {
            "name": formatting.clean(own["name"], 60),
            "lengths": [length for length, _ in whole(own)["lengths"]["histogram"]],
            "documents": [documents for _, documents in whole(own)["lengths"]["histogram"]],
            "tokens": whole(own)["counts"]["tokens"],
            "limit": own["limit"]["value"],
        }
        for own in vocabularies
    ]
    return orjson.dumps(held).decode().replace("<", "\\u003c")


def _glance(audit: Json) -> list[dict[str, Any]]:
    """Return the first answer to each question, one for each vocabulary."""
    rows = []
    for question in QUESTIONS:
        if question.key == "slices":
            told = [_first_of_slices(own, audit) for own in audit["vocabularies"]]
        elif question.key == "aside":
            told = [answers.set_aside(audit["corpus"])[0]]
        else:
            told = [question.answer(own, audit)[0] for own in audit["vocabularies"]]
        rows.append({"question": question, "told": told})
    return rows


def _first_of_slices(vocabulary: Json, audit: Json) -> Sentence:
    found = sets(audit)
    if not found:
        return ("No field was named with --by.",)
    _, keys = found[0]
    return answers.slices(vocabulary, costliest_first(vocabulary, keys))[0]


def _length_drawings(vocabularies: Sequence[Json]) -> dict[str, list[Any]]:
    scale = _scale(vocabularies)
    return {
        "length_drawings": [
            charts.lengths(f"lengths-{number}", own, scale)
            for number, own in enumerate(vocabularies)
        ],
        "drawing_words": [_under_lengths(own, scale) for own in vocabularies],
    }


def _scale(vocabularies: Sequence[Json]) -> bins.Scale:
    """Return one scale for all vocabularies, so that their drawings compare."""
    found = [whole(own)["lengths"] for own in vocabularies]
    longest = max(lengths["maximum"] for lengths in found)
    limits = [own["limit"]["value"] for own in vocabularies]
    near = [limit for limit in limits if limit is not None and limit <= _LIMIT_DRAWN * longest]
    shortest = min(lengths["minimum"] for lengths in found)
    return bins.scale_for(min([shortest, *near]), max([longest, *near]))


def _under_lengths(vocabulary: Json, scale: bins.Scale) -> str:
    limit = vocabulary["limit"]["value"]
    spaced = "; each doubling of length takes the same width" if scale.doubling else ""
    if limit is None:
        return f"{spaced}. No limit is known."
    if limit > scale.edges[-1]:
        return f"{spaced}. The limit of {formatting.count(limit)} lies beyond the right edge."
    return f"{spaced}. Right of the limit, hatched, is what it would cut."


def _set(number: int, audit: Json, field: str, keys: list[str]) -> dict[str, Any]:
    """Return everything the template shows of one set of slices."""
    vocabularies = audit["vocabularies"]
    held = [key for key in keys if _defined(vocabularies, key)]
    drawn = [*held[:_DRAWN_COSTLY], *held[_DRAWN_COSTLY:][-_DRAWN_CHEAP:]]
    columns, notes = _columns(vocabularies, keys)
    if len(keys) > _TABLED:
        notes.append(f"{formatting.count(len(keys) - _TABLED)} more stand in figures.csv.")
    return {
        "field": field or "other fields",
        "told": [answers.slices(own, costliest_first(own, keys)) for own in vocabularies],
        "drawing": charts.cost(f"cost-{number}", field, vocabularies, drawn),
        "note": _not_drawn(len(keys), len(held), len(drawn)),
        "columns": columns,
        "notes": notes,
        "tabled": keys[:_TABLED],
    }


def _defined(vocabularies: Sequence[Json], key: str) -> bool:
    figures = (own["slices"][key]["figures"]["fertility"] for own in vocabularies)
    return any(figure["value"] is not None for figure in figures)


def _not_drawn(slices: int, held: int, drawn: int) -> str:
    between = (
        f"Drawn are the {_DRAWN_COSTLY} costliest and the {_DRAWN_CHEAP} cheapest of "
        f"{formatting.count(slices)} slices. "
        if held > drawn
        else ""
    )
    undefined = f"Not drawn, without a word: {slices - held}." if slices > held else ""
    return between + undefined


def _columns(vocabularies: Sequence[Json], keys: Sequence[str]) -> tuple[list[str], list[str]]:
    """Return the figures that have a value somewhere, and a sentence on each that has none."""
    columns, notes = [], []
    for name in _SLICE_COLUMNS:
        found = [own["slices"][key]["figures"].get(name) for own in vocabularies for key in keys]
        figures = [figure for figure in found if figure is not None]
        if any(figure["value"] is not None for figure in figures):
            columns.append(name)
        elif figures:
            notes.append(f"{name}: {formatting.DASH} ({figures[0]['note']}).")
    return columns, notes


def word_tables(name: str, rows: list[tuple[BrokenWord, int]]) -> list[Json]:
    """Return the table of the costliest words, then that of the words lost most often."""
    lost = sorted((item for item in rows if item[0].unknown), key=lambda item: (-item[1], item[0]))
    wanted = (
        ("The words that cost most", rows[:_COSTLIEST]),
        ("The words lost most often", lost[:_LOST]),
    )
    return [
        {"caption": caption, "name": name, "rows": word_rows([(name, shown)]).to_dict("records")}
        for caption, shown in wanted
        if shown
    ]


def _key_of(number: int) -> Markup:
    """Return the sign and the letter by which a drawing names a vocabulary."""
    shape = charts.tag("path", d=charts.SHAPES[number % len(charts.SHAPES)][1])
    sign = charts.tag("svg", shape, class_="key dot", viewBox="-7 -7 14 14", aria_hidden="true")
    return Markup("{} {}").format(sign, charts.letter(number))
