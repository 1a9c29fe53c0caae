"""What is needed to make the same audit again: the command, settings, versions and digests."""

from __future__ import annotations

import json
import shlex
from collections.abc import Iterator, Mapping
from typing import Any

from auditor.planning.ranking import USUAL
from auditor.report.formatting import count, plural

Json = Mapping[str, Any]
Block = tuple[str, list[tuple[str, str]]]

_SOURCES = 10
_OPTIONS = (("origin", None), ("unit", "record"), ("words", "icu"), ("control_strings", "parse"),
            ("limit", None), ("encoding", None))  # fmt: skip
_USUAL_WEIGHTS = {name: weight for name, weight in USUAL.items() if weight}
_FLAGS = ("graphemes", "repeats")


def command(audit: Json) -> str:
    """Return the command line that makes this audit, quoted for a POSIX shell."""
    sources = audit["corpus"]["sources"]
    named = sources[:_SOURCES] if len(sources) <= _SOURCES else ["CORPUS"]
    words = ["auditor", "assess", *named]
    for vocabulary in audit["vocabularies"]:
        words += ["--vocab", vocabulary["source"]]
    return shlex.join([*words, *_options(audit["settings"])])


def _options(settings: Json) -> Iterator[str]:
    if settings.get("text"):
        yield from ("--text", ",".join(settings["text"]))
    for field in settings.get("by") or []:
        yield from ("--by", field)
    for name, usual in _OPTIONS:
        if settings.get(name, usual) != usual:
            yield from (f"--{name.replace('_', '-')}", str(settings[name]))
    if settings.get("pattern") is not None:
        yield from ("--pattern", "FILE")
    yield from (f"--{name}" for name in _FLAGS if settings.get(name))


def plan_command(plan: Json) -> str:
    """Return the command line that makes this length plan, quoted for a POSIX shell.

    A plan made from an audit is named by the corpus, which gives the same numbers and more.
    """
    sources, settings = plan["corpus"]["sources"], plan["settings"]
    named = sources[:_SOURCES] if len(sources) <= _SOURCES else ["CORPUS"]
    words = ["auditor", "plan-length", *named, "--vocab", plan["vocabulary"]["source"]]
    return shlex.join([*words, *_options(settings), *_plan_options(settings)])


def _plan_options(settings: Json) -> Iterator[str]:
    if settings["candidates"]:
        yield from ("--candidates", ",".join(map(str, settings["candidates"])))
    usual = {"accept_truncated": 0.01, "batch": 32, "overlap": None, "pair": None}
    for name, value in usual.items():
        if settings[name] != value:
            yield from (f"--{name.replace('_', '-')}", str(settings[name]))
    if settings["model"]:
        yield from ("--model", _shape(settings["model"]))
        yield from ("--precision", settings["precision"])


def _spelled(value: object) -> str:
    return {True: "yes", False: "no"}[value] if isinstance(value, bool) else str(value)


def languages_command(document: Json) -> str:
    """Return the command line that makes this comparison, quoted for a POSIX shell."""
    sources, settings = document["corpus"]["sources"], document["settings"]
    named = sources[:_SOURCES] if len(sources) <= _SOURCES else ["CORPUS"]
    words = ["auditor", "languages", *named]
    for vocabulary in document["vocabularies"]:
        words += ["--vocab", vocabulary["source"]]
    if settings["parallel"]:
        words += ["--parallel", settings["parallel"]]
    for reference in settings["references"]:
        words += ["--reference", reference]
    usual = {**settings, "graphemes": False}  # this command counts them always
    return shlex.join([*words, *_options(usual)])


def domain_command(document: Json) -> str:
    """Return the command line that makes this vetting, quoted for a POSIX shell."""
    sources, settings = document["corpus"]["sources"], document["settings"]
    named = sources[:_SOURCES] if len(sources) <= _SOURCES else ["CORPUS"]
    words = ["auditor", "domain", *named]
    for candidate in document["candidates"]:
        words += ["--vocab", candidate["source"]]
    for general in settings["general"]:
        words += ["--general", general]
    if settings["general_text"]:
        words += ["--general-text", ",".join(settings["general_text"])]
    if settings["seed"]:
        words += ["--seed", str(settings["seed"])]
    if settings["terms"]:
        words += ["--terms", settings["terms"]]
    weights = {name: weight for name, weight in settings["weights"].items() if weight}
    if weights != _USUAL_WEIGHTS:
        words += ["--weigh", ",".join(f"{name}={weight:g}" for name, weight in weights.items())]
    if settings["width"]:
        words += ["--width", str(settings["width"])]
    if settings["model"]:
        words += ["--model", _shape(settings["model"])]
    return shlex.join([*words, *_options(settings)])


def inspect_command(document: Json) -> str:
    """Return the command line that makes this inspection, quoted for a POSIX shell."""
    settings = document["settings"]
    words = ["auditor", "inspect", *(own["source"] for own in document["vocabularies"])]
    if settings["width"]:
        words += ["--width", str(settings["width"])]
    if settings["model"]:
        words += ["--model", _shape(settings["model"])]
    return shlex.join([*words, *_options(settings)])


