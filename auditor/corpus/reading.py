"""Reading a corpus: batches of documents, one source after the other."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence

from auditor.corpus.batch import Batch
from auditor.corpus.batcher import Batcher
from auditor.corpus.fields import Fields
from auditor.corpus.options import ReadOptions
from auditor.corpus.readers import rows_of
from auditor.corpus.sources import Source


def read(
    sources: Sequence[Source],
    options: ReadOptions,
    fields: Fields,
    *,
    progress: Callable[[int], None] | None = None,
) -> Iterator[Batch]:
    """Yield the documents of ``sources`` in batches, each of one source, numbered from 0.

    ``progress`` is called after every batch with the bytes of all files read so far, as they lie on
    the disk; the batch carries the same number in ``read_bytes``. No more is held than a batch and
    the block of the file it came from. Raises CorpusError when a file cannot be opened, and at the
    first flaw when ``options.strict``.
    """
    options.check()
    batcher = Batcher(options, fields)
    named = {
        *fields.text,
        *options.by,
        options.origin,
        options.pair,
        options.parallel,
        fields.identifier,
    }
    wanted = frozenset(name for name in named if name is not None)
    before = 0
    for source in sources:
        plain = source.format(options.encoding) == "text"
        with source.open() as stream:
            rows = rows_of(source, stream, options, wanted)
            for batch in batcher.batches(source.name, rows, plain=plain):
                batch.read_bytes = before + stream.position
                if progress is not None:
                    progress(batch.read_bytes)
                yield batch
            before += stream.position
