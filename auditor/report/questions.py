"""The questions a report answers, in order, and the figures that stand under each."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from auditor.report import answers
from auditor.report.answers import Sentence

Json = Mapping[str, Any]
Answer = Callable[[Json, Json], list[Sentence]]


@dataclass(frozen=True, slots=True)
class Question:
    """One question: ``answer`` takes a vocabulary of the audit, and the audit itself."""

    key: str
    title: str
    subject: str
    figures: tuple[str, ...]
    answer: Answer


def _fit(vocabulary: Json, audit: Json) -> list[Sentence]:
    return answers.fit(vocabulary, relative=vocabulary is not audit["vocabularies"][0])


QUESTIONS: tuple[Question, ...] = (
    Question(
        "fit", "Does this vocabulary fit the text?", "Fit",
        ("fertility", "pieces_per_word", "pieces_per_known_word", "continued_words",
         "bytes_per_token", "characters_per_token", "relative_tokens"), _fit,
    ),
    Question(
        "lose", "What does it lose?", "Losses",
        ("unknown_tokens", "unknown_words", "unknown_characters", "byte_tokens",
         "byte_spelled_characters", "dropped_characters", "case_folded_words", "changed_words",
         "control_strings", "documents_with_unknown", "documents_with_byte_tokens",
         "documents_with_control_strings", "lossless_documents"),
        lambda vocabulary, _: answers.lose(vocabulary),
    ),
    Question(
        "whitespace", "How is whitespace treated?", "Whitespace", ("whitespace_tokens",),
        lambda vocabulary, _: answers.whitespace(vocabulary),
    ),
    Question(
        "length", "How long do documents become, and what would a limit cut?", "Limit",
        ("truncated_documents", "truncated_tokens"),
        lambda vocabulary, _: answers.length(vocabulary),
    ),
    Question("slices", "Which slices pay more?", "Slices", (), lambda _, __: []),
    Question(
        "words", "Which words and characters cause it?", "Words", (),
        lambda vocabulary, _: answers.words(vocabulary),
    ),
    Question(
        "aside", "What was set aside?", "Repetition", ("repeated_documents",),
        lambda _, audit: answers.set_aside(audit["corpus"]),
    ),
)  # fmt: skip
