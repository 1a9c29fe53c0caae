"""The position limit: every declaration that lies beside a vocabulary, and the one that binds."""

from __future__ import annotations

import json
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import orjson

from auditor.errors import SettingsError
from auditor.vocabulary.positions import Positions, positions_of

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Mapping
    from pathlib import Path

# `max_length`, `sliding_window`, `attention_window`, `block_size` and `max_relative_positions` are
# left out on purpose: they bound generation, attention or distances, not positions.
_KEYS = (
    "max_position_embeddings", "n_positions", "n_ctx", "max_seq_len", "seq_length",
    "context_length", "max_sequence_length", "max_encoder_position_embeddings",
)  # fmt: skip
_NESTED = ("text_config", "encoder", "decoder")
_NOT_SET = 10**20  # from here on the number stands for "no limit" (int(1e30) is the usual one)
_LARGEST = 2**63 - 1  # lengths are 64-bit integers


@dataclass(frozen=True, slots=True)
class DeclaredLimit:
    """One declaration: file, key (dotted when nested), its number and the positions it leaves.

    ``usable`` is in positions, the template's included; ``None`` when the number is no position
    limit or leaves nothing.
    """

    file: str
    key: str
    value: int
    usable: int | None
    note: str


@dataclass(frozen=True, slots=True)
class PositionLimit:
    """The most positions a sequence may take, every declaration found, and what to know of them."""

    value: int | None
    declared: tuple[DeclaredLimit, ...]
    notes: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class _Bound:
    limit: DeclaredLimit
    usable: int
    enforced: bool

    def __str__(self) -> str:
        return f"{self.limit.file} ({self.limit.key}) says {self.usable}"


class _Found:
    """The declarations and notes gathered so far."""

    def __init__(self) -> None:
        self.declared: list[DeclaredLimit] = []
        self.bounds: list[_Bound] = []
        self.notes: list[str] = []

    def add(self, file: str, key: str, given: object, positions: Positions) -> None:
        """List the number ``given`` under ``key``; note it instead when it is not one."""
        if given is None:
            return
        value = self._number(f"{file}: {key}", given)
        if value is None:
            return
        usable = value - positions.taken
        note = positions.note if usable > 0 else f"{positions.note}; this leaves no position"
        limit = DeclaredLimit(file, key, value, usable if usable > 0 else None, note)
        self.declared.append(limit)
        if usable > 0:
            self.bounds.append(_Bound(limit, usable, positions.enforced))

    def _number(self, place: str, given: object) -> int | None:
        if isinstance(given, int | float) and not isinstance(given, bool):
            if given >= _NOT_SET:
                self.notes.append(f'{place} is 1e20 or more, which means "not set"')
                return None
            if 0 < given <= _LARGEST and given == int(given):
                return int(given)
        shown = repr(given)
        shown = shown if len(shown) <= 40 else f"{shown[:40]}…"
        self.notes.append(f"{place} is {shown}, not a positive whole number: passed over")
        return None


def declared_limits(folder: Path | None) -> PositionLimit:
    """Return the position limit that the files in ``folder`` declare.

    The value is the smallest bound that the model or its tokenizer enforces, else the smallest
    declared one, else ``None``. A file that cannot be read becomes a note.
    """
    if folder is None:
        return PositionLimit(None, (), ())
    found = _Found()
    _read_config(folder, found)
    for file, key, note in (
        ("tokenizer_config.json", "model_max_length", "the length to which the tokenizer cuts"),
        ("sentence_bert_config.json", "max_seq_length", "the length to which the encoder cuts"),
    ):
        settings = _object(folder / file, found, json.loads)
        found.add(file, key, settings.get(key), Positions(0, enforced=True, note=note))
    _read_stored_truncation(folder, found)
    binding = [bound for bound in found.bounds if bound.enforced]
    value = min((bound.usable for bound in binding or found.bounds), default=None)
    notes = [*found.notes, *_disagreements(found.bounds)]
    if found.bounds and not binding:
        why = "the model enforces none of the declared limits"
        notes.append(f"{why}: without --limit the smallest one, {value}, is used")
    return PositionLimit(value, tuple(found.declared), tuple(notes))


