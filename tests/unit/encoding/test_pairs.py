"""Two-part inputs cut on integers, against the library's own truncation."""

from __future__ import annotations

import numpy as np
import pytest
from tokenizers import Tokenizer, models, pre_tokenizers

from auditor.encoding.pairs import PAIR_WAYS, pair_columns
from auditor.encoding.truncation import Candidate

ROOMS = range(1, 8)
PAIRS = [(first, second) for first in range(9) for second in range(9)]


def library(room, way, first, second):
    """Return the tokens that `tokenizers` keeps of each text, or None where it refuses."""
    opened = Tokenizer(models.WordLevel({"buoy": 0, "[UNK]": 1}, unk_token="[UNK]"))
    opened.pre_tokenizer = pre_tokenizers.WhitespaceSplit()
    strategy = {"first_only": "only_first", "second_only": "only_second"}.get(way, way)
    opened.enable_truncation(room, strategy=strategy)
    try:
        found = opened.encode("buoy " * first, "buoy " * second).sequence_ids
    except Exception as refusal:
        assert "too short" in str(refusal)  # noqa: PT017 - any other refusal is a fault
        return None
    return found.count(0), found.count(1)


@pytest.mark.parametrize("way", PAIR_WAYS)
def test_every_small_pair_is_cut_as_the_library_cuts_it(way):
    """All pairs of up to 8 tokens in all rooms up to 7 (reference: tokenizers' truncation)."""
    candidates = [Candidate(room + 3, room) for room in ROOMS]
    first, second = np.array(PAIRS).T
    found = pair_columns(candidates, first, second)
    for candidate in candidates:
        held = {
            name: found[candidate.column(name, way)].tolist()
            for name in (
                "lost_first_tokens", "lost_second_tokens", "pairs_cut_in_first",
                "pairs_cut_in_second", "pairs_that_cannot_fit",
            )
        }  # fmt: skip
        for place, (one, two) in enumerate(PAIRS):
            lost_one, lost_two, cut_one, cut_two, unfit = (own[place] for own in held.values())
            kept = library(candidate.room, way, one, two)
            if kept is None:
                assert (lost_one, lost_two, unfit) == (0, 0, 1), (candidate.room, one, two)
            else:
                assert (one - lost_one, two - lost_two, unfit) == (*kept, 0), (candidate, one, two)
            assert (cut_one, cut_two) == (int(lost_one > 0), int(lost_two > 0))


def test_a_pair_that_fits_loses_nothing():
    """As many tokens as there is room for."""
    candidate = Candidate(13, 10)
    found = pair_columns([candidate], np.array([4, 10, 0]), np.array([6, 0, 0]))
    assert not any(column.any() for column in found.values())
