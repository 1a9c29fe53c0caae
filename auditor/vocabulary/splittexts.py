"""Tokens of texts from those of their parts, each distinct short part encoded once."""

from __future__ import annotations

import numpy as np
import pyarrow as pa

from auditor.text import packed
from auditor.text.packed import Octets, PackedNumbers
from auditor.text.slices import integers, ranges
from auditor.vocabulary.engine import Encoding, Ints, bounds_of
from auditor.vocabulary.fenced import FencedParts
from auditor.vocabulary.splits import Splits
from auditor.vocabulary.tokenizers_engine import TokenizersEngine

# Parts whose tokens are remembered, and tokens of them, before all are forgotten.
MOST_PARTS = 400_000
MOST_TOKENS = 2_000_000


class SplitTexts:
    """Encodes texts under one vocabulary by the parts that ``splits`` makes of them.

    What is remembered of short parts is bounded, and never changes a token.
    """

    def __init__(self, engine: TokenizersEngine, splits: Splits, added: tuple[str, ...]) -> None:
        self._engine = engine
        self._parts = FencedParts(engine, splits, added)
        self._splits = splits
        self._clear()

    def _clear(self) -> None:
        self._numbers = PackedNumbers(MOST_PARTS)
        # Part i has `lengths[i]` tokens, from `begins[i]` on in `ids`.
        self._ids = np.zeros(0, dtype=np.int64)
        self._begins = np.zeros(0, dtype=np.int64)
        self._lengths = np.zeros(0, dtype=np.int64)

    def encode(self, texts: list[str]) -> Encoding:
        """Return the tokens of ``texts``, none of which holds an added token."""
        return self._engine.encode(texts, self._tokens)

    def _tokens(self, texts: list[str]) -> tuple[Ints, Ints]:
        """Return the ids of ``texts`` end to end, and the bounds of each text among them.

        No normaliser alters them.
        """
        held = [text for text in texts if text]
        joined = "".join(held)
        bounds = bounds_of([len(text) for text in texts])
        if not held:
            return np.zeros(0, dtype=np.int64), bounds
        points = np.frombuffer(joined.encode("utf-32-le"), dtype=np.uint32)
        starting = self._splits.within(points, np.unique(bounds))
        edges = np.append(np.flatnonzero(starting), len(points))
        edge_of = np.searchsorted(edges, bounds)
        octets = packed.padded(joined.encode())
        if not joined.isascii():
            edges = np.flatnonzero((octets & 0xC0) != 0x80)[edges]
        ids, ends = self._encoded(octets, edges)
        return ids, ends[edge_of]

    def _encoded(self, octets: Octets, edges: Ints) -> tuple[Ints, Ints]:
        """Return the ids of the parts between ``edges`` (bytes), and the bounds of each part."""
        begins, lengths = edges[:-1], np.diff(edges)
        short = np.flatnonzero(lengths <= packed.LONGEST)
        words = packed.packed(octets, begins[short], lengths[short])
        numbers = np.full(len(begins), -1, dtype=np.int64)
        numbers[short] = self._numbers.find(words)
        new = np.flatnonzero(numbers < 0)
        if len(new):
            if len(self._begins) + len(new) > MOST_PARTS or len(self._ids) > MOST_TOKENS:
                self._clear()
                new = np.arange(len(begins))
            self._encode_new(octets, edges, new, numbers)
        found = ranges(self._begins[numbers], self._lengths[numbers])
        ids = self._ids[found]
        ends = bounds_of(self._lengths[numbers])
        return ids, ends

    def _encode_new(self, octets: Octets, edges: Ints, new: Ints, numbers: Ints) -> None:
        """Encode the ``new`` parts, and set their ``numbers``."""
        buffers = [None, pa.py_buffer(edges), pa.py_buffer(octets)]
        every = pa.Array.from_buffers(pa.large_string(), len(edges) - 1, buffers)
        encoded = every.take(integers(new)).dictionary_encode()
        form = np.asarray(encoded.indices).astype(np.int64)
        texts = encoded.dictionary
        ids, bounds = self._parts.tokens(texts)
        known = len(self._begins)
        numbers[new] = known + form
        self._begins = np.concatenate((self._begins, len(self._ids) + bounds[:-1]))
        self._lengths = np.concatenate((self._lengths, np.diff(bounds)))
        self._ids = np.concatenate((self._ids, ids))
        first = np.empty(len(texts), dtype=np.int64)
        first[form[::-1]] = new[::-1]
        begins, lengths = edges[:-1][first], np.diff(edges)[first]
        short = np.flatnonzero(lengths <= packed.LONGEST)
        words = packed.packed(octets, begins[short], lengths[short])
        self._numbers.add(words, known + short)
