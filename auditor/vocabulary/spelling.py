"""Entries as bytes: what tokens spell, and from it the characters that each of them holds."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from auditor.vocabulary.engine import Bools, Encoding, Ints, bounds_of

Octets = npt.NDArray[np.uint8]


@dataclass(frozen=True, slots=True)
class Spelling:
    """The bytes of all entries end to end: entry ``i`` begins at ``begins[i]`` in ``octets``.

    ``lengths`` (entries,) are in bytes, 0 for an entry that stands for none.
    """

    octets: Octets
    begins: Ints
    lengths: Ints

    @classmethod
    def of(cls, entry_bytes: list[bytes | None]) -> Spelling:
        """Return the spelling of entries given as bytes."""
        spelled = [entry or b"" for entry in entry_bytes]
        begins = bounds_of([len(entry) for entry in spelled])
        octets = np.frombuffer(b"".join(spelled), dtype=np.uint8)
        return cls(octets, begins[:-1], np.diff(begins))

    def spells(self, ids: Ints, bounds: Ints, texts: list[str]) -> Bools:
        """Return whether the bytes of each text's tokens are its own, shape (texts,).

        ``bounds`` delimits the tokens of each text. A text with a token of no bytes is not spelled.
        """
        data, edges = _data(texts)
        lengths = self.lengths[ids]
        ends = np.cumsum(lengths)
        before = np.concatenate(([0], ends))[bounds]
        alike: Bools = np.diff(before) == np.diff(edges)
        empty = np.flatnonzero(lengths == 0)
        alike[np.searchsorted(bounds, empty, side="right") - 1] = False
        spelled = self._joined(ids, lengths, ends)
        if alike.all() and np.array_equal(spelled, data):
            return alike
        for text in np.flatnonzero(alike).tolist():
            ours = spelled[before[text] : before[text + 1]]
            alike[text] = np.array_equal(ours, data[edges[text] : edges[text + 1]])
        return alike

    def encoding(self, ids: Ints, bounds: Ints, texts: list[str]) -> Encoding:
        """Return the tokens with their spans, for texts that they spell.

        A span is every character that a token holds a byte of.
        """
        data, _ = _data(texts)
        lengths = self.lengths[ids]
        ends = np.cumsum(lengths)
        characters = bounds_of([len(text) for text in texts])
        shift = np.repeat(characters[:-1], np.diff(bounds))
        starts = ends - lengths
        if len(data) > characters[-1]:
            number = np.cumsum((data & 0xC0) != 0x80) - 1
            starts, ends = number[starts], number[ends - 1] + 1
        return Encoding(ids, starts - shift, ends - shift, bounds, exact=True)

    def _joined(self, ids: Ints, lengths: Ints, ends: Ints) -> Octets:
        """Return the bytes of the tokens end to end."""
        places = np.repeat(self.begins[ids] - (ends - lengths), lengths)
        places += np.arange(len(places))
        return np.asarray(self.octets[places])


def _data(texts: list[str]) -> tuple[Octets, Ints]:
    """Return the UTF-8 of ``texts`` end to end, and where each begins in it."""
    joined = "".join(texts)
    data = np.frombuffer(joined.encode(), dtype=np.uint8)
    edges = bounds_of([len(text) for text in texts])
    if len(data) > len(joined):
        # Characters begin at the bytes that continue none (RFC 3629).
        edges = np.append(np.flatnonzero((data & 0xC0) != 0x80), len(data))[edges]
    return data, edges
