"""Vocabularies: opening every form, their facts, their position limit, one engine a library."""

from auditor.vocabulary.facts import VocabularyFacts, facts_of
from auditor.vocabulary.opening import Vocabulary, VocabularySpec, open_vocabulary

__all__ = ["Vocabulary", "VocabularyFacts", "VocabularySpec", "facts_of", "open_vocabulary"]
