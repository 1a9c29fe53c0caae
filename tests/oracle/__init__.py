"""A slow, obvious measurement of everything an audit counts, written from the definitions alone.

It shares no code with the package, so that the package can be checked against it integer by
integer. One document at a time, one token at a time; ratios are fractions until the last step.
"""

from __future__ import annotations

from tests.oracle.slices import Document, measure, tokens_per_document
from tests.oracle.spans import Token, spans
from tests.oracle.vocabularies import OracleVocabulary
from tests.oracle.with_ranks import open_ranks, open_tekken_json
from tests.oracle.with_sentencepiece import open_sentencepiece
from tests.oracle.with_tokenizers import open_tokenizers

__all__ = [
    "Document",
    "OracleVocabulary",
    "Token",
    "measure",
    "open_ranks",
    "open_sentencepiece",
    "open_tekken_json",
    "open_tokenizers",
    "spans",
    "tokens_per_document",
]
