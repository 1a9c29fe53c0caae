"""Vetting vocabularies for a domain: against audits, and every number that the verdict says."""

from __future__ import annotations

import re

import jsonschema
import orjson
import pytest

from auditor.corpus import ReadOptions
from auditor.errors import AuditError
from auditor.figures import independent
from auditor.planning import cost
from auditor.planning.model import parse_model
from auditor.planning.ranking import parse_weights
from auditor.report import contract
from auditor.report.domain_answers import shared
from auditor.report.formatting import FIGURES, figure, proportion, ranged
from auditor.runs.auditing import assess
from auditor.runs.domain import vet_domain
from auditor.runs.plan import Plan
from auditor.runs.vetted import DomainWishes
from auditor.text.halves import halves_of
from auditor.vocabulary import VocabularySpec
from tests.unit.runs.conftest import DEMO, VOCABULARIES, plan

NOTES, EVERYDAY = DEMO / "inspection_notes.jsonl", DEMO / "everyday.txt"
GENERAL = DomainWishes(general=(str(EVERYDAY),), terms=DEMO / "glossary.csv")
NUMBER = re.compile(r"\d+(?:,\d{3})*(?:\.\d+)?")


def specs(*names):
    return tuple(VocabularySpec(str(DEMO / "vocabularies" / name)) for name in names)


def vetted(tmp_path, wishes=GENERAL, names=VOCABULARIES, **settings):
    return vet_domain(plan(NOTES, *names, **settings), wishes, tmp_path / "d").document


@pytest.fixture(scope="module")
def demo(tmp_path_factory):
    """The demo's notes beside everyday text, under all four vocabularies."""
    return vetted(tmp_path_factory.mktemp("demo"))


def test_figures_are_those_of_an_audit(tmp_path, demo):
    """Counts, figures, lengths and use of each candidate equal `assess` on the same corpus."""
    audit = assess(plan(NOTES, *VOCABULARIES), tmp_path / "a").audit
    for own, held in zip(demo["candidates"], audit["vocabularies"], strict=True):
        whole = held["slices"]["all"]
        assert own["counts"] == whole["counts"]
        assert own["figures"] == whole["figures"]
        assert own["usage"] == whole["usage"]
        lost = sum(
            whole["figures"][name]["numerator"] or 0
            for name in ("unknown_characters", "dropped_characters")
        )
        assert own["lost_characters"]["numerator"] == lost
    assert demo["corpus"] == audit["corpus"]


def test_the_penalty_is_the_ratio_to_the_audit_of_the_general_text(tmp_path, demo):
    """By slices that both hold, here the whole; from the corpus as from its audit."""
    names = VOCABULARIES
    everyday = assess(Plan((str(EVERYDAY),), specs(*names)), tmp_path / "general").audit
    for row in demo["penalty"]:
        held = next(own for own in everyday["vocabularies"] if own["name"] == row["vocabulary"])
        assert row["slice"] == "all"
        assert row["general"] == held["slices"]["all"]["figures"][row["figure"]]
        assert row["ratio"] == independent.ratio(row["domain"], row["general"]).as_json()
    assert len(demo["penalty"]) == 4 * (len(FIGURES) - 2)
    again = vetted(tmp_path, DomainWishes(general=(str(tmp_path / "general"),)))
    assert again["penalty"] == demo["penalty"]
    assert again["general"]["measured"] == "audit"
    same = ("sources", "digest", "documents", "words")
    assert all(again["general"][name] == demo["general"][name] for name in same)


def test_the_halves_are_audits_of_half_the_documents(tmp_path, demo):
    """Documents whose text falls into the first half, audited by themselves."""
    rows = [orjson.loads(line) for line in NOTES.read_bytes().splitlines()]
    first = [row for row, half in zip(rows, halves_of(r["text"] for r in rows), strict=True)
             if half == 1]  # fmt: skip
    path = tmp_path / "first.jsonl"
    path.write_bytes(b"".join(orjson.dumps(row) + b"\n" for row in first))
    audit = assess(plan(path, *VOCABULARIES), tmp_path / "a").audit
    assert len(rows) / 3 < len(first) < 2 * len(rows) / 3
    for own, held in zip(demo["candidates"], audit["vocabularies"], strict=True):
        assert own["halves"]["documents"] == [len(first), len(rows) - len(first)]
        for name, values in own["halves"]["figures"].items():
            assert values[0] == held["slices"]["all"]["figures"][name]["value"]


