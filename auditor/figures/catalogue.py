"""The figures of FIGURES.md, each declared once."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Better = Literal["lower", "higher", "neither"]


@dataclass(frozen=True, slots=True)
class Figure:
    """A ratio of two totals of document columns, with its interval over documents.

    ``share`` says that it lies in [0, 1]; ``needs`` names what a vocabulary or setting must have
    for the figure to be defined; ``of_documents`` that it is a proportion of documents.
    """

    name: str
    numerator: str
    denominator: str
    unit: str
    definition: str
    better: Better = "lower"
    share: bool = True
    of_documents: bool = False
    needs: tuple[str, ...] = ()


def _proportion(name: str, definition: str, *needs: str, better: Better = "lower") -> Figure:
    return Figure(
        name, name, "documents", "share of documents", definition, better,
        of_documents=True, needs=needs,
    )  # fmt: skip


CATALOGUE: tuple[Figure, ...] = (
    Figure("fertility", "tokens", "words", "tokens per word",
           "All tokens divided by all words.", share=False),
    Figure("pieces_per_word", "pieces", "words", "tokens per word",
           "Tokens that touch a word, summed over words, divided by words (Rust et al. 2021).",
           share=False),
    Figure("pieces_per_known_word", "known_pieces", "known_words", "tokens per word",
           "The same over the words that no unknown token touches.", share=False),
    Figure("continued_words", "continued_words", "words", "share of words",
           "Words touched by two tokens or more (Rust et al. 2021)."),
    Figure("bytes_per_token", "bytes", "tokens", "bytes per token",
           "UTF-8 bytes divided by tokens.", "higher", share=False),
    Figure("characters_per_token", "characters", "tokens", "characters per token",
           "Code points divided by tokens.", "higher", share=False),
    Figure("unknown_tokens", "unknown_tokens", "tokens", "share of tokens",
           "Tokens with the unknown id that no control string produced.", needs=("unknown",)),
    Figure("unknown_words", "unknown_words", "words", "share of words",
           "Words touched by an unknown token.", needs=("unknown",)),
    Figure("unknown_characters", "unknown_characters", "ink_characters", "share of characters",
           "Non-whitespace characters in the span of an unknown token.", needs=("unknown",)),
    Figure("byte_tokens", "byte_tokens", "tokens", "share of tokens",
           "Tokens that stand for bytes and not for whole characters."),
    Figure("byte_spelled_characters", "byte_spelled_characters", "ink_characters",
           "share of characters", "Non-whitespace characters in the span of a byte token."),
    Figure("dropped_characters", "dropped_characters", "ink_characters", "share of characters",
           "Non-whitespace characters that no token stands for."),
    Figure("case_folded_words", "case_folded_words", "words", "share of words",
           "Words that the normaliser alters in nothing but case.", "neither"),
    Figure("changed_words", "changed_words", "words", "share of words",
           "Words that the normaliser alters in more than case."),
    Figure("whitespace_tokens", "whitespace_tokens", "tokens", "share of tokens",
           "Tokens that hold nothing but whitespace.", "neither"),
    Figure("control_strings", "control_strings", "tokens", "share of tokens",
           "Control tokens that the text itself produced by spelling them."),
    Figure("truncated_tokens", "truncated_tokens", "tokens", "share of tokens",
           "Tokens beyond the room that the limit leaves.", needs=("limit",)),
    _proportion("documents_with_unknown", "Documents that hold an unknown token.", "unknown"),
    _proportion("documents_with_byte_tokens", "Documents that hold a byte token."),
    _proportion("documents_with_control_strings", "Documents that spell a control token."),
    _proportion("truncated_documents", "Documents longer than the limit.", "limit"),
    _proportion("lossless_documents",
                "Documents that come back exactly when their ids are decoded.",
                "decoder", better="higher"),
)  # fmt: skip

RELATIVE_TOKENS = Figure(
    "relative_tokens", "tokens", "reference_tokens", "tokens per token",
    "Tokens divided by those of the first vocabulary named on the same documents "
    "(normalised sequence length, Dagan et al. 2024).", share=False,
)  # fmt: skip

REPEATED_DOCUMENTS = Figure(
    "repeated_documents", "repeated_documents", "documents", "share of documents",
    "Documents whose text occurred before: 1 - distinct texts / documents, by 128-bit hash.",
    of_documents=True, needs=("repeats",),
)  # fmt: skip

# What may be compared between languages, where words are not: asked for by `languages` alone.
COST_FIGURES: tuple[Figure, ...] = (
    Figure("tokens_per_character", "tokens", "characters", "tokens per character",
           "All tokens divided by all code points.", share=False),
    Figure("tokens_per_grapheme", "tokens", "graphemes", "tokens per grapheme",
           "All tokens divided by all extended grapheme clusters.", share=False),
    Figure("tokens_per_byte", "tokens", "bytes", "tokens per byte",
           "All tokens divided by all UTF-8 bytes.", share=False),
)  # fmt: skip

WHY_UNDEFINED = {
    "unknown": "the vocabulary has no unknown entry",
    "limit": "no position limit is known: name one with --limit",
    "decoder": "the vocabulary has no decoder",
    "repeats": "not counted: ask with --repeats",
}

PAIRS: tuple[tuple[str, str], ...] = tuple(
    (figure.numerator, figure.denominator) for figure in (*CATALOGUE, RELATIVE_TOKENS)
)
COLUMNS: tuple[str, ...] = tuple(dict.fromkeys(name for pair in PAIRS for name in pair))
