"""What a run is asked to do: every setting, those that change a number kept apart."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

from auditor.corpus import Named, ReadOptions
from auditor.vocabulary import VocabularySpec


@dataclass(frozen=True)
class Plan:
    """The settings of one audit.

    ``words`` is ``icu`` or ``whitespace``. ``workers`` is the number of processes, 0 to choose by
    the corpus's size; it never changes a figure, nor does the batch size in ``read``. ``whole``
    encodes every document whole, which changes none either.
    """

    corpus: tuple[str | Named, ...]
    vocabularies: tuple[VocabularySpec, ...]
    read: ReadOptions = field(default_factory=ReadOptions)
    words: str = "icu"
    graphemes: bool = False
    repeats: bool = False
    excerpts: bool = True
    workers: int = 0
    whole: bool = False

    @property
    def parse_control(self) -> bool:
        """Whether a text that spells a control token produces it, where the library does so."""
        return self.vocabularies[0].control_strings == "parse"

    def numeric_settings(self) -> dict[str, Any]:
        """Return every setting that changes a number, as JSON values."""
        first = self.vocabularies[0]
        return {
            "text": list(self.read.text),
            "by": list(self.read.by),
            "origin": self.read.origin,
            "unit": self.read.unit,
            "encoding": self.read.encoding,
            "words": self.words,
            "control_strings": first.control_strings,
            "pattern": first.pattern,
            "limit": first.limit,
            "graphemes": self.graphemes,
            "repeats": self.repeats,
            "whole": self.whole,
        }