def _shape(model: Json) -> str:
    shape = {name: value for name, value in model.items() if value is not None}
    return ",".join(f"{name}={_spelled(value)}" for name, value in shape.items())


def comparison_command(document: Json) -> str:
    """Return the command line that makes this comparison of audits, quoted for a POSIX shell."""
    settings = document["settings"]
    words = ["auditor", "compare", document["before"]["audit"], document["after"]["audit"]]
    for option, name in (("--vocab", "vocabulary"), ("--vocab-after", "vocabulary_after")):
        if settings[name] is not None:
            words += [option, settings[name]]
    if settings["different_settings"]:
        words.append("--allow-different-settings")
    if not settings["excerpts"]:
        words.append("--no-excerpts")
    return shlex.join(words)


def comparison_blocks(document: Json) -> list[Block]:
    """Return titled lists of (name, text): each audit with its corpus, and the vocabularies."""
    found: list[Block] = []
    for side, title in (("before", "Before"), ("after", "After")):
        own = document[side]
        corpus = own["corpus"]
        more = len(corpus["sources"]) - _SOURCES
        sources = ", ".join(corpus["sources"][:_SOURCES])
        facts = [
            ("audit", own["audit"]),
            ("sources", f"{sources} and {count(more)} more" if more > 0 else sources),
            ("digest", corpus["digest"]),
            ("records set aside", count(own["set_aside"])),
            *((name, _text(version)) for name, version in own["made_with"].items()),
        ]
        vocabularies = [
            ("vocabulary", f"{pair[side]['name']}, {pair[side]['source']}, {pair[side]['digest']}")
            for pair in document["pairs"]
        ]
        found.append((title, [*facts, *vocabularies]))
    return found


def plan_facts(plan: Json) -> list[tuple[str, str]]:
    """Return what the plan was made of, as (name, text): corpus, vocabulary, versions."""
    vocabulary, corpus = plan["vocabulary"], plan["corpus"]
    return [
        ("lengths from", plan["measured"]),
        ("corpus digest", corpus["digest"]),
        ("records set aside", count(corpus["set_aside"]["records"])),
        ("vocabulary", vocabulary["source"]),
        ("vocabulary digest", vocabulary["digest"]),
        ("overhead", count(plan["overhead"])),
        ("limit", count(vocabulary["limit"]["value"])),
        *((name, _text(found)) for name, found in plan["made_with"].items()),
    ]


def command_notes(audit: Json) -> list[str]:
    """Return what the command cannot say by itself."""
    sources = audit["corpus"]["sources"]
    notes = []
    if len(sources) > _SOURCES:
        notes.append(
            f"CORPUS stands for {plural(len(sources), 'file')}, listed in the JSON beside."
        )
    if audit["settings"].get("pattern") is not None:
        notes.append("FILE holds the pattern that stands under Settings.")
    return notes


def blocks(audit: Json) -> list[Block]:
    """Return titled lists of (name, text): corpus, vocabularies, settings, versions."""
    return [
        *_corpus(audit["corpus"]),
        *((f"Vocabulary {n}", _vocabulary(own)) for n, own in enumerate(audit["vocabularies"], 1)),
        ("Settings", [(name, _text(found)) for name, found in audit["settings"].items()]),
        ("Made with", [(name, _text(found)) for name, found in audit["made_with"].items()]),
    ]


def _corpus(corpus: Json | None) -> Iterator[Block]:
    if corpus is None:
        return
    shown = ", ".join(corpus["sources"][:_SOURCES])
    more = len(corpus["sources"]) - _SOURCES
    sources = f"{shown} and {count(more)} more" if more > 0 else shown
    yield "Corpus", [("sources", sources), ("digest", corpus["digest"])]


def _vocabulary(vocabulary: Json) -> list[tuple[str, str]]:
    limit = vocabulary["limit"]
    declared = "; ".join(
        f"{found['file']} {found['key']} = {found['value']}"
        + (f" ({found['note']})" if found["note"] else "")
        for found in limit["declared"]
    )
    overhead = vocabulary["overhead"]
    facts = [
        ("name", vocabulary["name"]),
        ("source", vocabulary["source"]),
        ("digest", vocabulary["digest"]),
        ("family", vocabulary["family"]),
        ("entries", count(vocabulary["entries"])),
        ("overhead", f"{overhead['single']} for one sequence, {overhead['pair']} for a pair"),
        ("limit", count(limit["value"])),
        ("limits declared", declared or "none"),
        ("unknown entry", _text((vocabulary["unknown"] or {}).get("entry"))),
        ("byte pieces", vocabulary["byte_pieces"]["kind"]),
    ]
    notes = [("note", note) for note in (*limit["notes"], *vocabulary["notes"])]
    return [*facts, *notes]


def _text(found: object) -> str:
    if isinstance(found, str):
        return found
    if found is None or found == []:
        return "not set"
    return json.dumps(found, ensure_ascii=False)