def with_override(limit: PositionLimit, given: int | None, overhead: int) -> PositionLimit:
    """Return ``limit`` with ``given`` (``--limit``, in positions) in its place unless ``None``.

    Raises SettingsError when the limit does not exceed ``overhead``, the positions that the
    template alone takes.
    """
    value = limit.value if given is None else given
    if value is not None and value <= overhead:
        raise SettingsError(
            f"a limit of {value} leaves no room for text: the template alone takes {overhead}.",
            hint=f"Name a larger one: --limit N with N above {overhead}.",
            where=_place_of(limit) if given is None else "--limit",
        )
    if given is None or given == limit.value:
        return limit
    if limit.value is None:
        note = f"--limit {given} is used; no file declares a limit"
    else:
        how = "exceeds" if given > limit.value else "is below"
        note = f"--limit {given} is used and {how} the declared {limit.value}"
    return replace(limit, value=given, notes=(*limit.notes, note))


def _place_of(limit: PositionLimit) -> str:
    return next(f"{own.file}: {own.key}" for own in limit.declared if own.usable == limit.value)


def _read_config(folder: Path, found: _Found) -> None:
    whole = _object(folder / "config.json", found, json.loads)
    for prefix, section in _sections(whole):
        positions = positions_of(section, whole)
        for key in _KEYS:
            found.add("config.json", prefix + key, section.get(key), positions)


def _sections(whole: Mapping[str, Any]) -> Iterator[tuple[str, Mapping[str, Any]]]:
    yield "", whole
    for name in _NESTED:
        section = whole.get(name)
        if isinstance(section, dict):
            yield f"{name}.", section


def _read_stored_truncation(folder: Path, found: _Found) -> None:
    stored = _object(folder / "tokenizer.json", found, orjson.loads).get("truncation")
    value = stored.get("max_length") if isinstance(stored, dict) else None
    if isinstance(value, int) and not isinstance(value, bool):
        note = "stored truncation, switched off before measuring: not a position limit"
        found.declared.append(
            DeclaredLimit("tokenizer.json", "truncation.max_length", value, None, note)
        )


def _object(path: Path, found: _Found, parse: Callable[[bytes], Any]) -> dict[str, Any]:
    """Return the JSON object in ``path``, an empty one when there is none (noted if damaged).

    Configurations may hold NaN and Infinity as Python writes them; `tokenizer.json` is large and
    strict, which is why the parser is the caller's choice.
    """
    if not path.is_file():
        return {}
    try:
        value = parse(path.read_bytes().removeprefix(b"\xef\xbb\xbf"))
    except (OSError, ValueError, RecursionError) as fault:
        found.notes.append(f"{path.name} cannot be read ({fault}): what it declares is not known")
        return {}
    if isinstance(value, dict):
        return value
    found.notes.append(f"{path.name} holds no JSON object: what it declares is not known")
    return {}


def _disagreements(bounds: list[_Bound]) -> list[str]:
    """Return one note for each two sides that do not allow the same length."""
    model = [bound for bound in bounds if bound.limit.file == "config.json"]
    cutters = [bound for bound in bounds if bound.limit.file != "config.json"]
    notes = []
    if len({bound.usable for bound in model}) > 1:
        numbers = ", ".join(f"{bound.limit.key} {bound.usable}" for bound in model)
        notes.append(f"config.json declares several numbers of positions: {numbers}")
    if model:
        own = min(model, key=lambda bound: (not bound.enforced, bound.usable))
        notes += [_difference(own, cut) for cut in cutters if cut.usable != own.usable]
    if len({bound.usable for bound in cutters}) > 1:
        notes.append(f"{cutters[0]}, {cutters[1]}: the shorter cut is counted")
    return notes


def _difference(model: _Bound, cut: _Bound) -> str:
    key = f"{model.limit.file} ({model.limit.key})"
    if cut.usable < model.usable:
        return f"{cut}, {key} allows {model.usable}: text is cut earlier than the model needs"
    fate = (
        "is not cut in time and fails in the model"
        if model.enforced
        else "is not cut and runs past what the model declares, which it does not enforce"
    )
    return f"{key} allows {model.usable} positions, {cut}: a text between the two {fate}"
