"""Opens a vocabulary in any of its forms, and gathers the facts that figures depend on."""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from pathlib import Path

from auditor.errors import VocabularyError
from auditor.vocabulary import descriptions
from auditor.vocabulary.engine import Engine, Inventory
from auditor.vocabulary.limits import PositionLimit, declared_limits, with_override
from auditor.vocabulary.locate import Form, locate
from auditor.vocabulary.probing import SpaceFacts, probe_letters, probe_spaces
from auditor.vocabulary.ranks_engine import RanksEngine, parse_json_ranks, parse_ranks
from auditor.vocabulary.sentencepiece_engine import SentencePieceEngine
from auditor.vocabulary.tokenizers_engine import TokenizersEngine

# Texts on which the forms of one folder are compared.
_PROBE_TEXTS = [
    "Hello world",
    "The buoy's lamp, No. 13, was re-lit at 04:50.",
    "  two  spaces,\ttab\nand a line\n",
    "naïve CAFÉ Ωmega 中文 हिन्दी سلام 🌊",
]


@dataclass(frozen=True, slots=True)
class VocabularySpec:
    """What is needed to open a vocabulary again, in another process for one.

    ``argument`` is a path or ``hub:ORG/NAME``; ``control_strings`` is ``parse`` or ``text``;
    ``pattern`` the content of the pattern file of a rank file.
    """

    argument: str
    control_strings: str = "parse"
    pattern: str | None = None
    limit: int | None = None


@dataclass(frozen=True)
class Vocabulary:
    """An opened vocabulary: the engine, its entries, and facts found by probing."""

    name: str
    source: str
    folder: Path
    digest: str
    family: str
    engine: Engine
    inventory: Inventory
    spaces: SpaceFacts
    letters: tuple[str, str]
    overhead: tuple[int, int]
    limit: PositionLimit
    notes: tuple[str, ...] = field(default=())

    @property
    def room(self) -> int | None:
        """The tokens that fit beside the template's own, ``None`` without a limit."""
        return None if self.limit.value is None else self.limit.value - self.overhead[0]


@dataclass(frozen=True)
class _Opened:
    engine: Engine
    inventory: Inventory
    family: str
    overhead: tuple[int, int]
    notes: list[str]
    prefix: str = ""
    suffix: str = ""


def open_vocabulary(spec: VocabularySpec) -> Vocabulary:
    """Open the vocabulary that ``spec`` names.

    Raises VocabularyError when nothing opens (with what was looked for and what was found) and
    SettingsError when the limit leaves no room. Nothing else is ever opened in its place.
    """
    path, forms = locate(spec.argument)
    opened = _open_form(forms[0], spec)
    folder = path if path.is_dir() else path.parent
    limit = with_override(declared_limits(folder), spec.limit, opened.overhead[0])
    return Vocabulary(
        name=_name_of(spec.argument, path),
        source=spec.argument,
        folder=folder,
        digest=_digest(forms[0]),
        family=opened.family,
        engine=opened.engine,
        inventory=opened.inventory,
        spaces=probe_spaces(
            opened.engine, opened.inventory, prefix=opened.prefix, suffix=opened.suffix
        ),
        letters=probe_letters(opened.engine, opened.inventory),
        overhead=opened.overhead,
        limit=limit,
        notes=(*opened.notes, *_disagreements(opened, forms, spec)),
    )


def _open_form(form: Form, spec: VocabularySpec) -> _Opened:
    return _OPENERS[form.kind](form.path, spec)


def _open_description(
    read: Callable[[Path], tuple[descriptions.Description, list[str]]],
) -> Callable[[Path, VocabularySpec], _Opened]:
    def opener(path: Path, spec: VocabularySpec) -> _Opened:
        description, notes = read(path)
        engine = TokenizersEngine(
            description, control_strings=spec.control_strings, where=str(path)
        )
        model = description["model"]
        continues = model.get("continuing_subword_prefix") or ""
        return _Opened(
            engine,
            engine.inventory(),
            descriptions.family_of(description),
            engine.overhead,
            notes,
            prefix=continues if model["type"] == "WordPiece" else "",
            suffix=model.get("end_of_word_suffix") or "",
        )

    return opener


def _open_sentencepiece(path: Path, spec: VocabularySpec) -> _Opened:
    del spec
    engine = SentencePieceEngine(path.read_bytes(), where=str(path))
    return _Opened(engine, engine.inventory(), engine.family, engine.overhead, [])


def _open_ranks(path: Path, spec: VocabularySpec) -> _Opened:
    if spec.pattern is None:
        raise VocabularyError(
            "a rank file does not say how text is split before ranks apply.",
            hint="Name a file that holds the regular expression: --pattern FILE.",
            where=str(path),
        )
    ranks = parse_ranks(path.read_bytes(), str(path))
    if not ranks:
        raise VocabularyError("no entry in this rank file.", where=str(path))
    engine = RanksEngine(ranks, spec.pattern.strip("\r\n"), special={}, where=str(path))
    return _Opened(engine, engine.inventory(), engine.family, engine.overhead, [])


def _open_json_ranks(path: Path, spec: VocabularySpec) -> _Opened:
    ranks, pattern, special = parse_json_ranks(path.read_bytes(), str(path))
    notes = (
        [] if spec.pattern is None else ["--pattern was not used: the file holds its own pattern"]
    )
    engine = RanksEngine(ranks, pattern, special=special, where=str(path))
    return _Opened(engine, engine.inventory(), engine.family, engine.overhead, notes)


_OPENERS: dict[str, Callable[[Path, VocabularySpec], _Opened]] = {
    "tokenizer.json": _open_description(descriptions.from_tokenizer_json),
    "vocab.json": _open_description(descriptions.from_vocab_json),
    "vocab.txt": _open_description(descriptions.from_vocab_txt),
    "sentencepiece": _open_sentencepiece,
    "ranks": _open_ranks,
    "json ranks": _open_json_ranks,
}


def _disagreements(opened: _Opened, forms: list[Form], spec: VocabularySpec) -> list[str]:
    """Return one note for each other form of the folder: does it encode the probe texts alike?"""
    first, *others = forms
    notes = []
    for other in others:
        try:
            theirs = _open_form(other, replace(spec, limit=None))
        except VocabularyError as fault:
            beside = f"{other.path.name} lies beside {first.path.name}"
            notes.append(f"{beside} and does not open: {fault.message}")
            continue
        differing = _first_difference(opened.engine, theirs.engine)
        verdict = (
            "encodes the probe texts alike" if differing is None else f"differs on {differing!r}"
        )
        notes.append(f"{first.path.name} is measured; {other.path.name} beside it {verdict}")
    return notes


def _first_difference(ours: Engine, theirs: Engine) -> str | None:
    mine, yours = ours.encode(_PROBE_TEXTS), theirs.encode(_PROBE_TEXTS)
    pairs = zip(_PROBE_TEXTS, mine.ids_by_document(), yours.ids_by_document(), strict=True)
    return next((text for text, left, right in pairs if left != right), None)


def _name_of(argument: str, path: Path) -> str:
    if argument.startswith("hub:"):
        return argument.removeprefix("hub:")
    if path.is_dir() or path.name not in {
        "tokenizer.json",
        "vocab.txt",
        "vocab.json",
        "tokenizer.model",
    }:
        return path.resolve().name
    return path.resolve().parent.name


def _digest(form: Form) -> str:
    digest = hashlib.sha256(form.path.read_bytes())
    merges = form.path.parent / "merges.txt"
    if form.kind == "vocab.json" and merges.is_file():
        digest.update(merges.read_bytes())
    return f"sha256:{digest.hexdigest()}"
