"""What is compared, what must be equal, and what each difference says."""

from __future__ import annotations

import copy
import hashlib
import math

import jsonschema
import pytest
from scipy import optimize, stats

from auditor.comparing import excerpts, figures
from auditor.comparing.document import Tables, compare
from auditor.comparing.pairs import Pair, Side, choose, differing
from auditor.errors import SettingsError
from auditor.figures.intervals import wilson
from auditor.report import comparison_contract, contract
from tests.unit.report import material

NO_TABLES = Tables(None, None), Tables(None, None)


def other(audit, digest: str = "1"):
    """Return a copy of an audit, of another corpus."""
    made = copy.deepcopy(audit)
    made["corpus"]["digest"] = "blake2b-128-sum:" + digest * 32
    return made


def named(*names: str):
    """Return an audit whose vocabularies have digests of their own."""
    made = material.audit(*names)
    for own in made["vocabularies"]:
        spelled = own["name"].encode("utf-8", "surrogatepass")
        own["digest"] = f"sha256:{hashlib.sha256(spelled).hexdigest()}"
    return made


def sides(before, after):
    return Side(before, "before/audit.json"), Side(after, "after/audit.json")


def compared(before, after, **options):
    """Return the whole document of the vocabularies in common."""
    held = sides(before, after)
    pairs = choose(*held, options.get("name"), options.get("name_after"))
    parts = compare(*held, pairs, options.get("tables", NO_TABLES))
    settings = {"vocabulary": None, "vocabulary_after": None, "excerpts": True,
                "different_settings": differing(before, after, pairs)}  # fmt: skip
    document = comparison_contract.document({"settings": settings, **parts})
    jsonschema.validate(document, contract.schema("comparison"))
    return document


def difference(document, figure: str, key: str = "all"):
    return next(
        own for own in document["differences"] if (own["figure"], own["slice"]) == (figure, key)
    )


def test_the_only_vocabularies_are_compared_whatever_they_are_called():
    """One each needs no name."""
    held = sides(named("harbour"), other(named("tide")))
    assert [(p.before["name"], p.after["name"]) for p in choose(*held, None, None)] == [
        ("harbour", "tide")
    ]


def test_several_are_compared_with_those_of_the_same_name():
    """In the order of the first audit; the others are left out."""
    held = sides(named("gale", "tide", "fog"), other(named("fog", "gale", "swell")))
    assert [p.before["name"] for p in choose(*held, None, None)] == ["gale", "fog"]


@pytest.mark.parametrize(
    ("name", "after", "found"),
    [("tide", None, ("tide", "tide")), (None, "tide", ("tide", "tide")),
     ("gale", "tide", ("gale", "tide")), ("models/gale", "tide", ("gale", "tide"))],
)  # fmt: skip
def test_names_choose(name, after, found):
    """One name is meant on both sides; a second one names the later side's."""
    (pair,) = choose(*sides(named("gale", "tide"), named("tide", "gale")), name, after)
    assert (pair.before["name"], pair.after["name"]) == found


def test_what_cannot_be_chosen_is_told():
    """With the audit and the nearest names, or what either holds."""
    held = sides(named("gale", "tide"), named("fog", "swell"))
    with pytest.raises(SettingsError, match=r"before/audit.*'tyde'.*--vocab-after.*tide"):
        choose(*held, "tyde", "fog")
    with pytest.raises(SettingsError, match=r"nothing|no vocabulary in common \(gale, tide; and"):
        choose(*held, None, None)


@pytest.mark.parametrize(
    ("name", "value"),
    [("words", "whitespace"), ("unit", "line"), ("origin", "buoy"), ("encoding", "latin-1"),
     ("control_strings", "text"), ("pattern", "a+"), ("limit", 64), ("conversations", "plain")],
)  # fmt: skip
def test_settings_that_change_a_figure_must_be_equal(name, value):
    """Each is named with both values."""
    before, after = named("harbour"), other(named("harbour"))
    after["settings"][name] = value
    held = before["settings"].get(name)
    pairs = choose(*sides(before, after), None, None)
    assert differing(before, after, pairs) == [{"what": name, "before": held, "after": value}]


