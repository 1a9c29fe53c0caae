"""The corpus of a run: its files, its batches, and the name of what is written of it."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

from auditor.corpus import Batch, Fields, Named, Source, read
from auditor.errors import CorpusError, SettingsError
from auditor.runs.plan import Plan
from auditor.tallies.corpus import FlawsTally
from auditor.vocabulary import VocabularyFacts
from auditor.vocabulary.conversation import Renderer, chat_template
from auditor.vocabulary.locate import locate


@dataclass(frozen=True, slots=True)
class Progress:
    """How far a run is: bytes read of the files, of how many (``None``: unknown), documents."""

    read_bytes: int
    total_bytes: int | None
    documents: int


@dataclass(frozen=True)
class Reading:
    """The corpus of a run: its files, what is read of them, and whom to tell how far it is."""

    sources: list[Source]
    fields: Fields
    conversations: str | None
    progress: Callable[[Progress], None] | None

    @property
    def names(self) -> list[str]:
        """The names of the files."""
        return [source.name for source in self.sources]

    @property
    def total(self) -> int | None:
        """The bytes of all files, ``None`` when unknown."""
        sizes = [source.size for source in self.sources]
        return None if any(size is None for size in sizes) else sum(size or 0 for size in sizes)


def with_conversations(plan: Plan, fields: Fields) -> tuple[Plan, str | None]:
    """Return the plan with the way to render conversations, and how it is called in the settings.

    All vocabularies must see one text: with several, a template is used only if they share it.
    """
    if not fields.conversation:
        return plan, None
    folders = [locate(spec.argument)[0] for spec in plan.vocabularies]
    roots = [folder if folder.is_dir() else folder.parent for folder in folders]
    templates = {chat_template(root) for root in roots}
    if len(templates) == 1 and None not in templates:
        renderer = Renderer.from_folder(roots[0])
        return replace(plan, read=replace(plan.read, render=renderer.render)), "chat template"
    reason = "the vocabularies' templates differ" if len(templates) > 1 else "no chat template"
    return plan, f"contents joined by line feeds ({reason})"


def batches(plan: Plan, reading: Reading) -> Iterator[tuple[Batch, int]]:
    """Yield each batch with the number of its source, and tell how far the reading is."""
    numbers = {name: number for number, name in enumerate(reading.names)}
    reached = documents = 0

    def note(read_bytes: int) -> None:
        nonlocal reached
        reached = read_bytes

    for batch in read(reading.sources, plan.read, reading.fields, progress=note):
        documents += len(batch)
        yield batch, numbers[batch.source]
        if reading.progress is not None:
            reading.progress(Progress(reached, reading.total, documents))


def default_name(plan: Plan, names: Sequence[str]) -> str:
    """Return the name of the folder for ``plan`` and vocabularies: <corpus>--<vocabulary>."""
    head = plan.corpus[0]
    first = head.name if isinstance(head, Named) else head
    corpus = "stdin" if first == "-" else Path(first.rstrip("/*?")).name.split(".")[0] or "corpus"
    more = f"-and-{len(plan.corpus) - 1}-more" if len(plan.corpus) > 1 else ""
    vocabulary = names[0] if len(names) == 1 else f"{names[0]}-and-{len(names) - 1}-more"
    return cleaned(f"{corpus}{more}--{vocabulary}")


def cleaned(name: str) -> str:
    """Return ``name`` as the name of a folder: letters, digits and ``-_.`` stay."""
    return "".join(c if c.isalnum() or c in "-_." else "-" for c in name).strip(".") or "audit"


def refuse_empty(measured: int, set_aside: FlawsTally, names: list[str]) -> None:
    """Raise CorpusError when no document was measured."""
    if measured:
        return
    aside = set_aside.reasons.total()
    counted = "1 record was" if aside == 1 else f"{aside} records were"
    raise CorpusError(
        f"no document to measure; {counted} set aside."
        if aside
        else "no document to measure: the corpus is empty.",
        hint=f"Most frequent reason: {set_aside.reasons.most_common(1)[0][0]}." if aside else None,
        where=", ".join(names[:3]),
    )


def named_apart(facts: list[VocabularyFacts]) -> list[VocabularyFacts]:
    """Return the facts, those that share a name renamed to what the user wrote."""
    names = [own.name for own in facts]
    apart = [own if names.count(own.name) == 1 else replace(own, name=own.source) for own in facts]
    repeated = next(
        (own.name for own in apart if [o.name for o in apart].count(own.name) > 1), None
    )
    if repeated is not None:
        raise SettingsError("one vocabulary is named twice.", hint="Name it once.", where=repeated)
    return apart
