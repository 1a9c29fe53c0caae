"""Whether one text in two normal forms is encoded alike (UAX #15)."""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass

from auditor.vocabulary.engine import Engine

# Composed characters of UAX #15, figures 3 to 5, and of scripts that compose otherwise: Latin with
# one mark and with two, Hangul, Devanagari (a composition exclusion), kana, Vietnamese, Greek.
SAMPLES = (
    "\u00c5", "\u00f4", "\u1e69", "\u1e0d\u0307", "\uac00", "\u0915\u093c", "\u304c", "\u1ec7",
    "\u03ac",
)  # fmt: skip


@dataclass(frozen=True, slots=True)
class FormPair:
    """A text in NFC and in NFD, with the tokens of each; ``alike`` when the ids are the same."""

    nfc: str
    nfd: str
    tokens_nfc: int
    tokens_nfd: int
    alike: bool


def normal_forms(engine: Engine) -> list[FormPair]:
    """Return how ``engine`` encodes each of ``SAMPLES`` in both forms."""
    texts = [(unicodedata.normalize("NFC", t), unicodedata.normalize("NFD", t)) for t in SAMPLES]
    pairs = [engine.encode(list(pair)).ids_by_document() for pair in texts]
    return [
        FormPair(nfc, nfd, len(ours), len(theirs), ours == theirs)
        for (nfc, nfd), (ours, theirs) in zip(texts, pairs, strict=True)
    ]
