"""The steps of a `tokenizer.json`: its parts with sequences laid flat, and put together again."""

from __future__ import annotations

from typing import Any

# The character that stands for a space.
METASPACE = "\u2581"


def steps_of(description: dict[str, Any], part: str) -> list[dict[str, Any]]:
    """Return the steps of a normaliser, pre-tokeniser or decoder, sequences laid flat."""
    return _flattened(description.get(part))


def rejoined(steps: list[dict[str, Any]], inner: str) -> dict[str, Any] | None:
    """Return one step, or a sequence of them under the name ``inner``; ``None`` for none."""
    if len(steps) <= 1:
        return steps[0] if steps else None
    return {"type": "Sequence", inner: steps}


def _flattened(step: dict[str, Any] | None) -> list[dict[str, Any]]:
    if step is None:
        return []
    for inner in ("normalizers", "pretokenizers", "decoders", "processors"):
        if step["type"] == "Sequence" and inner in step:
            return [leaf for child in step[inner] for leaf in _flattened(child)]
    return [step]