@pytest.mark.parametrize(
    ("name", "value"),
    [("by", ["lang"]), ("repeats", True), ("graphemes", True), ("whole", True), ("text", ["x"])],
)
def test_settings_that_only_add_may_differ(name, value):
    """Fields by which slices are made, what is counted besides, how it was encoded."""
    before, after = named("harbour"), other(named("harbour"))
    after["settings"][name] = value
    assert differing(before, after, choose(*sides(before, after), None, None)) == []


def test_the_fields_of_text_and_the_limits_must_be_equal():
    """As they were found, whether or not they were asked for."""
    before, after = named("harbour"), other(named("harbour"))
    after["settings"]["fields"] = {"text": ["title", "note"], "conversation": False}
    after["vocabularies"][0]["limit"]["value"] = 64
    found = differing(before, after, choose(*sides(before, after), None, None))
    assert [(own["what"], own["before"], own["after"]) for own in found] == [
        ("text", "note", "title,note"), ("limit of harbour", 128, 64),
    ]  # fmt: skip


def test_corpus_and_vocabulary_may_not_both_be_others():
    """Either may, and a limit belongs to its vocabulary."""
    for after, differs in (
        (other(named("harbour")), 0),
        (named("tide", "gale"), 0),
        (other(named("tide")), 1),
    ):
        before = named("harbour")
        found = differing(
            before, after, [Pair(before["vocabularies"][0], after["vocabularies"][0])]
        )
        assert len(found) == differs
    assert found[0]["what"] == "corpus and vocabulary at once"


def test_every_figure_of_every_common_slice_is_compared():
    """And the slices that one side alone has are named."""
    before, after = named("harbour"), other(named("harbour"))
    held = after["vocabularies"][0]["slices"]
    held["lang=xx"] = held.pop("lang=pt")
    document = compared(before, after)
    pair = document["pairs"][0]
    assert pair["slices"]["only_before"] == ["lang=pt"]
    assert pair["slices"]["only_after"] == ["lang=xx"]
    expected = {
        (key, name)
        for key in pair["slices"]["common"]
        for name in [*held[key]["figures"], *(held[key].get("usage") or ())]
    }
    found = [(own["slice"], own["figure"]) for own in document["differences"]]
    assert len(found) == len(set(found))
    assert set(found) == expected


def set_figure(audit, name: str, held) -> None:
    audit["vocabularies"][0]["slices"]["all"]["figures"][name] = held


@pytest.mark.parametrize(
    ("value", "verdict"), [(2.04, "higher"), (1.64, "lower"), (1.86, "no difference shown")]
)
def test_the_interval_of_a_ratio_adds_both_widths_in_squares(value, verdict):
    """1.84 ± 0.05 against ± 0.05: ± 0.0707."""
    before, after = named("harbour"), other(named("harbour"))
    set_figure(after, "fertility", material.value(value, value - 0.05, value + 0.05))
    own = difference(compared(before, after), "fertility")
    assert own["difference"] == pytest.approx(value - 1.84)
    half = 0.05 * 2**0.5
    assert (own["low"], own["high"]) == pytest.approx((value - 1.84 - half, value - 1.84 + half))
    assert own["verdict"] == verdict
    assert (own["p_value"] < 0.05) is (verdict != "no difference shown")