def test_candidates_are_paired_on_each_document(tmp_path, demo):
    """The ratio to the first one named is `relative_tokens` of the audit."""
    first = demo["candidates"][0]["name"]
    for own in demo["candidates"][1:]:
        pair = next(pair for pair in own["paired"] if pair["other"] == first)
        assert pair["tokens_ratio"] == own["figures"]["relative_tokens"]
        back = next(
            pair for pair in demo["candidates"][0]["paired"] if pair["other"] == own["name"]
        )
        less, more = pair["loss_difference"], back["loss_difference"]
        assert less["numerator"] == -more["numerator"]
        assert less["high"] == pytest.approx(-more["low"])


def test_the_price_follows_from_the_lengths(tmp_path):
    """Parameters by hand; FLOPs summed over the exact histogram of an audit, cut at the limit."""
    shape = parse_model("layers=2,width=64,heads=4,inner=256")
    made = vetted(tmp_path, DomainWishes(shape=shape), ("harbour-bytelevel",))
    held = assess(plan(NOTES, "harbour-bytelevel"), tmp_path / "a").audit["vocabularies"][0]
    own, limit = made["candidates"][0], held["limit"]["value"]
    assert own["price"]["embedding_parameters"] == 64 * held["entries"]
    assert own["price"]["position_parameters"] == 64 * limit
    histogram = held["slices"]["all"]["lengths"]["histogram"]
    flops = sum(n * cost.forward_flops(shape, min(length, limit)) for length, n in histogram)
    documents = held["slices"]["all"]["counts"]["documents"]
    assert own["price"]["forward_flops_per_document"] == pytest.approx(flops / documents)
    assert made["penalty"] == []
    assert made["general"] is None


def test_remedies_are_counted_on_the_corpus(tmp_path):
    """A limit that keeps more documents whole, by audits at both limits; NFC, by encoding it."""
    made = vetted(tmp_path, DomainWishes(), ("harbour-bytelevel",))
    own = made["candidates"][0]
    longer = next(found for found in own["remedies"] if found["remedy"] == "longer limit")
    again = Plan(
        (str(NOTES),),
        (VocabularySpec(str(DEMO / "vocabularies" / "harbour-bytelevel"), limit=longer["length"]),),
        ReadOptions(by=("lang",)),
    )
    held = assess(again, tmp_path / "a").audit["vocabularies"][0]["slices"]["all"]["figures"]
    cut = own["figures"]["truncated_documents"]["numerator"]
    assert cut - held["truncated_documents"]["numerator"] == longer["documents"]
    assert held["truncated_documents"]["value"] <= 0.01


def test_text_that_is_not_composed_is_told_with_what_composing_saves(tmp_path):
    """Ten documents of decomposed letters: the tokens of both forms, by the library itself."""
    from tokenizers import Tokenizer

    words = "e\u0301te\u0301 a\u0300 cre\u0301er"
    path = tmp_path / "d.jsonl"
    path.write_bytes(
        b"".join(orjson.dumps({"text": f"{words} {n}", "lang": "fr"}) + b"\n" for n in range(10))
    )
    made = vet_domain(plan(path, "harbour-bytelevel"), DomainWishes(), tmp_path / "o").document
    tokenizer = Tokenizer.from_file(
        str(DEMO / "vocabularies" / "harbour-bytelevel" / "tokenizer.json")
    )
    tokenizer.no_truncation()
    composed = "été à créer"
    saved = sum(
        len(tokenizer.encode(f"{words} {n}", add_special_tokens=False).ids)
        - len(tokenizer.encode(f"{composed} {n}", add_special_tokens=False).ids)
        for n in range(10)
    )
    told = {own["remedy"]: own for own in made["candidates"][0]["remedies"]}
    assert told["normalise first"]["tokens"] == saved > 0
    assert told["normalise first"]["documents"] == 10


