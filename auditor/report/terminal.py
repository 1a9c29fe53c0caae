"""The summary that a terminal shows: the answers in order, each a short plain sentence."""

from __future__ import annotations

import os
from collections.abc import Iterable, Mapping, Sequence
from io import StringIO
from pathlib import Path
from typing import Any

from rich.console import Console, Group, RenderableType
from rich.padding import Padding
from rich.table import Table
from rich.text import Text

from auditor.report import answers, policy_terminal
from auditor.report.answers import Sentence
from auditor.report.formatting import clean, count, plural, ranged_or_why, size, value
from auditor.report.questions import QUESTIONS
from auditor.report.slices import RANKED_BY, anything_cut, costliest_first, sets
from auditor.report.tables import words as word_rows
from auditor.tallies.words import BrokenWord

Json = Mapping[str, Any]
WorstWords = Sequence[tuple[str, list[tuple[BrokenWord, int]]]]

_SIDE_BY_SIDE = 3
_MOST_COSTLY, _LEAST_COSTLY = 5, 1
_WORDS = 5


def summary(
    audit: Json,
    *,
    files: Sequence[Path],
    width: int = 80,
    colour: bool,
    worst: WorstWords = (),
    policy: Json | None = None,
) -> str:
    """Return the audit as text for a terminal ``width`` cells wide, with colours if asked.

    ``files`` are the paths of what was written; ``worst`` the costliest words of each vocabulary,
    of which a few are shown; ``policy`` the document of `policy.json` where there is one. Text of
    the corpus comes without control characters.
    """
    return rendered(_parts(audit, files, worst, policy), width=width, colour=colour)


def rendered(parts: Iterable[RenderableType], *, width: int, colour: bool) -> str:
    """Return ``parts`` one below the other, as text ``width`` cells wide, with colours if asked."""
    console = Console(
        file=StringIO(), width=width, force_terminal=colour, no_color=not colour,
        color_system="standard" if colour else None, legacy_windows=False,
        markup=False, emoji=False, highlight=False, _environ={},
    )  # fmt: skip
    with console.capture() as captured:
        for part in parts:
            console.print(part)
    return "".join(f"{line.rstrip(' ')}\n" for line in captured.get().split("\n")[:-1])


def _parts(
    audit: Json, files: Sequence[Path], worst: WorstWords, policy: Json | None
) -> Iterable[RenderableType]:
    corpus, vocabularies = audit["corpus"], audit["vocabularies"]
    yield Text(
        f"{plural(corpus['documents'], 'document')}, {size(corpus['bytes'])}, "
        f"{plural(corpus['words'], 'word')}.",
        "bold",
    )
    for vocabulary in vocabularies:
        yield Text(f"{clean(vocabulary['name'], 60)}: {answers.headline(vocabulary)}.", "bold")
    yield Text(answers.HOW_TO_READ, "dim")
    if policy is not None:
        yield Text()
        yield from policy_terminal.parts(policy)
    grouped = sets(audit)
    for question in QUESTIONS:
        yield Text()
        yield Text(question.title, "bold")
        if question.key == "slices":
            yield from _slices(audit, grouped)
        elif question.key == "aside":
            yield from map(line, answers.set_aside(corpus))
        else:
            yield _beside(vocabularies, [question.answer(own, audit) for own in vocabularies])
        if question.key == "words":
            yield from _words(worst)
    yield Text()
    for told in answers.cautions(audit, sliced=bool(grouped)):
        yield Text(told, "italic")
    yield from written(files)


def line(sentence: Sentence) -> RenderableType:
    """Return a sentence whose further lines are indented."""
    table = Table.grid(padding=(0, 1, 0, 0))
    table.add_column(width=1)
    table.add_column(overflow="fold")
    table.add_row("·", Text("".join(sentence)))
    return table


def _beside(vocabularies: Sequence[Json], told: Sequence[list[Sentence]]) -> RenderableType:
    """Return the answers of each vocabulary: up to three side by side, more below each other."""
    if len(vocabularies) == 1:
        return Group(*map(line, told[0]))
    names = [_name(own) for own in vocabularies]
    columns = [Group(*map(line, sentences)) for sentences in told]
    if len(vocabularies) > _SIDE_BY_SIDE:
        return Group(*(part for pair in zip(names, columns, strict=True) for part in pair))
    table = Table.grid(padding=(0, 2, 0, 0), expand=True)
    for _ in vocabularies:
        table.add_column(ratio=1)
    table.add_row(*names)
    table.add_row(*columns)
    return table