@pytest.mark.parametrize(("origin", "wilson_used"), [(None, True), ("buoy", False)])
def test_p_values_of_proportions_go_by_wilson_unless_origins_are_drawn(origin, wilson_used):
    """56 of 70 against 48 of 80: Wilson's confidence that just reaches 0, else the normal one."""
    before, after = named("harbour"), other(named("harbour"))
    for audit, (seen, n) in ((before, (48, 80)), (after, (56, 70))):
        low, high = wilson(seen, n)
        held = {**material.value(seen / n, low, high), "numerator": seen, "denominator": n}
        set_figure(audit, "truncated_documents", held)
        audit["settings"]["origin"] = origin
    own = difference(compared(before, after), "truncated_documents")
    assert (own["low"], own["high"]) == pytest.approx((0.0524, 0.3339), abs=5e-5)
    if wilson_used:

        def reach(z: float) -> float:
            down, up = 0.8 - wilson(56, 70, z)[0], wilson(48, 80, z)[1] - 0.6
            return 0.2 - math.hypot(down, up)

        z = optimize.brentq(reach, 0.1, 10)
    else:
        halves = [max(p - low, high - p) for p, (low, high) in
                  ((0.8, wilson(56, 70)), (0.6, wilson(48, 80)))]  # fmt: skip
        z = 0.2 / (math.hypot(*halves) / 1.959964)
    assert own["p_value"] == pytest.approx(2 * stats.norm.sf(z), rel=1e-5)


def test_what_is_undefined_is_undecided_with_its_note():
    """On one side, on both, none seen, and what depends on the size of a corpus."""
    before, after = named("harbour"), other(named("harbour"))
    undefined = material.value(None, None, None, "no words in this slice")
    set_figure(before, "unknown_words", undefined)
    set_figure(
        after, "byte_tokens", {**material.value(0.0, 0.0, None, "none seen"), "numerator": 0}
    )
    set_figure(after, "changed_words", material.value(0.2, None, None, "one origin: no interval"))
    document = compared(before, after)
    notes = {own["figure"]: own["note"] for own in document["differences"] if own["slice"] == "all"}
    assert notes["unknown_words"] == "not defined before: no words in this slice"
    assert (
        notes["lossless_documents"] == "not defined on either side: the vocabulary has no decoder"
    )
    assert notes["byte_tokens"] == "none seen after, so that the interval has no upper end there"
    assert "on either side" in notes["dropped_characters"]
    assert notes["changed_words"] == "no interval after: one origin: no interval"
    assert notes["entropy"] == figures.OF_THE_CORPUS
    open_ended = difference(document, "byte_tokens")
    assert (open_ended["verdict"], open_ended["high"]) == (None, None)
    assert open_ended["low"] < open_ended["difference"] == -0.12


def test_relative_tokens_are_compared_for_one_reference_only():
    """Tokens over those of another vocabulary are another figure."""
    before, after = named("gale", "tide"), other(named("gale", "tide"))
    document = compared(before, after, name="tide")
    assert difference(document, "relative_tokens")["verdict"] == "no difference shown"
    first = compared(before, after, name="gale")
    assert difference(first, "relative_tokens")["note"] == figures.FIRST
    turned = compared(before, other(named("tide", "gale")), name="tide")
    assert difference(turned, "relative_tokens")["note"] == figures.OTHER_REFERENCE


def test_comparisons_are_counted_and_adjusted():
    """5 % of those with an interval are to be expected; the adjusted p-value is Holm's."""
    before, after = named("harbour"), other(named("harbour"))
    set_figure(after, "fertility", material.value(9.0, 8.9, 9.1))
    document = compared(before, after)
    counts = document["comparisons"]["figures"]
    decided = [own for own in document["differences"] if own["verdict"] is not None]
    assert counts["figures"] == len(document["differences"])
    assert counts["compared"] == len(decided)
    assert counts["expected_by_chance"] == pytest.approx(0.05 * len(decided), abs=0.01)
    assert (counts["differ"], counts["differ_after_adjustment"]) == (1, 1)
    others = [own["adjusted_p_value"] for own in decided if own["figure"] != "fertility"]
    assert set(others) == {1.0}


