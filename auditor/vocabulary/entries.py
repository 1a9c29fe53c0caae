"""What the entries of a vocabulary are written in."""

from __future__ import annotations

import numpy as np

from auditor.text.scripts import NAMES, script_numbers
from auditor.vocabulary.engine import Inventory


def entry_texts(inventory: Inventory) -> list[str]:
    """Return the characters that each entry stands for, control entries left out.

    Of an entry of bytes those that are whole; markers of spaces are no characters of the text.
    """
    found = []
    for number, entry in enumerate(inventory.entries):
        if entry is None or inventory.control[number] or inventory.stands_for_bytes[number]:
            continue
        spelled = inventory.entry_bytes[number] if inventory.entry_bytes else None
        text = entry if spelled is None else spelled.decode(errors="ignore")
        found.append(text.replace(inventory.marker, "") if inventory.marker else text)
    return found


def entries_by_script(inventory: Inventory) -> dict[str, int]:
    """Return how many entries hold a character of each script (UAX #24)."""
    texts = entry_texts(inventory)
    points = np.frombuffer("".join(texts).encode("utf-32-le"), dtype=np.uint32)
    entries = np.repeat(np.arange(len(texts)), [len(text) for text in texts])
    codes = np.unique(entries * len(NAMES) + script_numbers(points))
    counts = np.bincount(codes % len(NAMES), minlength=len(NAMES)).tolist()
    return {name: count for name, count in zip(NAMES, counts, strict=True) if count}
