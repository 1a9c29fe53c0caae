"""Characters that did not come through whole: how often, by fate, and where first seen."""

from __future__ import annotations

from typing import NamedTuple

from auditor.tallies.base import State, Tally


class Place(NamedTuple):
    """A place in the corpus; places compare in reading order."""

    source: int
    line: int


class Seen(NamedTuple):
    """Occurrences of a character, and the first place."""

    times: int
    first: Place


class CharactersTally(Tally):
    """Occurrences by (character, fate); fates are ``unknown``, ``byte-spelled``, ``dropped``."""

    def __init__(self) -> None:
        self.seen: dict[tuple[str, str], Seen] = {}

    @property
    def settings(self) -> State:
        return {}

    def add(self, character: str, fate: str, count: int, first: Place) -> None:
        """Add ``count`` occurrences, the first of which stands at ``first``."""
        held = self.seen.get((character, fate))
        if held is not None:
            count, first = held.times + count, min(held.first, first)
        self.seen[character, fate] = Seen(count, first)

    def _add(self, other: CharactersTally) -> None:
        for (character, fate), (count, first) in other.seen.items():
            self.add(character, fate, count, first)

    def counts(self) -> State:
        rows = sorted(self.seen.items())
        return {"seen": [[c, fate, count, *first] for (c, fate), (count, first) in rows]}

    def fill(self, counts: State) -> None:
        for character, fate, count, source, line in counts["seen"]:
            self.add(character, fate, count, Place(source, line))
