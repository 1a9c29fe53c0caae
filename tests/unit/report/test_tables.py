"""Tables as CSV: what a spreadsheet would compute comes as text."""

import csv
import io

import pytest

from auditor.report.tables import as_csv, frame


@pytest.mark.parametrize(
    "cell", ["=1+1", "+1", "-1+2", "@SUM(A1)", "\tx", "\rx", '=HYPERLINK("x")']
)
def test_a_formula_comes_behind_an_apostrophe(cell):
    """In the cell, whatever quoting the CSV form needs."""
    [row] = csv.DictReader(io.StringIO(as_csv(frame(("label",), [(cell,)])), newline=""))
    assert row["label"] == f"'{cell}"


@pytest.mark.parametrize("cell", ["=", "-", "lang==x", "a=1", "Über", -1.5, 7, None, ""])
def test_everything_else_stays_as_it_is(cell):
    """Signs by themselves, numbers below 0, text that holds such signs further on."""
    [row] = csv.DictReader(io.StringIO(as_csv(frame(("label", "n"), [(cell, 1)])), newline=""))
    assert row["label"] == ("" if cell is None else str(cell))
