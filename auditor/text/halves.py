"""Two halves of a corpus, told apart by the texts alone."""

from __future__ import annotations

import hashlib
from collections.abc import Iterable


def halves_of(texts: Iterable[str]) -> list[int]:
    """Return 1 or 2 for each text, by a bit of its hash: equal texts share a half.

    The halves are about equal in documents, and do not depend on the order or the size of batches.
    """
    return [1 + hashlib.blake2b(t.encode(), digest_size=1).digest()[0] % 2 for t in texts]
