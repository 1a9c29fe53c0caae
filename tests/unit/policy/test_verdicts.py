"""Whether bounds hold: pass, fail or undecided, and what would settle it."""

from __future__ import annotations

import jsonschema
import pytest

from auditor.errors import SettingsError
from auditor.figures.intervals import wilson
from auditor.policy import judge, read_policy
from auditor.report import contract
from tests.unit.report import material


@pytest.fixture
def verdict(tmp_path):
    """Return the one verdict on fertility (or the figure named) in the whole corpus."""

    def call(bound: str, held: dict, figure: str = "fertility"):
        audit = material.audit()
        audit["vocabularies"][0]["slices"]["all"]["figures"][figure] = held
        path = tmp_path / "limits.toml"
        path.write_text(f"[all]\n{figure} = {{{bound}}}\n")
        found = judge(read_policy(path), audit)
        jsonschema.validate(found, contract.schema("policy"))
        (own,) = found["verdicts"]
        assert found["outcome"] == own["verdict"]
        return own

    return call


def counted(numerator: int, denominator: int, low=None, high=None, note=None) -> dict:
    value = numerator / denominator
    return {"value": value, "low": low, "high": high, "numerator": numerator,
            "denominator": denominator, "note": note}  # fmt: skip


@pytest.mark.parametrize(
    ("bound", "expected"),
    [
        ("max = 2.5", "pass"),
        ("min = 2.5", "pass"),
        ("max = 2.4999999999", "fail"),
        ("min = 2.5000000001", "fail"),
        ("min = 2, max = 3", "pass"),
        ("min = 2.6, max = 3", "fail"),
        ("min = 2, max = 2.4", "fail"),
    ],
)
def test_a_bound_on_the_value_speaks_of_this_corpus(verdict, bound, expected):
    """A value on the bound keeps to it; the interval plays no part."""
    assert verdict(bound, counted(5, 2, 1.0, 4.0))["verdict"] == expected


def test_the_value_is_compared_exactly(verdict):
    """The totals decide, not a float: 3e17+1 in 1e18 lies above 0.3, which its float equals."""
    held = counted(3 * 10**17 + 1, 10**18)
    assert held["value"] == 0.3
    assert verdict("max = 0.3", held, "unknown_words")["verdict"] == "fail"
    assert verdict("max = 0.3", counted(3, 10), "unknown_words")["verdict"] == "pass"


@pytest.mark.parametrize(
    ("bound", "expected"),
    [
        ("max = 3.0", "pass"),
        ("max = 2.9", "undecided"),
        ("max = 2.0", "undecided"),
        ("max = 1.9", "fail"),
        ("min = 2.0", "pass"),
        ("min = 2.1", "undecided"),
        ("min = 3.0", "undecided"),
        ("min = 3.1", "fail"),
        ("min = 1, max = 4", "pass"),
        ("min = 1, max = 2.9", "undecided"),
        ("min = 2.1, max = 1e3", "undecided"),
        ("min = 0, max = 1", "fail"),
    ],
)
def test_a_bound_on_the_interval_speaks_of_further_documents(verdict, bound, expected):
    """It holds when the whole interval keeps to it, and fails when none of it does."""
    own = verdict(f'{bound}, on = "interval"', counted(5, 2, 2.0, 3.0))
    assert own["verdict"] == expected
    assert (own["more_documents"] is not None) == (expected == "undecided")


def test_how_many_more_documents_would_settle_it(verdict):
    """Half the width 0.5 must become 0.1: 25 times the 98 documents, 24 times as many more."""
    own = verdict('max = 2.625, on = "interval"', counted(5, 2, 2.0, 3.0))
    assert own["more_documents"] == 15 * 98
    own = verdict('min = 2.4375, max = 2.625, on = "interval"', counted(5, 2, 2.0, 3.0))
    assert own["more_documents"] == 63 * 98


@pytest.mark.parametrize(("seen", "bound"), [(0, 0.01), (2, 0.01), (7, 0.05)])
def test_for_a_proportion_wilson_tells_how_many(verdict, seen, bound):
    """At that number of documents in all, Wilson's interval of the same share ends on the bound."""
    held = counted(seen, 98, *wilson(seen, 98))
    own = verdict(f'max = {bound}, on = "interval"', held, "truncated_documents")
    n = 98 + own["more_documents"]
    z2 = 1.959964**2

    def ends(documents):  # of the same share, which need not be a whole number of documents
        p = seen / 98
        half = 1.959964 * (p * (1 - p) / documents + z2 / (4 * documents**2)) ** 0.5
        return [(p + z2 / (2 * documents) + sign * half) / (1 + z2 / documents) for sign in (-1, 1)]

    side = 1 if bound > seen / 98 else 0
    settled = [ends(documents)[side] <= bound for documents in (n - 1, n, 100 * n)]
    assert settled == ([False, True, True] if side else [True, False, False])


