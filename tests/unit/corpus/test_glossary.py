"""Glossaries: their formats, what makes two spellings one term, and what is refused."""

from __future__ import annotations

from fractions import Fraction

import pytest

from auditor.corpus.glossary import Glossary, Term, read_glossary
from auditor.errors import GlossaryError
from tests.unit.runs.conftest import DEMO


def written(folder, text, name="terms.csv"):
    path = folder / name
    path.write_bytes(text.encode() if isinstance(text, str) else text)
    return path


def test_plain_text_has_a_term_a_line(tmp_path):
    """Comments and blank lines are no terms; whitespace around and inside is evened out."""
    text = "# sea marks\n\n  wind \t vane \r\nAIS\n浮標\n# end"
    glossary = read_glossary(written(tmp_path, text, "terms.txt"))
    assert glossary == Glossary((Term("wind vane"), Term("AIS"), Term("浮標")))
    assert not glossary.weighted


@pytest.mark.parametrize(
    ("name", "sign"), [("a.csv", ","), ("a.csv", ";"), ("a.csv", "\t"), ("a.TSV", "\t")]
)
def test_tables_give_variants_and_weights(tmp_path, name, sign):
    """Rows of one term give several variants; a weight need not be said again."""
    rows = ["Term|variant|weight|note", "buoy|buoys|2.5|x", "buoy|boja||", "", "sinker|||", "||0|"]
    text = "\ufeff" + "\n".join(row.replace("|", sign) for row in rows[:-1])
    glossary = read_glossary(written(tmp_path, text, name))
    assert glossary.terms == (Term("buoy", ("buoys", "boja"), Fraction(5, 2)), Term("sinker"))
    assert glossary.weighted


def test_quotes_hold_delimiters_and_lines_are_counted_through_them(tmp_path):
    """A quoted field may hold a comma, quotes and a line end; the error after it has its line."""
    text = 'term,weight\n"lamp, ""red"" \n one",1\n"x",1\nbuoy,-1\n'
    path = written(tmp_path, text)
    with pytest.raises(GlossaryError) as fault:
        read_glossary(path)
    assert fault.value.where == f"{path}:5"
    glossary = read_glossary(written(tmp_path, text.replace("-1", "1"), "b.csv"))
    assert glossary.terms[0].term == 'lamp, "red" one'


def test_spellings_that_differ_in_case_are_one_term(tmp_path):
    """The first spelling stands; the others are variants of it."""
    glossary = read_glossary(written(tmp_path, "Buoy\nbuoy\nBuoy\nSTRASSE\nstraße\n", "a.txt"))
    assert glossary.terms == (Term("Buoy", ("buoy",)), Term("STRASSE", ("straße",)))
    assert glossary.terms[0].spellings == ("Buoy", "buoy")


@pytest.mark.parametrize(
    ("text", "line", "says"),
    [
        ("", 1, "holds no term"),
        ("term,variant\n", 1, "holds no term"),
        ("word,weight\nbuoy,1\n", 1, "Name the columns term"),
        ("term,term\nbuoy,1\n", 1, "each once"),
        ("term,weight\nbuoy,much\n", 2, "'much' is no number"),
        ("term,weight\nbuoy,-2\n", 2, "0 or more"),
        ("term,weight\nbuoy,nan\n", 2, "'nan' is no number"),
        ("term,weight\nbuoy,inf\n", 2, "'inf' is no number"),
        ("term,weight\nbuoy,1e999999999\n", 2, "is no number"),
        ('term,weight\nbuoy,"0,5"\n', 2, "like 2 or 0.5"),
        ("term,weight\nbuoy,1\nsinker,1\nBUOY,2\n", 4, "another weight in line 2"),
        ("term,weight\n,1\n", 2, "names no term"),
        ("term,weight\n+++,1\n", 2, "no letter or digit"),
        ("term,variant\nbuoy,--\n", 2, "no letter or digit"),
        ("term,variant\nbuoy,boja\nfloat,boja\n", 3, "'boja' is a spelling of 'buoy' (line 2)"),
        ("term,variant\nbuoy,boja\nboja,\n", 3, "and a term of its own"),
        ("term,variant\nboja,\nbuoy,boja\n", 3, "'boja' is a spelling of 'boja' (line 2)"),
        ("term,weight\nbuoy,1,2\n", 2, "3 columns instead of 2"),
        ('term,weight\n"buoy,1\n', 2, "Mend its quotes"),
        (b"term\nbuoy\n\xff\n", 3, "not UTF-8"),
    ],
)
def test_what_is_refused(tmp_path, text, line, says):
    """Each error names the file, the line and what to do."""
    path = written(tmp_path, text)
    with pytest.raises(GlossaryError) as fault:
        read_glossary(path)
    assert fault.value.where == f"{path}:{line}"
    assert fault.value.hint
    assert says in str(fault.value)


def test_a_file_that_is_not_there(tmp_path):
    """The path is named."""
    with pytest.raises(GlossaryError, match="cannot be read"):
        read_glossary(tmp_path / "none.csv")


def test_digests_tell_glossaries_apart():
    """Terms, variants, weights and whether there are any: each makes another digest."""
    made = [
        Glossary((Term("a"),)),
        Glossary((Term("a"),), weighted=True),
        Glossary((Term("a", ("b",)),)),
        Glossary((Term("a"), Term("b"))),
        Glossary((Term("a", (), Fraction(2)),)),
    ]
    assert len({glossary.digest for glossary in made}) == len(made)


def test_the_demo_glossary():
    """Sixty terms with weights."""
    glossary = read_glossary(DEMO / "glossary.csv")
    assert len(glossary.terms) == 60
    assert glossary.weighted
