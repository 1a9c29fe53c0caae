"""Reading a corpus: files in many formats in, batches of documents and flawed records out."""

from auditor.corpus.batch import Batch, Flaw
from auditor.corpus.fields import Fields, resolve_fields
from auditor.corpus.glossary import Glossary, Term, read_glossary
from auditor.corpus.options import ReadOptions
from auditor.corpus.reading import read
from auditor.corpus.sources import Named, Source, find_sources

__all__ = [
    "Batch",
    "Fields",
    "Flaw",
    "Glossary",
    "Named",
    "ReadOptions",
    "Source",
    "Term",
    "find_sources",
    "read",
    "read_glossary",
    "resolve_fields",
]