def test_on_the_bound_no_number_settles_it(verdict):
    """The value itself is the bound."""
    own = verdict('max = 2.5, on = "interval"', counted(5, 2, 2.0, 3.0))
    assert (own["verdict"], own["more_documents"]) == ("undecided", None)
    assert "lies on the bound" in own["note"]


UNDEFINED = {"value": None, "low": None, "high": None, "numerator": 0, "denominator": 0,
             "note": "no words in this slice"}  # fmt: skip


@pytest.mark.parametrize(
    ("bound", "held", "expected", "note"),
    [
        ("max = 2", UNDEFINED, "undecided", "no words in this slice"),
        ('max = 2, on = "interval"', UNDEFINED, "undecided", "no words in this slice"),
        ("max = 0.1", counted(0, 9, 0.0, None, "none seen; it may"), "pass", None),
        ('max = 0.1, on = "interval"', counted(0, 9, 0.0, None, "none seen; it may"),
         "undecided", "none seen; it may"),
        ('min = 0, on = "interval"', counted(0, 9, 0.0, None, "none seen; it may"), "pass", None),
        ('max = 9, on = "interval"', counted(4, 2, None, None, "one document: no interval"),
         "undecided", "one document: no interval"),
    ],
)  # fmt: skip
def test_what_the_audit_leaves_open_is_undecided_with_its_note(
    verdict, bound, held, expected, note
):
    """An undefined figure, none seen, one document."""
    own = verdict(bound, held)
    assert (own["verdict"], own["note"], own["more_documents"]) == (expected, note, None)


def judged(tmp_path, text: str, audit=None):
    path = tmp_path / "limits.toml"
    path.write_text(text)
    return judge(read_policy(path), audit or material.audit("harbour", "tide"))


def test_one_bound_speaks_of_every_slice_of_a_field(tmp_path):
    """`field=*` takes all its slices, not those of another field, under every vocabulary."""
    found = judged(tmp_path, '["station=*"]\nfertility = {max = 8}\n')["verdicts"]
    assert [(own["vocabulary"], own["slice"]) for own in found] == [
        ("harbour", "station=3"), ("harbour", "station=(none)"),
        ("tide", "station=3"), ("tide", "station=(none)"),
    ]  # fmt: skip


def test_one_vocabulary_can_be_meant(tmp_path):
    """By name; the others are left alone."""
    found = judged(tmp_path, '[all]\nfertility = {max = 8, vocabulary = "tide"}\n')["verdicts"]
    assert [own["vocabulary"] for own in found] == ["tide"]


def test_lengths_and_use_of_the_vocabulary_have_bounds_too(tmp_path):
    """Quantiles of length stand beside the figures; what was not asked for says so."""
    text = "[all]\np99 = {max = 512}\nentropy = {min = 7}\nrepeated_documents = {max = 0.1}\n"
    audit = material.audit()
    found = judged(tmp_path, text, audit)
    assert [(own["value"], own["verdict"]) for own in found["verdicts"]] == [
        (512, "pass"), (7.25, "pass"), (None, "undecided"),
    ]  # fmt: skip
    assert "--repeats" in found["verdicts"][2]["note"]
    assert found["counts"] == {"pass": 2, "fail": 0, "undecided": 1}
    alone = judged(tmp_path, "[all]\nrelative_tokens = {max = 1}\n", material.audit())
    assert "second vocabulary" in alone["verdicts"][0]["note"]


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ('["lang=tg"]\nfertility = {max = 2}\n', r"no slice 'lang=tg'.*Nearest: lang=t"),
        ('["tongue=*"]\nfertility = {max = 2}\n', r"no slice 'tongue=\*'"),
        ('[all]\nfertility = {max = 2, vocabulary = "ride"}\n', r"'ride'.*Nearest: tide"),
    ],
)
def test_what_the_audit_does_not_hold_is_told(tmp_path, text, told):
    """With the place and the nearest names."""
    with pytest.raises(SettingsError, match=told):
        judged(tmp_path, text)
