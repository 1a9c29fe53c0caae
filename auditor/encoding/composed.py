"""What normalising to NFC first would change in the number of tokens (UAX #15)."""

from __future__ import annotations

import unicodedata

import numpy as np

from auditor.vocabulary.engine import Engine, Ints

COLUMNS = ("documents", "characters", "tokens", "tokens_as_nfc")


def not_composed(engine: Engine, texts: list[str], tokens: Ints) -> tuple[Ints, Ints]:
    """Return the places of the texts that are not in NFC, and ``COLUMNS`` for each of them.

    ``tokens`` (texts,) are those of the texts as they are. Shapes: (found,) and (found, columns).
    """
    places = [i for i, text in enumerate(texts) if not unicodedata.is_normalized("NFC", text)]
    documents = np.array(places, dtype=np.int64)
    if not places:
        return documents, np.zeros((0, len(COLUMNS)), dtype=np.int64)
    composed = [unicodedata.normalize("NFC", texts[place]) for place in places]
    as_nfc = np.diff(engine.encode(composed).bounds)
    lengths = np.array([len(texts[place]) for place in places], dtype=np.int64)
    table = np.stack([np.ones_like(documents), lengths, tokens[documents], as_nfc], axis=1)
    return documents, table
