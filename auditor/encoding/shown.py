"""How the pieces of one word or term are shown: by their characters, bytes or entries."""

from __future__ import annotations

from auditor.vocabulary.engine import Bools, Inventory

# A token's id, and the characters of the word it holds: from one position up to another.
Part = tuple[int, int, int]


def parts_of(word: str, begin: int, tokens: list[list[int]]) -> list[Part]:
    """Return the parts of ``word``, which stands at ``begin``.

    ``tokens`` are ids, starts and ends; those that do not touch the word have no part in it.
    """
    return [
        (number, max(0, start - begin), min(len(word), end - begin))
        for number, start, end in zip(*tokens, strict=True)
        if start - begin < len(word) and end > begin
    ]


class Shown:
    """Shows pieces of one vocabulary; ``plain`` says by id which are shown by their characters."""

    def __init__(self, inventory: Inventory) -> None:
        self._inventory = inventory
        plain = ~inventory.stands_for_bytes
        if inventory.unknown is not None:
            plain[inventory.unknown] = False
        self.plain: Bools = plain
        self._plain: list[bool] = plain.tolist()

    def pieces(self, word: str, parts: list[Part]) -> list[str]:
        """Return the pieces of ``word``: bytes as ⟨hexadecimal⟩, the unknown entry by its name.

        Whitespace that no token holds stands at the head of the piece after it.
        """
        shown, reached = [], 0
        for number, start, end in parts:
            gap = word[reached:start]
            before = gap if gap.isspace() else ""
            if self._plain[number] and end > reached:
                shown.append(before + word[max(start, reached) : end])
            elif self._inventory.stands_for_bytes[number]:
                shown.append(f"{before}⟨{self._bytes(number)}⟩")
            else:
                shown.append(f"{before}⟨{self._inventory.entries[number]}⟩")
            reached = max(reached, end)
        return shown

    def _bytes(self, number: int) -> str:
        if self._inventory.entry_bytes is not None:
            return (self._inventory.entry_bytes[number] or b"").hex(" ").upper()
        return (self._inventory.entries[number] or "")[3:5]
