"""The length plan: what each candidate cuts, wastes and costs, as `plan.json` holds it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict, dataclass
from fractions import Fraction
from typing import Any

from auditor.encoding.pairs import PAIR_WAYS
from auditor.encoding.truncation import PARTS, WAYS, Candidate
from auditor.errors import SettingsError
from auditor.figures.catalogue import Figure
from auditor.figures.values import Basis, compute
from auditor.planning import cost, packing, padding
from auditor.planning.buckets import best_buckets
from auditor.planning.candidates import Candidates, given, usual
from auditor.planning.histogram import LengthHistogram
from auditor.planning.losses import losses, windows
from auditor.planning.model import ModelShape
from auditor.tallies.groups import ALL
from auditor.tallies.moments import HoldsMoments

Json = dict[str, Any]

MOST_BUCKETS = 8
DEPTHS = {"worst_fit_3": 3, "worst_fit_8": 8, "worst_fit": None}
FROM_AUDIT = "not measured: a plan from an audit knows lengths only; plan the corpus itself"
OF_PAIRS = "not measured for two-part inputs"
# What is cut: the names of the columns, and of the totals they are shares of.
_CUT = {
    "lost_characters": "characters",
    "lost_words": "words",
    "documents_cut_inside_word": "documents",
    "documents_cut_inside_character": "documents",
}
_PAIR_CUT = {
    "lost_first_tokens": "first_tokens",
    "lost_second_tokens": "second_tokens",
    "pairs_cut_in_first": "documents",
    "pairs_cut_in_second": "documents",
    "pairs_that_cannot_fit": "documents",
}


@dataclass(frozen=True)
class Wishes:
    """What is asked of a plan.

    ``accepted`` is the share of documents that may be cut, ``batch`` the documents of a batch,
    ``overlap`` the tokens that two windows share (``None``: an eighth of the room), ``precision``
    the name of the format of activations.
    """

    lengths: tuple[int, ...] = ()
    accepted: Fraction = Fraction(1, 100)
    batch: int = 32
    overlap: int | None = None
    model: ModelShape | None = None
    precision: str = "bfloat16"

    def check(self) -> None:
        """Raise SettingsError for what no plan can be made of."""
        if not 0 <= self.accepted < 1:
            raise SettingsError(
                "the accepted share must be at least 0% and below 100%.",
                hint="Give it as 1% or 0.01.",
                where="--accept-truncated",
            )

    def as_json(self) -> Json:
        """Return the wishes as JSON values, for the record of the settings."""
        return {
            "candidates": list(self.lengths),
            "accept_truncated": float(self.accepted),
            "batch": self.batch,
            "overlap": self.overlap,
            "model": None if self.model is None else asdict(self.model),
            "precision": self.precision,
        }


@dataclass(frozen=True)
class Known:
    """What is known of the documents: lengths by slice, and what cutting takes if it was measured.

    ``overhead`` is that of one text, or of a pair; ``cuts`` holds the columns of
    `encoding.truncation` or, for pairs, of `encoding.pairs`.
    """

    histograms: Mapping[str, LengthHistogram]
    overhead: int
    limit: int | None
    cuts: HoldsMoments | None = None
    paired: bool = False

    @property
    def whole(self) -> LengthHistogram:
        """The lengths of all documents."""
        return self.histograms[ALL]


def candidates_of(known: Known, wishes: Wishes) -> Candidates:
    """Return the lengths to weigh, those asked for or the usual ones."""
    wishes.check()
    if wishes.lengths:
        return given(wishes.lengths, known.overhead)
    return usual(known.whole, known.overhead, known.limit, wishes.accepted)


def weigh(known: Known, wishes: Wishes, candidates: Candidates) -> list[Json]:
    """Return what there is to know of each of ``candidates``, in their order."""
    return [_weighed(known, wishes, length, why) for length, why in candidates.items()]


def _weighed(known: Known, wishes: Wishes, length: int, why: list[str]) -> Json:
    whole, overhead = known.whole, known.overhead
    cut = losses(whole, overhead, length)
    kept = whole.cut_at(length)
    packs = _packs(kept, length)
    overlap = _overlap(wishes, length - overhead)
    return {
        "length": length,
        "room": length - overhead,
        "because": list(dict.fromkeys(why)),
        "truncated_documents": cut["truncated_documents"].as_json(),
        "truncated_tokens": cut["truncated_tokens"].as_json(),
        "dropping": {
            "documents": cut["truncated_documents"].as_json(),
            "tokens": cut["dropped_tokens"].as_json(),
        },
        **_positions(known, length),
        "windows": None if known.paired else windows(whole, overhead, length, overlap),
        "padding": _padding(kept, length, wishes.batch, packs),
        "packs": packs,
        "cost": _cost(kept, length, overhead, wishes, packs),
        "slices": {
            key: {name: own.as_json() for name, own in losses(held, overhead, length).items()}
            for key, held in known.histograms.items()
            if key != ALL
        },
    }


def _overlap(wishes: Wishes, room: int) -> int:
    overlap = room // 8 if wishes.overlap is None else wishes.overlap
    if overlap >= room:
        raise SettingsError(
            f"windows that share {overlap} tokens never advance where there is room for {room}.",
            hint="Name a smaller --overlap, or greater --candidates.",
            where="--overlap",
        )
    return overlap


def _positions(known: Known, length: int) -> Json:
    """Return what was measured by reading: by way of cutting, and by sentences."""
    if known.cuts is None:
        return {"cutting": None, "sentences": None, "note": FROM_AUDIT}
    names, ways = (_PAIR_CUT, PAIR_WAYS) if known.paired else (_CUT, WAYS)
    basis = Basis(known.cuts, known.cuts)
    named = Candidate(length, length - known.overhead).column
    cutting = {
        way: {name: _share(basis, named(name, way), of) for name, of in names.items()}
        for way in ways
    }
    if known.paired:
        return {"cutting": cutting, "sentences": None, "note": f"words and windows: {OF_PAIRS}"}
    parts, broken = (known.cuts.total(ALL, named(name)) for name in PARTS)
    sentences = {"parts": parts, "cuts_inside_sentence": broken}
    return {"cutting": cutting, "sentences": sentences, "note": None}


def _share(basis: Basis, column: str, of: str) -> Json:
    figure = Figure(column, column, of, "share", "", of_documents=of == "documents")
    return compute(figure, ALL, basis).as_json()


def _padding(kept: LengthHistogram, length: int, batch: int, packs: Json) -> Json:
    found = {
        "fixed": padding.fixed(kept, length),
        "random_batches": padding.random_batches(kept, batch),
        "grouped_batches": padding.similar_batches(kept, batch),
    }
    packed = packs["best_fit"]["packs"] * length
    return {
        **{
            name: {"positions": own.positions, "padded": own.padded, "share": own.share}
            for name, own in found.items()
        },
        "packed": {
            "positions": kept.total_positions,
            "padded": packed,
            "share": 1 - kept.total_positions / packed if packed else None,
        },
    }


def _packs(kept: LengthHistogram, length: int) -> Json:
    found = {"best_fit": packing.best_fit(kept, length)}
    for name, depth in DEPTHS.items():
        found[name] = packing.worst_fit(kept, length, depth)
    return {
        "fewest": packing.fewest_packs(kept, length),
        **{
            name: {
                "packs": own.packs,
                "efficiency": own.efficiency,
                "factor": own.factor,
                "most_documents": own.most_documents,
            }
            for name, own in found.items()
        },
    }


def _cost(kept: LengthHistogram, length: int, overhead: int, wishes: Wishes, packs: Json) -> Json:
    """Return the positions computed for a document and, where a model is known, what they cost."""
    documents, packed = kept.total_documents, packs["best_fit"]["packs"]
    found: Json = {
        "positions_per_document": {"fixed": length, "packed": packed * length / documents},
        "model": None,
    }
    if wishes.model is None:
        return found
    shape = wishes.model
    one = cost.forward_flops(shape, length)
    ways = {"fixed": documents * one, "packed": packed * one}
    tokens = kept.total_positions - overhead * documents
    found["model"] = {
        "forward_flops_per_sequence": one,
        "attention_share": cost.attention_share(shape, length),
        **{
            way: {
                "forward_flops": total,
                "training_flops": cost.training_flops(total),
                "forward_flops_per_document": total / documents,
                "training_flops_per_document": cost.training_flops(total) / documents,
                "forward_flops_per_kept_token": total / tokens if tokens else None,
                "training_flops_per_kept_token": (
                    cost.training_flops(total) / tokens if tokens else None
                ),
            }
            for way, total in ways.items()
        },
        "score_bytes": cost.score_bytes(shape, length, wishes.batch, wishes.precision),
        "activation_bytes": cost.activation_bytes(shape, length, wishes.batch, wishes.precision),
        "position_parameters": cost.position_parameters(shape, length),
        "embedding_parameters": cost.embedding_parameters(shape),
    }
    return found


def cost_model(shape: ModelShape | None) -> Json | None:
    """Return what one more position costs forward, and what grows with the square of the length.

    A sequence of n positions takes per_position × n + per_position_squared × n² operations.
    """
    if shape is None:
        return None
    one, two = cost.forward_flops(shape, 1), cost.forward_flops(shape, 2)
    square = Fraction(two - 2 * one, 2)
    return {"per_position": float(one - square), "per_position_squared": float(square)}


def buckets_of(known: Known, length: int) -> Json:
    """Return the length buckets that pad least once documents are cut at ``length``."""
    choices = best_buckets(known.whole.cut_at(length), MOST_BUCKETS)
    return {
        "length": length,
        "choices": [
            {
                "buckets": len(own.boundaries),
                "boundaries": list(own.boundaries),
                "documents": list(own.documents),
                "padded": own.padded,
                "share": own.share,
            }
            for own in choices
        ],
    }
