"""What every tally is: integer counts that merge in any order, and travel as plain values."""

from __future__ import annotations

from abc import ABC, abstractmethod
from typing import Any, Self

from auditor.errors import MergeError

State = dict[str, Any]


class Tally(ABC):
    """Counts of one kind.

    Laws, held by one property test over every tally: a new tally is the identity of ``merge``;
    ``merge`` is associative and commutative; cutting the corpus anywhere changes nothing; a tally
    rebuilt from its ``state`` equals it; tallies with different settings refuse to merge.
    """

    @property
    @abstractmethod
    def settings(self) -> State:
        """What two tallies must share to merge, as JSON values."""

    @abstractmethod
    def counts(self) -> State:
        """The counts as JSON values, in an order that does not depend on how they were filled."""

    @abstractmethod
    def fill(self, counts: State) -> None:
        """Take over ``counts``, as another tally of the same settings gave them."""

    @abstractmethod
    def _add(self, other: Self) -> None:
        """Add the counts of ``other``, whose settings are the same."""

    def merge(self, other: Self) -> None:
        """Add ``other`` to this tally; MergeError when it was made with different settings."""
        if type(self) is not type(other) or self.settings != other.settings:
            raise MergeError(
                f"a tally of {self.settings} cannot take in one of {other.settings}.",
                hint="Both must be made with the same settings.",
            )
        self._add(other)

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Tally) or type(self) is not type(other):
            return NotImplemented
        return self.settings == other.settings and self.counts() == other.counts()

    __hash__ = None  # type: ignore[assignment]