def _of_text(document):
    """What may be said of kinds of text, growth and steadiness."""
    held = set()
    for row in document["kinds"]:
        if row["share_of_characters"] is not None:
            held.add(proportion(row["share_of_characters"])[:-1])
        held.add(proportion(row["share_of_tokens"])[:-1])
    held |= set(NUMBER.findall(shared(document["growth"]["words"]["next_is_new"])))
    for own in document["steadiness"]:
        held |= set(NUMBER.findall(shared(own["ways"]["all"]["one"])))
    return held


def spoken(document):
    """Every number that a verdict may say, as the reports write it."""
    held = set()
    for own in document["candidates"]:
        for name in ("byte_spelled_characters", "fertility", "truncated_documents"):
            held |= set(NUMBER.findall(ranged(name, own["figures"][name])))
        held |= set(NUMBER.findall(shared(own["lost_characters"])))
        held |= {f"{own['limit']['value']:,}"} if own["limit"]["value"] else set()
        for pair in own["paired"]:
            held |= set(NUMBER.findall(figure(pair["tokens_ratio"])))
        for found in own["remedies"]:
            numbers = [found[name] for name in ("entries", "length", "documents") if name in found]
            held |= {f"{number:,}" for number in numbers} | {proportion(found["share"])[:-1]}
        if own["terms"]:
            by_term = own["terms"]["by_term"]
            numbers = [own["terms"]["terms"], len(own["terms"]["not_in_corpus"])]
            numbers += [by_term[name]["count"] for name in ("words_whole", "byte_spelled")]
            numbers.append(by_term["unknown"]["count"] + by_term["dropped"]["count"])
            held |= {f"{number:,}" for number in numbers}
            held.add(proportion(by_term["words_whole"]["share"])[:-1])
    for row in document["penalty"]:
        held |= set(NUMBER.findall(figure(row["ratio"])))
    held |= _of_text(document)
    stability = document["ranking"]["stability"]
    if stability:
        held |= {f"{n:,}" for n in (*stability["first_in_weightings"].values(),
                                    stability["weightings"])}  # fmt: skip
    return held | {f"{weight:g}" for weight in document["ranking"]["weights"].values()}


def said(document):
    return [n for told in document["verdict"].values() for sentence in told
            for n in NUMBER.findall(sentence)]  # fmt: skip


def test_every_number_of_the_verdict_stands_in_the_document(tmp_path, demo):
    """With general text and four candidates, with one alone, and with other weights."""
    alone = vetted(tmp_path, DomainWishes(), ("harbour-wordpiece",))
    weighed = vetted(tmp_path, DomainWishes(weights=parse_weights("tokens=1,parameters=0.5")))
    for document, least in ((demo, 40), (alone, 8), (weighed, 30)):
        numbers = said(document)
        assert len(numbers) >= least
        assert [number for number in numbers if number not in spoken(document)] == []


def test_the_verdict_names_losses_first_then_cost(demo):
    """In this order, the best candidate first; what loses a fifth of the text is not first."""
    assert list(demo["verdict"]) == ["losses", "cost", "terms", "choice", "help", "sample"]
    order = [row["vocabulary"] for row in demo["ranking"]["order"]]
    assert order[-1] == "harbour-wordpiece"
    assert [told.split()[0] for told in demo["verdict"]["losses"]] == order


@pytest.mark.parametrize("settings", [{"workers": 2}, {"batch_bytes": 1}, {"whole": True}])
def test_how_it_is_measured_changes_nothing(tmp_path, demo, settings):
    """Two processes, batches of one document, or documents whole: the same document."""
    made = vetted(tmp_path, **settings)
    made["settings"]["whole"] = demo["settings"]["whole"]
    assert made == demo


