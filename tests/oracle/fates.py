"""What becomes of a run of whitespace: encoded and decoded beside a letter, then compared."""

from __future__ import annotations

from dataclasses import dataclass

from tests.oracle.spans import spans
from tests.oracle.text import Run
from tests.oracle.vocabularies import OracleVocabulary

FATES = ("kept", "merged", "dropped", "unknown", "changed")


@dataclass(frozen=True)
class Probe:
    """The outcome for one run text at one place; ``fate`` is None without a decoder."""

    fate: str | None
    uses_bytes: bool


class Prober:
    """Probes each run text once per place (start, middle, end of the document)."""

    def __init__(self, vocabulary: OracleVocabulary, control_strings: str) -> None:
        self._vocabulary = vocabulary
        self._control_strings = control_strings
        self._found: dict[tuple[str, str], Probe] = {}

    def __call__(self, run: Run) -> Probe:
        key = (run.text, run.position)
        if key not in self._found:
            self._found[key] = self._probe(*key)
        return self._found[key]

    def _probe(self, run: str, position: str) -> Probe:
        before = "" if position == "start" else "a"
        after = {"start": "a", "middle": "b", "end": ""}[position]
        tokens = spans(before + run + after, self._vocabulary, self._control_strings)
        place = set(range(len(before), len(before) + len(run)))
        touching = [token for token in tokens if token.positions & place]
        uses_bytes = any(token.id in self._vocabulary.byte_ids for token in touching)
        if not self._vocabulary.has_decoder:
            return Probe(None, uses_bytes)
        if any(token.id == self._vocabulary.unknown_id for token in touching):
            return Probe("unknown", uses_bytes)
        decoded = self._vocabulary.decode([token.id for token in tokens])
        return Probe(compare(run, what_came_back(decoded, position)), uses_bytes)


def what_came_back(decoded: str, position: str) -> str | None:
    """Return what stands beside the letter or between the letters; None when one is lost."""
    first_a, last_a, last_b = decoded.find("a"), decoded.rfind("a"), decoded.rfind("b")
    if first_a < 0:
        return None
    if position == "start":
        return decoded[:last_a]
    if position == "end":
        return decoded[first_a + 1 :]
    return decoded[first_a + 1 : last_b] if last_b > first_a else None


def compare(run: str, came_back: str | None) -> str:
    if came_back is None:
        return "changed"
    if came_back == run:
        return "kept"
    if came_back == "":
        return "dropped"
    return "merged" if len(came_back) < len(run) else "changed"
