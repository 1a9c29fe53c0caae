"""Reading a policy: every mistake is told with its place and the nearest names."""

from __future__ import annotations

from decimal import Decimal

import pytest

from auditor.errors import SettingsError
from auditor.policy import (
    read_policy,
    refuse_unknown_fields,
    refuse_unknown_vocabularies,
)


@pytest.fixture
def read(tmp_path):
    def call(text: str):
        path = tmp_path / "limits.toml"
        path.write_text(text, encoding="utf-8")
        return read_policy(path)

    return call


def test_bounds_are_read_as_written(read):
    """Numbers stay exact; a figure may have several bounds; ends, reach and name are kept."""
    policy = read(
        "[all]\ntruncated_documents = {max = 0.01}\np95 = {max = 512}\n"
        '["lang=*"]\nfertility = [{min = 1, max = 2.5}, {max = 3, on = "interval",'
        ' vocabulary = "harbour"}]\n'
    )
    told = [(b.slices, b.figure, b.least, b.most, b.on, b.vocabulary) for b in policy.bounds]
    assert told == [
        ("all", "truncated_documents", None, Decimal("0.01"), "value", None),
        ("all", "p95", None, Decimal(512), "value", None),
        ("lang=*", "fertility", Decimal(1), Decimal("2.5"), "value", None),
        ("lang=*", "fertility", None, Decimal(3), "interval", "harbour"),
    ]


WRONG = {
    "no TOML": ("[all\n", ["cannot be read as TOML", "line 1"]),
    "empty": ("# nothing\n", ["holds no bound"]),
    "an empty table": ("[all]\n", ["holds no bound"]),
    "outside of a table": ("fertility = {max = 2}\n", ["'fertility'", "outside of any table"]),
    "an outer number": ("fertility = 2\n", ["outside of any table", "[all]"]),
    "no slice": ("[lang]\nfertility = {max = 2}\n", ["'lang' is no slice", '["field=*"]']),
    "unknown figure": (
        "[all]\nfertilty = {max = 2}\n",
        ["'fertilty'", "Nearest: fertility", "[all]"],
    ),
    "nothing like it": ("[all]\nzzz = {max = 2}\n", ["'zzz'", "There are: fertility"]),
    "not by slice": ('["lang=en"]\nentropy = {max = 9}\n', ["whole corpus only", "[all]"]),
    "a bare number": ("[all]\nfertility = 2\n", ["needs min, max or both", "{max = 0.01}"]),
    "no end": ('[all]\nfertility = {on = "value"}\n', ["needs min, max or both", "fertility"]),
    "unknown key": ("[all]\nfertility = {maxi = 2, max = 2}\n", ["'maxi'", "Nearest: max"]),
    "a text": ('[all]\nfertility = {max = "2"}\n', ["max = '2' is no number"]),
    "a truth": ("[all]\nfertility = {max = true}\n", ["max = True is no number"]),
    "crossed": ("[all]\nfertility = {min = 3, max = 2}\n", ["min (3) is above max (2)"]),
    "a percentage": ("[all]\ntruncated_documents = {max = 5}\n", ["from 0 to 1", "max = 0.05"]),
    "below 0": ("[all]\nfertility = {min = -1}\n", ["min = -1 cannot be", "never below 0"]),
    "no finite number": ("[all]\nfertility = {max = inf}\n", ["finite"]),
    "not a number": ("[all]\nfertility = {max = nan}\n", ["finite"]),
    "unknown reach": ('[all]\nfertility = {max = 2, on = "mean"}\n', ["'mean'", "'interval'"]),
    "vocabulary": ("[all]\nfertility = {max = 2, vocabulary = 3}\n", ["vocabulary is no text"]),
}


@pytest.mark.parametrize("case", list(WRONG))
def test_what_is_wrong_is_told_with_its_place(read, case):
    """Each message names the file, what is wrong and what to write instead."""
    text, named = WRONG[case]
    with pytest.raises(SettingsError) as told:
        read(text)
    assert [word for word in ["limits.toml", *named] if word not in str(told.value)] == []
    assert told.value.hint


def test_a_file_that_is_no_text_is_told(tmp_path):
    """Bytes that are no UTF-8 are no policy."""
    (tmp_path / "limits.toml").write_bytes(b"\xff\xfe")
    with pytest.raises(SettingsError, match=r"limits\.toml: the policy cannot be read"):
        read_policy(tmp_path / "limits.toml")


@pytest.mark.parametrize(
    ("slices", "fields", "fits"),
    [
        ("all", [], True),
        ("lang=en", ["lang"], True),
        ("lang=*", ["station", "lang"], True),
        ("a=b=*", ["a=b"], True),
        ("lang=en", [], False),
        ("langs=en", ["lang"], False),
    ],
)
def test_fields_are_checked_before_measuring(read, slices, fields, fits):
    """A slice of a field that --by does not name is refused at once."""
    policy = read(f'["{slices}"]\nfertility = {{max = 2}}\n')
    if fits:
        refuse_unknown_fields(policy, fields)
        return
    with pytest.raises(SettingsError, match="--by"):
        refuse_unknown_fields(policy, fields)


def test_vocabularies_are_checked_before_measuring(read):
    """By name or source; the nearest names are told."""
    policy = read('[all]\nfertility = {max = 2, vocabulary = "harbor"}\n')
    refuse_unknown_vocabularies(policy, [("harbor", "models/h"), ("tide", "models/t")])
    refuse_unknown_vocabularies(policy, [("h", "harbor")])
    with pytest.raises(SettingsError, match=r"no vocabulary 'harbor'.*Nearest: harbour"):
        refuse_unknown_vocabularies(policy, [("tide", "t"), ("harbour", "models/h")])
