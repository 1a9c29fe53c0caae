"""Which vocabularies of two audits are compared, and what else differs between the two."""

from __future__ import annotations

import difflib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from auditor.errors import SettingsError

Json = Mapping[str, Any]

# Settings that change what a figure means. The others name fields of the files (`by`, `text`, which
# stands resolved under `fields`), add figures or counts, or never change one (`whole`).
_MEANINGS = ("origin", "unit", "encoding", "words", "control_strings", "pattern", "limit",
             "conversations")  # fmt: skip


@dataclass(frozen=True, slots=True)
class Side:
    """One of the two audits: its document, and where it lies."""

    document: Json
    where: str

    @property
    def names(self) -> list[str]:
        """The names of its vocabularies."""
        return [own["name"] for own in self.document["vocabularies"]]

    def named(self, name: str) -> Json:
        """Return the vocabulary of that name or source; SettingsError where there is none."""
        for own in self.document["vocabularies"]:
            if name in (own["name"], own["source"]):
                found: Json = own
                return found
        like = difflib.get_close_matches(name, self.names, 3, 0.5) or self.names
        raise SettingsError(
            f"it holds no vocabulary {name!r}.",
            hint=f"Name one with --vocab, and --vocab-after where the other audit's is another:"
            f" {', '.join(like)}.",
            where=self.where,
        )


@dataclass(frozen=True, slots=True)
class Pair:
    """One vocabulary of each audit."""

    before: Json
    after: Json

    @property
    def same(self) -> bool:
        """Whether they are one vocabulary."""
        return bool(self.before["digest"] == self.after["digest"])


def choose(before: Side, after: Side, name: str | None, name_after: str | None) -> list[Pair]:
    """Return the vocabularies to compare: those named, the only ones, or all in common.

    Raises SettingsError when a name is not held, or when nothing is in common.
    """
    if name is not None or name_after is not None:
        wanted, other = name or name_after, name_after or name
        return [Pair(before.named(str(wanted)), after.named(str(other)))]
    held = before.document["vocabularies"], after.document["vocabularies"]
    if len(held[0]) == len(held[1]) == 1:
        return [Pair(held[0][0], held[1][0])]
    pairs = [Pair(own, other) for own in held[0] for other in held[1] if _common(own, other)]
    if not pairs:
        raise SettingsError(
            f"the two audits have no vocabulary in common ({', '.join(before.names)}; and"
            f" {', '.join(after.names)}).",
            hint="Name one of each with --vocab and --vocab-after.",
            where=after.where,
        )
    return pairs


def _common(own: Json, other: Json) -> bool:
    return bool(own["name"] == other["name"])


def differing(before: Json, after: Json, pairs: list[Pair]) -> list[dict[str, Any]]:
    """Return what must be equal for a difference to have one meaning, and is not.

    Each is ``what``, and its value ``before`` and ``after``.
    """
    return [
        {"what": what, "before": one, "after": other}
        for what, one, other in _compared(before, after, pairs)
        if one != other
    ]


def _compared(before: Json, after: Json, pairs: list[Pair]) -> Iterator[tuple[str, Any, Any]]:
    one, other = before["settings"], after["settings"]
    for name in _MEANINGS:
        yield name, one.get(name), other.get(name)
    yield "text", _fields(one), _fields(other)
    for pair in pairs:
        if pair.same:
            one, other = (own["limit"]["value"] for own in (pair.before, pair.after))
            yield f"limit of {pair.before['name']}", one, other
        elif not same_corpus(before, after):
            one, other = (
                f"{own['name']} ({own['digest'][:19]}) on {document['corpus']['digest'][-8:]}"
                for own, document in ((pair.before, before), (pair.after, after))
            )
            yield "corpus and vocabulary at once", one, other


def _fields(settings: Json) -> str:
    """Return the fields of text, and whether they hold conversations, as a person names them."""
    fields = settings.get("fields") or {}
    told = ",".join(fields.get("text") or ()) or "plain text"
    return f"{told} (conversations)" if fields.get("conversation") else told


def same_corpus(before: Json, after: Json) -> bool:
    """Whether both audits measured the same documents."""
    return bool(before["corpus"]["digest"] == after["corpus"]["digest"])
