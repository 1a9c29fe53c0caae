"""Whole comparisons of languages: against the oracle's counts, and whatever the way."""

from __future__ import annotations

from dataclasses import replace

import jsonschema
import orjson
import pytest

from auditor.corpus import ReadOptions
from auditor.errors import SettingsError
from auditor.report import contract
from auditor.runs.auditing import assess
from auditor.runs.languages import compare_languages
from auditor.runs.plan import Plan
from auditor.vocabulary import VocabularySpec
from tests import oracle
from tests.oracle.intervals import ratio_interval
from tests.unit.runs.conftest import DEMO, VOCABULARIES

NOTICES = DEMO / "safety_notices.jsonl"


def plan(corpus, *names, parallel="notice", **settings):
    specs = tuple(VocabularySpec(str(DEMO / "vocabularies" / name)) for name in names)
    size = settings.pop("batch_bytes", 1 << 19)
    options = ReadOptions(by=("lang",), parallel=parallel, batch_bytes=size)
    return Plan((str(corpus),), specs, options, graphemes=True, **settings)


def counted(name):
    """Return language → notice → tokens, one document at a time by the oracle."""
    folder = DEMO / "vocabularies" / name
    model = folder / "tokenizer.model"
    opened = (
        oracle.open_sentencepiece(model)
        if model.exists()
        else oracle.open_tokenizers(folder / "tokenizer.json")
    )
    rows = [orjson.loads(line) for line in NOTICES.read_bytes().splitlines()]
    documents = [oracle.Document(row.pop("text"), row) for row in rows]
    held: dict[str, dict[int, int]] = {}
    for row, tokens in zip(rows, oracle.tokens_per_document(documents, opened), strict=True):
        held.setdefault(row["lang"], {})[row["notice"]] = tokens
    return held


@pytest.mark.parametrize("name", VOCABULARIES)
def test_premiums_equal_the_oracles_pairs(tmp_path, name):
    """Both totals to the integer, the interval over pairs, the mean of single ratios."""
    found = compare_languages(plan(NOTICES, name), ("en",), tmp_path / "l").document
    held = counted(name)
    [vocabulary] = found["vocabularies"]
    assert {own["language"] for own in vocabulary["languages"]} == held.keys()
    for own in vocabulary["languages"]:
        ours, theirs = held[own["language"]], held["en"]
        y, x = [ours[n] for n in sorted(ours)], [theirs[n] for n in sorted(ours)]
        premium = own["premium"]
        totals = premium["ratio_of_totals"]
        assert (totals["numerator"], totals["denominator"]) == (sum(y), sum(x))
        low, high = ratio_interval(y, x, is_share=False)
        assert (totals["low"], totals["high"]) == pytest.approx((low, high), rel=1e-12)
        mean = sum(a / b for a, b in zip(y, x, strict=True)) / len(y)
        assert premium["mean_of_ratios"]["value"] == pytest.approx(mean, rel=1e-12)
        assert premium["pairs"] == 60
    costs = [own["premium"]["ratio_of_totals"]["value"] for own in vocabulary["languages"]]
    assert costs == sorted(costs, reverse=True)


def test_figures_are_those_of_an_audit(tmp_path):
    """Every figure that both give, with its interval, for each language."""
    settings = plan(NOTICES, VOCABULARIES[1], parallel=None)
    found = compare_languages(settings, (), tmp_path / "l").document
    audit = assess(settings, tmp_path / "a").audit
    slices = audit["vocabularies"][0]["slices"]
    for own in found["vocabularies"][0]["languages"]:
        held = slices[f"lang={own['language']}"]
        shared = own["figures"].keys() & held["figures"].keys()
        assert len(shared) > 10
        assert {n: own["figures"][n] for n in shared} == {n: held["figures"][n] for n in shared}
        assert own["counts"] == held["counts"]
        per_byte = own["figures"]["tokens_per_byte"]
        assert per_byte["value"] == held["counts"]["tokens"] / held["counts"]["bytes"]
        spent = {name: n for name, n in own["cost"].items() if name != "in_broken_words"}
        assert sum(spent.values()) == own["counts"]["tokens"]
        assert sum(row["tokens"] for row in own["scripts"]) == own["counts"]["tokens"]
        assert sum(row["characters"] for row in own["scripts"]) == own["counts"]["characters"]


