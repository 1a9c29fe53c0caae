"""What becomes of a run of whitespace: found by encoding and decoding it beside letters."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

from auditor.text.stretch import Stretch
from auditor.text.whitespace import RunForm
from auditor.vocabulary.engine import Ints
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.spans import correct

Fate = Literal["kept", "merged", "dropped", "unknown", "changed"]
FATES: tuple[Fate, ...] = ("kept", "merged", "dropped", "unknown", "changed")
_REMEMBERED = 100_000


@dataclass(frozen=True, slots=True)
class Probed:
    """What one form of run becomes; ``fate`` is ``None`` without a decoder."""

    fate: Fate | None
    by_bytes: bool


class Fates:
    """Probes forms of runs, each once (as long as memory is bounded)."""

    def __init__(self, vocabulary: Vocabulary) -> None:
        self._vocabulary = vocabulary
        self._known: dict[RunForm, Probed] = {}

    def of(self, form: RunForm) -> Probed:
        """Return what ``form`` becomes between two letters, or beside one at a document's edge."""
        return self.of_all([form])[0]

    def of_all(self, forms: list[RunForm]) -> list[Probed]:
        """Return what each of ``forms`` becomes; those not probed yet are probed in one go."""
        new = [form for form in forms if form not in self._known]
        if len(self._known) + len(new) > _REMEMBERED:
            self._known.clear()
            new = forms
        if new:
            self._known.update(zip(new, self._probe(new), strict=True))
        return [self._known[form] for form in forms]

    def _probe(self, forms: list[RunForm]) -> list[Probed]:
        beside = [self._beside(form) for form in forms]
        stretch = Stretch([a + form.text + b for form, (a, b) in zip(forms, beside, strict=True)])
        engine = self._vocabulary.engine
        spans = correct(engine.encode(stretch.texts), stretch, self._vocabulary.inventory)
        edges = [slice(*pair) for pair in pairwise(spans.bounds.tolist())]
        decoded: list[str | None] = [None] * len(forms)
        if engine.has_decoder:
            decoded[:] = engine.decode([spans.ids[edge].tolist() for edge in edges])
        found = []
        for place, (form, sides) in enumerate(zip(forms, beside, strict=True)):
            begin = int(stretch.bounds[place]) + len(sides[0])
            starts, ends = spans.starts[edges[place]], spans.ends[edges[place]]
            touching = (starts < begin + len(form.text)) & (ends > begin) & (ends > starts)
            ids = spans.ids[edges[place]][touching]
            found.append(self._judged(form, sides, ids, decoded[place]))
        return found

    def _beside(self, form: RunForm) -> tuple[str, str]:
        """Return what is set before and after a run."""
        first, second = self._vocabulary.letters
        before = "" if form.position == "start" else first
        return before, {"start": first, "middle": second, "end": ""}[form.position]

    def _judged(
        self, form: RunForm, beside: tuple[str, str], ids: Ints, decoded: str | None
    ) -> Probed:
        """Return what a run became, whose tokens are ``ids``; ``decoded`` is all that came back."""
        inventory = self._vocabulary.inventory
        by_bytes = bool(inventory.stands_for_bytes[ids].any())
        if decoded is None:
            return Probed(None, by_bytes)
        if inventory.unknown is not None and (ids == inventory.unknown).any():
            return Probed("unknown", by_bytes)
        return Probed(_compare(form.text, _between(decoded, *beside)), by_bytes)


def _between(decoded: str, before: str, after: str) -> str:
    """Return what came back between the letters; all of it where a letter did not come back."""
    left = decoded.find(before) + len(before) if before and before in decoded else 0
    right = decoded.rfind(after) if after and after in decoded else len(decoded)
    return decoded[left : max(left, right)]


def _compare(run: str, returned: str) -> Fate:
    if returned == run:
        return "kept"
    if not returned:
        return "dropped"
    return "merged" if len(returned) < len(run) else "changed"