def _name(vocabulary: Json) -> Text:
    return Text(clean(vocabulary["name"], 60), "underline", overflow="ellipsis", no_wrap=True)


def _slices(audit: Json, grouped: list[tuple[str, list[str]]]) -> Iterable[RenderableType]:
    if not grouped:
        yield line(("No field was named with --by: every document is in one slice.",))
    vocabularies = audit["vocabularies"]
    tables = [vocabularies]
    if len(vocabularies) > _SIDE_BY_SIDE:
        tables = [[vocabulary] for vocabulary in vocabularies]
    for _, keys in grouped:
        for shown in tables:
            if len(tables) > 1:
                yield _name(shown[0])
            ranked = costliest_first(shown[0], keys)
            yield _slice_table(shown, ranked)


def _slice_table(vocabularies: Sequence[Json], ranked: list[str]) -> RenderableType:
    most = ranked[:_MOST_COSTLY]
    least = ranked[_MOST_COSTLY:][-_LEAST_COSTLY:]
    several = len(vocabularies) > 1
    table = _table()
    table.add_column("slice", max_width=18 if several else 32, overflow="ellipsis", no_wrap=True)
    if documents := len(vocabularies) < _SIDE_BY_SIDE:
        table.add_column("documents", justify="right", no_wrap=True)
    table.expand = several
    for vocabulary in vocabularies:
        header = _name(vocabulary) if several else "tokens per word"
        table.add_column(header, overflow="fold", ratio=1 if several else None)
    for key in most:
        table.add_row(*_slice_row(key, vocabularies, documents=documents))
    if between := len(ranked) - len(most) - len(least):
        table.add_row(Text(f"… {count(between)} more"))
    for key in least:
        table.add_row(*_slice_row(key, vocabularies, documents=documents))
    return table


def _slice_row(
    key: str, vocabularies: Sequence[Json], *, documents: bool
) -> Iterable[RenderableType]:
    yield Text(clean(key, 60))
    if documents:
        yield count(vocabularies[0]["slices"][key]["counts"]["documents"])
    for vocabulary in vocabularies:
        figures = vocabulary["slices"][key]["figures"]
        cut = value("truncated_documents", figures["truncated_documents"])
        told = f"; {cut} cut" if anything_cut(vocabulary, [key]) else ""
        cost = ranged_or_why(RANKED_BY, figures[RANKED_BY])
        yield Text(cost + told if len(vocabularies) == 1 else _stacked(cost, told))


def _stacked(cost: str, told: str) -> str:
    """Return the interval below the value, for a narrow column."""
    number, bracket, rest = cost.partition(" (")
    return f"{number}{told}\n{bracket[1:]}{rest}"


def _table() -> Table:
    return Table(box=None, padding=(0, 2, 0, 0), pad_edge=False, header_style="dim")


def _words(worst: WorstWords) -> Iterable[RenderableType]:
    for name, rows in worst:
        table = _table()
        title = Text(clean(name, 40) if len(worst) > 1 else "word")
        table.add_column(title, ratio=1, no_wrap=True, overflow="ellipsis")
        table.add_column("times", justify="right", no_wrap=True)
        table.add_column("extra tokens", justify="right", no_wrap=True)
        table.add_column("broken as", ratio=2, no_wrap=True, overflow="ellipsis")
        for row in word_rows([(name, rows[:_WORDS])]).to_dict("records"):
            word, broken = (Text(clean(row[column], 60)) for column in ("word", "broken"))
            table.add_row(word, count(row["count"]), count(row["extra_tokens"]), broken)
        if rows:
            yield table
    if any(rows for _, rows in worst):
        yield line((answers.EXCERPTS,))
    yield line(("Every word and character that costs or is lost: words.csv, characters.csv.",))


def written(files: Sequence[Path]) -> Iterable[RenderableType]:
    """Return the folder of what was written, once, then the names of its files."""
    if not files:
        return
    folder = Path(os.path.commonpath([file.parent for file in files]))
    names = (str(file.relative_to(folder)) for file in files)
    yield Text()
    yield Text(f"Written to {clean(str(folder), 1000)}", "bold", overflow="fold")
    yield Padding(Text(clean(", ".join(names), 4000)), (0, 0, 0, 2))