def test_lengths_are_compared_by_distance_and_quantile():
    """Far apart differs; without a critical value for one corpus, or over origins."""
    before, after = named("harbour"), other(named("harbour"))
    held = after["vocabularies"][0]["slices"]["all"]["lengths"]
    held["histogram"] = [[length + 300, documents] for length, documents in held["histogram"]]
    for quantile in held["quantiles"].values():
        quantile.update(
            {end: quantile[end] and quantile[end] + 300 for end in ("value", "low", "high")}
        )
    document = compared(before, after)
    whole = document["lengths"][0]
    assert (whole["verdict"], whole["slice"]) == ("differ", "all")
    assert whole["quantiles"]["p50"]["difference"] == 300
    assert whole["quantiles"]["p50"]["verdict"] == "higher"
    assert whole["quantiles"]["p99_9"]["verdict"] is None
    assert "too few documents" in whole["quantiles"]["p99_9"]["note"]
    assert document["comparisons"]["lengths"]["differ"] == 1
    same = compared(before, copy.deepcopy(before))["lengths"][0]
    assert (same["verdict"], same["critical_distance"], same["distance"]) == (None, None, 0.0)
    for audit in (before, after):
        audit["settings"]["origin"] = "buoy"
    assert "by origin" in compared(before, after)["lengths"][0]["note"]


def test_notes_say_what_a_reader_must_know():
    """Separate samples or one corpus, other versions, nothing changed."""
    before = named("harbour")
    after = other(before)
    after["made_with"] = {**after["made_with"], "icu": "79.1"}
    told = " ".join(compared(before, after)["notes"])
    assert "separate samples" in told
    assert "other versions of icu" in told
    same = " ".join(compared(before, copy.deepcopy(before))["notes"])
    assert "same documents" in same
    assert "are the same on both sides" in same


def word(text: str, extra: int, broken: str = "a·b"):
    return {"word": text, "extra_tokens": str(extra), "broken": broken}


def test_words_move_by_their_cost_in_a_million():
    """Rows of one word add up; corpora of other sizes compare; ties go by the word."""
    before = [word("keel", 4), word("keel", 6, "ke·el"), word("buoy", 10), word("fog", 1)]
    after = [word("keel", 10), word("buoy", 20), word("gale", 8), word("ebb", 8)]
    found = excerpts.words(before, after, (1000, 2000))
    assert [(own["word"], own["change_per_million"]) for own in found["appeared"]] == [
        ("ebb", 4000.0), ("gale", 4000.0),
    ]  # fmt: skip
    assert [own["word"] for own in found["vanished"]] == ["fog"]
    assert [(own["word"], own["before"], own["after"]) for own in found["moved"]] == [
        ("keel", 10, 10)
    ]  # buoy costs the same in a million
    assert found["moved"][0]["broken"] == "a·b"
    assert found["counts"] == {"appeared": 2, "vanished": 1, "moved": 1}


def test_characters_move_by_fate():
    """A character that was unknown and is now spelled in bytes vanished and appeared."""

    def row(fate: str, times: int):
        return {"character": "é", "code_point": "U+00E9", "name": "E ACUTE", "script": "Latin",
                "fate": fate, "count": str(times)}  # fmt: skip

    found = excerpts.characters([row("unknown", 5)], [row("byte-spelled", 5)], (100, 100))
    assert [own["fate"] for own in found["appeared"]] == ["byte-spelled"]
    assert [own["fate"] for own in found["vanished"]] == ["unknown"]


def test_tables_that_are_missing_or_empty_are_said():
    """Which one, and on which side; words can be left out on request."""
    assert excerpts.words(None, [], (1, 1))["note"] == "no words.csv beside the audit before"
    both = excerpts.characters(None, None, (1, 1))
    assert both["note"] == "no characters.csv beside the audit before and after"
    assert excerpts.words([], [], (1, 1))["note"] == "words.csv lists none on either side"
    left_out = compared(named("a"), other(named("a")), tables=(Tables(None, None, True),) * 2)
    assert left_out["pairs"][0]["words"]["note"] == "left out on request"
