"""Runs of whitespace: where they are cut, and the first kind that fits each."""

from __future__ import annotations

import pytest
import regex
from hypothesis import given
from hypothesis import strategies as st

from auditor.text.stretch import Stretch
from auditor.text.whitespace import KINDS, RunForm, find_runs


def kinds_in(*texts):
    """Return (run, kind) of every run of ``texts``, whitespace first, then zero-width."""
    runs = find_runs(Stretch(list(texts)))
    forms = [runs.forms[number] for number in runs.form_of.tolist()]
    return [(form.text, form.kind) for form in forms]


@pytest.mark.parametrize(
    ("run", "kind"),
    [
        ("\r\n", "CRLF"),
        ("\r\n\r\n", "CRLF"),  # before `blank line`
        (" \r\n\t", "CRLF"),  # before `tab`
        ("\n\n", "blank line"),
        ("\n \t\n  ", "blank line"),
        ("\n", "line end"),
        ("\n    ", "line end"),  # with its indentation
        ("  \n", "line end"),
        ("\u2028", "line end"),
        ("\u2029", "line end"),
        ("\u0085", "line end"),
        ("\r", "line end"),
        ("\n\r", "blank line"),  # two line ends: only CR LF is one
        ("\t", "tab"),
        (" \t ", "tab"),
        ("  ", "space run"),
        (" ", "single space"),
        ("\u00a0", "no-break space"),
        ("\u202f", "no-break space"),
        ("\u3000", "ideographic space"),
        ("\u3000\u3000", "ideographic space"),
        ("\u2003", "other"),
        ("\u00a0 ", "other"),  # mixed: no kind of its own
        ("\u1680", "other"),
    ],
)
def test_the_first_kind_that_fits(run, kind):
    """One run of each kind between two letters, and those that two kinds would fit."""
    assert kinds_in(f"a{run}b") == [(run, kind)]


@pytest.mark.parametrize("run", ["\r\n", "\n\n", "\t", " ", "\u3000"])
def test_a_run_at_either_end_is_a_document_edge(run):
    """The edge comes before every other kind."""
    assert kinds_in(f"{run}a{run}b{run}")[::2] == [(run, "document edge")] * 2


def test_a_document_of_nothing_else_is_one_edge():
    """First and last thing at once."""
    assert kinds_in(" \n ") == [(" \n ", "document edge")]


@pytest.mark.parametrize("text", ["\u200bab", "a\u200bb", "ab\u200b\u200d"])
def test_zero_width_runs_are_their_own_kind_everywhere(text):
    """Even at the edge of a document."""
    assert [kind for _, kind in kinds_in(text)] == ["zero-width"]


def test_zero_width_characters_cut_whitespace():
    """A zero-width space is no whitespace: two single spaces and one zero-width run."""
    assert sorted(kinds_in("a \u200b b")) == [
        (" ", "single space"),
        (" ", "single space"),
        ("\u200b", "zero-width"),
    ]


def test_runs_do_not_reach_over_documents():
    """A space that ends one document and one that begins the next are two edges."""
    assert kinds_in("a ", " b") == [(" ", "document edge")] * 2


def test_every_kind_is_declared_in_order():
    """`KINDS` holds whatever a run can be called."""
    runs = ["\r\n", "\n\n", "\n", "\t", "  ", " ", "\u00a0", "\u3000", "\u2003"]
    found = ["document edge", *(RunForm(run, "middle").kind for run in runs)]
    assert (*found, RunForm("\u200b", "middle").kind) == KINDS


@given(st.lists(st.text(st.sampled_from("ab \r\n\t\u00a0\u3000\u2003\u200b\ufeff𝔘"), max_size=12)))
def test_runs_are_maximal_and_all_are_found(texts):
    """`regex` finds the same runs with the same places, document by document."""
    stretch = Stretch(texts)
    runs = find_runs(stretch)
    found = sorted(zip(runs.starts.tolist(), runs.ends.tolist(), strict=True))
    pattern = r"\p{White_Space}+|[\u200b\u200c\u200d\u2060\ufeff]+"
    shifts = stretch.bounds.tolist()
    expected = [
        (shift + match.start(), shift + match.end())
        for shift, text in zip(shifts, texts, strict=False)
        for match in regex.finditer(pattern, text)
    ]
    assert found == sorted(expected)


PIECES = st.lists(
    st.sampled_from([*"ab \n\t\r", "\r\n", "\u00a0", "\u3000", "\u200b", "\ufeff", "🌊", "   "]),
    max_size=12,
).map("".join)


@given(st.lists(PIECES, max_size=6))
def test_runs_are_those_of_a_search(texts):
    """Against `regex`, document by document: place, characters and position of every run."""
    runs = find_runs(Stretch(texts))
    forms = [runs.forms[number] for number in runs.form_of.tolist()]
    found = [
        (start, end, form.text, form.position)
        for start, end, form in zip(runs.starts.tolist(), runs.ends.tolist(), forms, strict=True)
    ]
    expected, begin = [], 0
    for pattern in (r"\p{White_Space}+", "[\u200b\u200c\u200d\u2060\ufeff]+"):
        begin = 0
        for text in texts:
            for match in regex.finditer(pattern, text):
                place = "end" if match.end() == len(text) else "middle"
                place = "start" if match.start() == 0 else place
                expected.append((begin + match.start(), begin + match.end(), match.group(), place))
            begin += len(text)
    assert found == expected
    assert len(set(runs.forms)) == len(runs.forms)