def test_the_same_bytes_for_any_number_of_workers_and_batch_size(tmp_path):
    """One process and two, small batches and large ones."""
    written = []
    for place, (workers, size) in enumerate([(1, 1 << 19), (2, 1 << 11), (1, 300)]):
        settings = plan(NOTICES, VOCABULARIES[0], workers=workers, batch_bytes=size)
        done = compare_languages(settings, ("en", "pt"), tmp_path / str(place))
        written.append({path.name: path.read_bytes() for path in done.files})
    assert written[0] == written[1] == written[2]


@pytest.mark.parametrize("references", [(), ("en",), ("en", "el")])
@pytest.mark.parametrize("parallel", [None, "notice"])
def test_the_document_keeps_its_schema(tmp_path, references, parallel):
    """`languages.json` against the schema that ships, two vocabularies."""
    if parallel and not references:
        with pytest.raises(SettingsError, match="reference"):
            compare_languages(plan(NOTICES, VOCABULARIES[0]), ())
        return
    settings = plan(NOTICES, *VOCABULARIES[:2], parallel=parallel)
    compare_languages(settings, references, tmp_path / "l")
    written = orjson.loads((tmp_path / "l" / "languages.json").read_bytes())
    jsonschema.validate(written, contract.schema("languages"))
    for vocabulary in written["vocabularies"]:
        for own in vocabulary["languages"]:
            assert len(own["relative"]) == len(references)
            assert (own["premium"] is None) is (parallel is None)
            assert len(own["further_premiums"]) == (max(0, len(references) - 1) if parallel else 0)


def odd(tmp_path):
    """Write notices of which some are labelled wrong, twice, or not at all."""
    prose = "The buoy was lifted on board and its mooring chain was found worn near the shackle."
    greek = "Η σημαδούρα ανασύρθηκε και η αλυσίδα βρέθηκε φθαρμένη κοντά στο επάνω κλειδί."
    rows = [
        {"notice": 1, "lang": "en", "text": prose},
        {"notice": 1, "lang": "el", "text": greek},
        {"notice": 2, "lang": "el", "text": prose},
        {"notice": 2, "lang": "en", "text": prose},
        {"notice": 3, "lang": "el", "text": greek},
        {"notice": 3, "lang": "el", "text": "e\u0301ψ " * 12},
        {"notice": 3, "lang": "en", "text": prose},
        {"notice": None, "lang": "eng", "text": prose},
        {"notice": 4, "lang": None, "text": prose},
        {"notice": 5, "lang": "harbour talk", "text": prose},
    ]
    path = tmp_path / "odd.jsonl"
    path.write_bytes(b"".join(orjson.dumps(row) + b"\n" for row in rows))
    return path


def test_labels_forms_and_contents_that_are_odd_are_told(tmp_path):
    """A wrong label with its place, unknown and near-duplicate labels, decomposed text, pairs."""
    settings = plan(odd(tmp_path), VOCABULARIES[0])
    done = compare_languages(settings, ("en",), tmp_path / "l")
    labels = done.document["labels"]
    assert labels["contradicting"] == 1
    [found] = labels["first"]
    assert (found["line"], found["label"], found["script"]) == (3, "el", "Latin")
    lines = (tmp_path / "l" / "label_mismatches.jsonl").read_bytes().splitlines()
    assert [orjson.loads(line) for line in lines] == [found]
    assert labels["unknown"] == ["(none)", "harbour talk"]
    assert labels["near_duplicates"] == [["en", "eng"]]
    assert done.document["parallel"] == {"contents": 5, "records_without_content": 1}
    held = {own["language"]: own for own in done.document["vocabularies"][0]["languages"]}
    premium = held["el"]["premium"]
    assert (premium["pairs"], premium["ambiguous"], premium["missing"]) == (2, 1, 0)
    assert held["eng"]["premium"]["missing"] == 3
    assert held["el"]["label_mismatch"] == 1
    form = held["el"]["normal_form"]
    assert (form["documents"], form["characters"]) == (1, 48)
    assert form["tokens_as_nfc"] < form["tokens"]
    assert held["en"]["normal_form"]["documents"] == 0


def test_a_corpus_without_labels_or_reference_is_refused(tmp_path):
    """The message says which option is needed, and which labels there are."""
    settings = plan(NOTICES, VOCABULARIES[0])
    with pytest.raises(SettingsError) as refused:
        compare_languages(settings, ("fi",), tmp_path / "l")
    assert "ar, de, el, en" in (refused.value.hint or "")
    none = replace(settings, read=replace(settings.read, by=()))
    with pytest.raises(SettingsError) as refused:
        compare_languages(none, ("en",), tmp_path / "l")
    assert "--by" in (refused.value.hint or "")
    assert not (tmp_path / "l").exists()
