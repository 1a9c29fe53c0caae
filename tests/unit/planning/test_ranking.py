"""The ranking of candidates: scores by hand, and what moving the weights does."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.errors import SettingsError
from auditor.planning import ranking

WEIGHTS = {"tokens": 1.0, "losses": 10.0, "terms": 0.0, "parameters": 0.0}
# Few tokens and some losses; more tokens and none.
TWO = ranking.shortfalls(
    {"short": 1000, "whole": 1100}, {"short": 0.02, "whole": 0.0}, {}, {"short": 400, "whole": 300}
)


def test_shortfalls_are_shares_of_the_best():
    """1,100 of 1,000 tokens are 10 % more; 0.02 against 0 lost; 400 of 300 entries a third more."""
    assert TWO["short"] == pytest.approx({"tokens": 0, "losses": 0.02, "parameters": 1 / 3})
    assert TWO["whole"] == pytest.approx({"tokens": 0.1, "losses": 0, "parameters": 0})
    with_terms = ranking.shortfalls({"a": 1, "b": 1}, {"a": 0, "b": 0}, {"a": 0.2, "b": 0.9},
                                    {"a": 1, "b": 1})  # fmt: skip
    assert with_terms["a"]["terms"] == pytest.approx(0.7)


def test_scores_are_sums_of_weight_and_shortfall():
    """tokens=1,losses=10: 0.2 for the one, 0.1 for the other, which comes first."""
    found = ranking.rank(TWO, WEIGHTS)
    assert [row["vocabulary"] for row in found["order"]] == ["whole", "short"]
    assert [row["score"] for row in found["order"]] == pytest.approx([0.1, 0.2])
    assert "terms" not in found["weights"]


def test_a_first_place_that_halving_a_weight_turns():
    """With losses=5 both stand at 0.1; at 4 the other is first: 5 is the turning point."""
    stability = ranking.rank(TWO, WEIGHTS)["stability"]
    points = {(p["rival"], p["criterion"]): p["weight"] for p in stability["turning_points"]}
    assert points["short", "losses"] == pytest.approx(5)
    assert points["short", "tokens"] == pytest.approx(2)
    closer = ranking.rank(TWO, {**WEIGHTS, "losses": 6.0})["stability"]
    assert closer["holds_when_one_weight_is_halved_or_doubled"] is False
    assert {"criterion": "losses", "times": 0.5, "first": "short"} in closer["changes"]
    firm = ranking.rank(TWO, {**WEIGHTS, "losses": 100.0})["stability"]
    assert firm["holds_when_one_weight_is_halved_or_doubled"] is True


def test_a_candidate_that_is_best_in_everything_is_first_in_every_weighting():
    """Every weighting of three criteria in steps of a twentieth: 22·21/2 = 231."""
    best = ranking.shortfalls({"a": 10, "b": 20}, {"a": 0, "b": 0.1}, {}, {"a": 5, "b": 6})
    stability = ranking.rank(best, ranking.USUAL)["stability"]
    assert stability["first_in_everything"] is True
    assert stability["weightings"] == math.comb(22, 2) == 231
    assert stability["first_in_weightings"] == {"a": 231, "b": 0}
    assert stability["turning_points"] == []


def test_one_candidate_has_nothing_to_be_ranked_against():
    """No stability of a single one."""
    only = ranking.shortfalls({"a": 10}, {"a": 0.5}, {}, {"a": 5})
    found = ranking.rank(only, ranking.USUAL)
    assert found["stability"] is None
    assert found["order"][0]["score"] == 0


@given(
    st.dictionaries(
        st.sampled_from("abcd"),
        st.fixed_dictionaries(
            {name: st.integers(0, 100).map(lambda n: n / 100) for name in ranking.CRITERIA}
        ),
        min_size=2,
    ),
    st.fixed_dictionaries(
        {name: st.integers(0, 50).map(lambda n: n / 10) for name in ranking.CRITERIA}
    ),
)
def test_turning_points_are_where_two_draw_level(found, weights):
    """With that one weight, and the others as they are, both have one score."""
    ranked = ranking.rank(found, weights)
    first = ranked["order"][0]["vocabulary"]
    for point in ranked["stability"]["turning_points"]:
        moved = {**weights, point["criterion"]: point["weight"]}
        ours, theirs = (
            sum(moved[name] * found[own][name] for name in moved)
            for own in (first, point["rival"])
        )  # fmt: skip
        assert ours == pytest.approx(theirs, rel=1e-6, abs=1e-6 * max(1, point["weight"]))


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("speed=1", "'speed' is nothing that can be weighed."),
        ("", "'' is nothing that can be weighed."),
        ("tokens", "'' is no weight for tokens."),
        ("tokens=x", "'x' is no weight for tokens."),
        ("tokens=-1", "the weight of tokens is not at least 0."),
        ("tokens=1,tokens=2", "tokens is weighed twice."),
        ("tokens=0", "nothing is weighed."),
    ],
)
def test_weights_that_cannot_be_read_say_why(text, told):
    """Each with the criteria there are."""
    with pytest.raises(SettingsError) as refused:
        ranking.parse_weights(text)
    assert refused.value.message == told
    assert "parameters" in refused.value.hint


def test_weights_are_read_exactly():
    """What is not named weighs nothing."""
    assert ranking.parse_weights("tokens=0.5, losses=10") == {
        "tokens": 0.5, "losses": 10.0, "terms": 0.0, "parameters": 0.0,
    }  # fmt: skip