@pytest.mark.parametrize(
    ("wishes", "told"),
    [
        (DomainWishes(general=("a",)), "the audit does not hold harbour-wordpiece"),
        (DomainWishes(general=("w",)), "the audit was made with another setting of words"),
        (DomainWishes(general=("-",)), "standard input cannot be both"),
        (DomainWishes(general=("nowhere.txt",)), "nowhere.txt"),
    ],
)
def test_a_yardstick_that_does_not_fit_is_refused(tmp_path, monkeypatch, wishes, told):
    """Nothing is written, and the message says what does not fit."""
    monkeypatch.chdir(tmp_path)
    assess(Plan((str(EVERYDAY),), specs("harbour-bytelevel")), tmp_path / "a")
    other = Plan((str(EVERYDAY),), specs("harbour-wordpiece"), words="whitespace")
    assess(other, tmp_path / "w")
    corpus = "-" if wishes.general == ("-",) else str(NOTES)
    with pytest.raises(AuditError) as refused:
        vet_domain(Plan((corpus,), specs("harbour-wordpiece")), wishes, tmp_path / "d")
    assert told in f"{refused.value.where}: {refused.value.message}"
    assert not (tmp_path / "d").exists()


def test_kinds_of_text_cover_every_character_and_token_once(tmp_path, demo):
    """Their characters and tokens, those of several kinds apart, sum to the totals of `assess`."""
    audit = assess(plan(NOTES, *VOCABULARIES), tmp_path / "a").audit
    for held in audit["vocabularies"]:
        rows = [row for row in demo["kinds"] if row["vocabulary"] == held["name"]]
        counts = held["slices"]["all"]["counts"]
        assert sum(row["characters"] or 0 for row in rows) == counts["characters"]
        assert sum(row["tokens"] for row in rows) == counts["tokens"]
        by_kind = {row["kind"]: row for row in rows}
        assert by_kind["dates_and_times"]["characters"] > 0
        assert by_kind["(several)"]["characters"] is None


@pytest.mark.parametrize("which", ["demo", "alone", "damaged", "no words"])
def test_the_document_keeps_its_schema(tmp_path, demo, which):
    """`domain.json` against the schema that ships: everything, and as little as there can be."""
    if which == "demo":
        made = demo
    elif which == "alone":
        made = vetted(tmp_path, DomainWishes(width=64), VOCABULARIES[:1], excerpts=False)
    elif which == "damaged":
        wishes = DomainWishes(general=(str(DEMO / "damaged.jsonl"),), terms=DEMO / "glossary.csv")
        made = vet_domain(
            Plan((str(DEMO / "damaged.jsonl"),), specs(*VOCABULARIES[1:3])), wishes, tmp_path / "d"
        ).document
    else:
        path = tmp_path / "none.jsonl"
        path.write_bytes(b'{"text": "!!"}\n')
        made = vet_domain(Plan((str(path),), specs(*VOCABULARIES)), DomainWishes(), tmp_path / "d")
        made = made.document
    jsonschema.validate(orjson.loads(contract.dump(made)), contract.schema("domain"))


def test_growth_is_that_of_the_words_counted_out(demo):
    """Distinct words, those seen once, and used entries, by plain counting."""
    from collections import Counter

    from auditor.text.stretch import Stretch

    words: Counter[str] = Counter()
    for line in NOTES.read_bytes().splitlines():
        text = orjson.loads(line)["text"]
        held = Stretch([text]).words
        words.update(text[a:b] for a, b in zip(held.starts, held.ends, strict=True))
    found = demo["growth"]["words"]
    assert found["occurrences"] == demo["corpus"]["words"] == words.total()
    assert found["distinct"] == len(words)
    assert found["once"] == sum(n == 1 for n in words.values())
    for own, candidate in zip(demo["growth"]["entries"], demo["candidates"], strict=True):
        assert own["distinct"] == candidate["usage"]["used_entries"]["numerator"]
        assert own["occurrences"] == candidate["counts"]["tokens"]


def test_the_seed_draws_other_words(tmp_path, demo):
    """Another seed, other words; figures of the corpus stay."""
    other = vetted(tmp_path, DomainWishes(seed=5), ("harbour-bytelevel",))
    one = next(own for own in demo["steadiness"] if own["vocabulary"] == "harbour-bytelevel")
    assert other["steadiness"][0] != one
    assert other["steadiness"][0]["draws"] == one["draws"] == 5000
