"""What the page of an audit draws and lists beside `audit.json`: characters, and use by rank."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import pandas as pd

from auditor.report.tables import characters
from auditor.tallies.characters import CharactersTally
from auditor.text.scripts import script

_CHARACTERS, _SCRIPTS, _RANKS = 30, 20, 60
FATES = ("unknown", "byte-spelled", "dropped")


@dataclass(frozen=True)
class Details:
    """Of one vocabulary: characters that did not come through whole, and the use of entries.

    ``characters`` are the most frequent rows of `characters.csv`; ``scripts`` holds (script, count
    by fate); ``ranks`` holds (rank, occurrences) of used entries, most frequent first, at ranks
    that grow by the same factor.
    """

    name: str
    characters: pd.DataFrame
    scripts: Sequence[tuple[str, dict[str, int]]]
    ranks: Sequence[tuple[int, int]]


def details_of(
    name: str, tally: CharactersTally, occurrences: npt.NDArray[np.int64], sources: list[str]
) -> Details:
    """Return the details of one vocabulary; ``occurrences`` (ids,) counts each id."""
    rows = characters([(name, tally)], sources)
    counted: dict[str, Counter[str]] = {}
    for (character, fate), seen in tally.seen.items():
        counted.setdefault(script(character), Counter())[fate] += seen.times
    ordered = sorted(counted.items(), key=lambda item: (-item[1].total(), item[0]))
    scripts = [(found, dict(fates)) for found, fates in ordered[:_SCRIPTS]]
    return Details(name, rows.head(_CHARACTERS), scripts, _ranks(occurrences))


def _ranks(occurrences: npt.NDArray[np.int64]) -> list[tuple[int, int]]:
    used = np.sort(occurrences[occurrences > 0])[::-1]
    if not len(used):
        return []
    ranks = sorted({round(rank) for rank in np.geomspace(1, len(used), _RANKS).tolist()})
    return [(rank, int(used[rank - 1])) for rank in ranks]
