"""Whole length plans: against audits with each length as their limit, and whatever the way."""

from __future__ import annotations

import re
from dataclasses import replace
from fractions import Fraction

import jsonschema
import orjson
import pytest

from auditor.corpus import ReadOptions
from auditor.planning.model import parse_model
from auditor.planning.plan import Wishes
from auditor.report import contract
from auditor.report.formatting import proportion, times
from auditor.report.plan_answers import candidate, percent
from auditor.runs.auditing import assess
from auditor.runs.audits import audit_at
from auditor.runs.lengths import plan_from_audit, plan_from_corpus
from auditor.runs.plan import Plan
from auditor.vocabulary import VocabularySpec
from tests.unit.runs.conftest import DEMO, VOCABULARIES, plan

NOTES = DEMO / "inspection_notes.jsonl"
MODEL = "layers=4,width=128,heads=2,inner=512,entries=900"
# What only a plan that reads the texts knows, and what names how it was made.
FROM_TEXTS = ("cutting", "sentences", "note")


def with_limit(settings, limit):
    specs = tuple(replace(spec, limit=limit) for spec in settings.vocabularies)
    return replace(settings, vocabularies=specs)


@pytest.mark.parametrize("name", VOCABULARIES)
def test_what_each_candidate_cuts_is_what_an_audit_with_that_limit_counts(tmp_path, name):
    """Every candidate: documents and tokens, intervals and notes, for all and each language."""
    settings = plan(NOTES, name)
    found = plan_from_corpus(settings, Wishes(), out=tmp_path / "plan").plan
    assert len(found["candidates"]) >= 2
    for own in found["candidates"]:
        audit = assess(with_limit(settings, own["length"]), tmp_path / "audit").audit
        slices = audit["vocabularies"][0]["slices"]
        assert own["slices"].keys() | {"all"} == slices.keys()
        for key, held in {"all": own, **own["slices"]}.items():
            for figure in ("truncated_documents", "truncated_tokens"):
                assert held[figure] == slices[key]["figures"][figure]


def test_an_audit_gives_the_same_plan_without_the_texts(tmp_path):
    """Everything but what needs the texts, which is null and says why."""
    settings = plan(NOTES, VOCABULARIES[0])
    wishes = Wishes(model=parse_model(MODEL), accepted=Fraction(1, 20))
    read = plan_from_corpus(settings, wishes, out=tmp_path / "read").plan
    assess(settings, tmp_path / "audit")
    told = plan_from_audit(audit_at(str(tmp_path / "audit")), wishes, out=tmp_path / "told").plan
    for one, other in zip(read["candidates"], told["candidates"], strict=True):
        assert [other[part] for part in FROM_TEXTS[:2]] == [None, None]
        assert "plan the corpus itself" in other["note"]
        kept = one.keys() - set(FROM_TEXTS)
        assert {name: one[name] for name in kept} == {name: other[name] for name in kept}
    assert read["buckets"] == told["buckets"]
    both = [
        {name: own for name, own in made["recommended"].items() if name != "because"}
        for made in (read, told)
    ]
    assert both[0] == both[1]


def test_the_same_bytes_for_any_number_of_workers_and_batch_size(tmp_path):
    """One process and two, batches of one document and of all."""
    ways = [(1, 1 << 19), (2, 1 << 12), (1, 1)]
    plans = [
        plan_from_corpus(
            plan(NOTES, VOCABULARIES[1], workers=workers, batch_bytes=size),
            Wishes(),
            out=tmp_path / str(place),
        )
        for place, (workers, size) in enumerate(ways)
    ]
    written = [(own.folder / "plan.json").read_bytes() for own in plans]
    assert written[0] == written[1] == written[2]


def test_lengths_asked_for_are_measured_in_one_reading(tmp_path):
    """The numbers of a length do not depend on which others are weighed."""
    settings = plan(NOTES, VOCABULARIES[0])
    usual = plan_from_corpus(settings, Wishes(), out=tmp_path / "a").plan
    asked = plan_from_corpus(settings, Wishes(lengths=(256, 512)), out=tmp_path / "b").plan
    for length in (256, 512):
        one, other = (dict(candidate(made, length)) for made in (usual, asked))
        assert other.pop("because") == ["asked for"]
        one.pop("because")
        assert one == other


@pytest.mark.parametrize("model", [None, MODEL])
@pytest.mark.parametrize("name", VOCABULARIES)
def test_the_plan_keeps_its_schema(tmp_path, name, model):
    """`plan.json` against the schema that ships, with costs and without."""
    wishes = Wishes(model=parse_model(model) if model else None)
    plan_from_corpus(plan(NOTES, name), wishes, out=tmp_path / "p")
    written = orjson.loads((tmp_path / "p" / "plan.json").read_bytes())
    jsonschema.validate(written, contract.schema("plan"))


def pairs(tmp_path):
    """Write questions about notes with the notes, and return a plan for them."""
    notes = [orjson.loads(line)["text"] for line in NOTES.read_bytes().splitlines()[:120]]
    rows = [{"ask": f"Which buoy, note {n}?" * (n % 9), "note": t} for n, t in enumerate(notes)]
    rows.append({"ask": "Is the second text missing?", "note": None})
    path = tmp_path / "asked.jsonl"
    path.write_bytes(b"".join(orjson.dumps(row) + b"\n" for row in rows))
    spec = VocabularySpec(str(DEMO / "vocabularies" / "harbour-wordpiece"))
    return Plan((str(path),), (spec,), ReadOptions(text=("ask",), pair="note"))


