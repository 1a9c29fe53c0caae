"""Finds the texts that hold an added token, which are encoded whole."""

from __future__ import annotations

import re

import numpy as np

from auditor.vocabulary.engine import Bools


class AddedContents:
    """Finds the texts that hold one of ``contents``."""

    def __init__(self, contents: list[str]) -> None:
        self._pattern = re.compile("|".join(map(re.escape, contents))) if contents else None

    def in_texts(self, texts: list[str]) -> Bools:
        """Return which of ``texts`` hold one, shape (texts,)."""
        if self._pattern is None:
            return np.zeros(len(texts), dtype=np.bool_)
        search = self._pattern.search
        return np.array([search(text) is not None for text in texts], dtype=np.bool_)
