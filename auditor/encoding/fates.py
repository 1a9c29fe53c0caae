"""What becomes of a run of whitespace: found by encoding and decoding it beside letters."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from auditor.text.stretch import Stretch
from auditor.text.whitespace import RunForm
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.spans import correct

Fate = Literal["kept", "merged", "dropped", "unknown", "changed"]
FATES: tuple[Fate, ...] = ("kept", "merged", "dropped", "unknown", "changed")


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
        known = self._known.get(form)
        if known is None:
            if len(self._known) >= 100_000:
                self._known.clear()
            known = self._known[form] = self._probe(form)
        return known

    def _probe(self, form: RunForm) -> Probed:
        first, second = self._vocabulary.letters
        before = "" if form.position == "start" else first
        after = {"start": first, "middle": second, "end": ""}[form.position]
        stretch = Stretch([before + form.text + after])
        engine, inventory = self._vocabulary.engine, self._vocabulary.inventory
        encoding = engine.encode(stretch.texts)
        spans = correct(encoding, stretch, inventory)
        begin, stop = len(before), len(before) + len(form.text)
        touching = (spans.starts < stop) & (spans.ends > begin) & (spans.ends > spans.starts)
        ids = spans.ids[touching]
        by_bytes = bool(inventory.stands_for_bytes[ids].any())
        if inventory.unknown is not None and (ids == inventory.unknown).any():
            return Probed("unknown" if engine.has_decoder else None, by_bytes)
        if not engine.has_decoder:
            return Probed(None, by_bytes)
        decoded = engine.decode([spans.ids.tolist()])[0]
        return Probed(_compare(form.text, _between(decoded, before, after)), by_bytes)


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