def test_pairs_have_the_template_of_pairs(tmp_path):
    """Lengths are both texts' tokens and three of the template; a lone text is set aside."""
    found = plan_from_corpus(pairs(tmp_path), Wishes(), out=tmp_path / "p").plan
    jsonschema.validate(orjson.loads(orjson.dumps(found)), contract.schema("plan"))
    assert (found["overhead"], found["corpus"]["documents"]) == (3, 120)
    assert found["corpus"]["set_aside"]["reasons"] == {"field is null": 1}
    for own in found["candidates"]:
        lost = own["cutting"]["longest_first"]
        taken = (lost[f"lost_{which}_tokens"]["numerator"] for which in ("first", "second"))
        assert sum(taken) == own["truncated_tokens"]["numerator"]
        only = own["cutting"]["second_only"]
        cannot = only["pairs_that_cannot_fit"]["numerator"]
        cut = only["pairs_cut_in_second"]["numerator"]
        assert cut + cannot == own["truncated_documents"]["numerator"]
        assert own["windows"] is own["sentences"] is None


NUMBER = re.compile(r"(?<![\w=])[<>]?\d+(?:,\d{3})*(?:\.\d+)?(?:e[+-]?\d+)?%?(?: ×)?")


def spoken(made):
    """Return every number that the sentences may say, as `plan.json` holds it, written out."""
    advice, settings = made["recommended"], made["settings"]
    held = {"8", "95%", percent(settings["accept_truncated"]), f"{settings['batch']:,}"}
    if settings["accept_truncated"] != 0.01:
        held.discard("1%")
    own = candidate(made, advice["length"])
    figures = [
        own["slices"][s["slice"]]["truncated_documents"] for s in advice["slices_beyond_accepted"]
    ]
    lengths = [advice["length"], advice["accepted_share_needs"], advice["upper_end_needs"],
               advice["every_slice_needs"], len(advice["slices_beyond_accepted"])]  # fmt: skip
    for which in ("safer", "cheaper"):
        if advice[which]:
            lengths.append(advice[which]["length"])
            other = candidate(made, advice[which]["length"])
            figures += [other["truncated_documents"], other["truncated_tokens"]]
            held |= {times(advice[which][f"compute_{way}"]) for way in ("fixed", "packed")}
    figures += [own["truncated_documents"], own["truncated_tokens"]]
    if own["cutting"]:
        end = own["cutting"]["end"]
        held.add(proportion(end["lost_words"]["value"]))
        lengths.append(end["documents_cut_inside_word"]["numerator"])
    if own["windows"]:
        lengths += [own["windows"]["windows"], own["windows"]["overlap"]]
        held.add(proportion(own["windows"]["share_read_twice"]))
    if own["sentences"]:
        lengths.append(own["sentences"]["parts"])
    shares = [own["share"] for own in own["padding"].values()]
    shares += [advice["holds_for_accepted"][end] for end in ("from", "below")]
    for figure in figures:
        shares.append(figure["high"])
        held |= set(NUMBER.findall(ranged_text(figure)))
    chosen = made["buckets"]["choices"][min(4, len(made["buckets"]["choices"])) - 1]
    lengths += [chosen["buckets"], *chosen["boundaries"]]
    shares.append(chosen["share"])
    held |= {proportion(share) for share in shares if share is not None}
    return held | {f"{length:,}" for length in lengths if length is not None}


def ranged_text(figure):
    """Return a share with its interval as the reports write it; the digits follow its width."""
    from auditor.report.formatting import ranged

    return ranged("truncated_documents", figure)


@pytest.mark.parametrize("accepted", ["1/100", "1/7", "0"])
@pytest.mark.parametrize("name", ["harbour-bytelevel", "harbour-unigram"])
@pytest.mark.parametrize("source", ["corpus", "audit"])
def test_every_number_of_the_advice_stands_in_the_plan(tmp_path, name, accepted, source):
    """Every number that a sentence says is one of the plan's, and the main ones are said."""
    settings = plan(NOTES, name)
    wishes = Wishes(accepted=Fraction(accepted))
    if source == "corpus":
        made = plan_from_corpus(settings, wishes, out=tmp_path / "p").plan
    else:
        assess(settings, tmp_path / "a")
        made = plan_from_audit(audit_at(str(tmp_path / "a")), wishes, out=tmp_path / "p").plan
    held = spoken(made)
    said = [n for told in made["recommended"]["because"] for n in NUMBER.findall(told)]
    assert len(said) > 15
    assert [number for number in said if number not in held] == []
    advice = made["recommended"]
    assert advice["because"][0].startswith(f"{advice['length']:,} cuts")
    for other in filter(None, (advice["safer"], advice["cheaper"])):
        costs = (times(other["compute_fixed"]), times(other["compute_packed"]))
        assert {f"{other['length']:,}", *costs} <= set(said)
