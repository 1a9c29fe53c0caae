"""Train the four demo vocabularies from `everyday.txt`, the same bytes on every run.

Run `python corpora_demo/build_vocabularies.py` to write them, with `--check` to rebuild them in
a temporary folder and compare. Merges are learnt here and Unigram pieces by `sentencepiece`,
because the WordPiece and Unigram trainers of `tokenizers` 0.23.3 give other bytes in each process.
"""

from __future__ import annotations

import argparse
import heapq
import io
import json
import sys
import tempfile
from collections import Counter, defaultdict
from itertools import pairwise
from pathlib import Path
from typing import TYPE_CHECKING, Any

import sentencepiece
from tokenizers.normalizers import NFKC, BertNormalizer
from tokenizers.pre_tokenizers import BertPreTokenizer, ByteLevel

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable

HERE = Path(__file__).resolve().parent
TEXT = HERE / "everyday.txt"
VOCABULARIES = HERE / "vocabularies"

Json = dict[str, Any]
Pair = tuple[str, str]
Learnt = tuple[dict[str, int], list[Pair]]  # entries (text to id) and the merges that made them
NOT_SET = 1000000000000000019884624838656  # how a tokenizer_config.json says "no limit"
KNOWN_CHARACTERS = 340  # so that the rarest of about 530 become the unknown token


class MergeLearner:
    """Counts of neighbouring symbols over distinct words, kept up to date merge by merge.

    The method is Sennrich, Haddow and Birch 2016 (arXiv:1508.07909). The most frequent pair is
    merged; among equally frequent ones the first in code-point order, left symbol before right.
    """

    def __init__(self, words: Counter[tuple[str, ...]], join: Callable[[str, str], str]) -> None:
        self.join = join
        self.words = [list(word) for word in words]
        self.weights = list(words.values())
        self.counts: Counter[Pair] = Counter()
        self.places: defaultdict[Pair, set[int]] = defaultdict(set)
        for place in range(len(self.words)):
            self._count(place, +1)
        self.queue = [(-count, pair) for pair, count in self.counts.items()]
        heapq.heapify(self.queue)

    def _count(self, place: int, sign: int) -> set[Pair]:
        pairs = list(pairwise(self.words[place]))
        for pair in pairs:
            self.counts[pair] += sign * self.weights[place]
            self.places[pair].add(place)
        return set(pairs)

    def _merge(self, pair: Pair) -> None:
        changed: set[Pair] = set()
        for place in sorted(self.places.pop(pair)):
            changed |= self._count(place, -1)
            self.words[place] = merged(self.words[place], pair, self.join(*pair))
            changed |= self._count(place, +1)
        for other in changed:
            if self.counts[other] > 0:
                heapq.heappush(self.queue, (-self.counts[other], other))

    def learn(self, entries: dict[str, int], size: int) -> list[Pair]:
        """Merge until `entries` (text to id, grown in place) holds `size` or no pair repeats."""
        merges: list[Pair] = []
        while self.queue and len(entries) < size:
            count, pair = heapq.heappop(self.queue)
            if -count != self.counts[pair]:
                continue  # an older count of a pair that has been queued again since
            if -count < 2:
                break
            self._merge(pair)
            merges.append(pair)
            entries.setdefault(self.join(*pair), len(entries))
        return merges


def merged(symbols: list[str], pair: Pair, joined: str) -> list[str]:
    """`symbols` with every occurrence of `pair`, from the left, replaced by `joined`."""
    result: list[str] = []
    for symbol in symbols:
        if result and (result[-1], symbol) == pair:
            result[-1] = joined
        else:
            result.append(symbol)
    return result


def numbered(*groups: Iterable[str]) -> dict[str, int]:
    """Texts to ids, in the order given."""
    return {text: at for at, text in enumerate(text for group in groups for text in group)}


def write_text(path: Path, text: str) -> None:
    """Write UTF-8 with line feeds whatever the platform."""
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(text, encoding="utf-8", newline="\n")


def write_json(path: Path, content: Json) -> None:
    """Write JSON with one entry a line, in the order given."""
    write_text(path, json.dumps(content, ensure_ascii=False, indent=1) + "\n")


def template(entries: dict[str, int], single: str, second: str) -> Json:
    """A TemplateProcessing block; `A:0` or `B:1` names a text and its segment, the rest tokens."""

    def parts(pattern: str) -> list[Json]:
        found = [piece.rsplit(":", 1) for piece in pattern.split()]
        return [
            {"Sequence" if name in "AB" else "SpecialToken": {"id": name, "type_id": int(segment)}}
            for name, segment in found
        ]

    names = sorted({piece.rsplit(":", 1)[0] for piece in single.split()} - {"A"})
    tokens = {name: {"id": name, "ids": [entries[name]], "tokens": [name]} for name in names}
    steps = {"single": parts(single), "pair": parts(f"{single} {second}")}
    return {"type": "TemplateProcessing", **steps, "special_tokens": tokens}


def tokenizer_file(entries: dict[str, int], specials: Iterable[str], parts: Json) -> Json:
    """The content of a tokenizer.json with its special tokens; `parts` may replace any block."""
    flags = {"single_word": False, "lstrip": False, "rstrip": False, "normalized": False}
    added = [{"id": entries[s], "content": s, **flags, "special": True} for s in specials]
    start = {"version": "1.0", "truncation": None, "padding": None, "added_tokens": added}
    return {**start, "normalizer": None, **parts}


def learn_wordpiece(paragraphs: list[str], specials: list[str]) -> Learnt:
    """Learn from the words that hold only the commonest characters, ties in code-point order."""
    normalizer, splitter = BertNormalizer(lowercase=True), BertPreTokenizer()
    texts = [normalizer.normalize_str(paragraph) for paragraph in paragraphs]
    found = Counter(word for text in texts for word, _ in splitter.pre_tokenize_str(text))
    letters: Counter[str] = Counter(letter for word in found.elements() for letter in word)
    ranked = sorted(letters, key=lambda letter: (-letters[letter], letter))
    known = set(ranked[:KNOWN_CHARACTERS])
    kept = {word: count for word, count in found.items() if known.issuperset(word)}
    words = Counter({(w[0], *(f"##{letter}" for letter in w[1:])): n for w, n in kept.items()})
    entries = numbered(specials, sorted({symbol for word in words for symbol in word}))
    learner = MergeLearner(words, lambda left, right: left + right.removeprefix("##"))
    return entries, learner.learn(entries, 4000)


def build_wordpiece(folder: Path, paragraphs: list[str]) -> None:
    """Write an uncased WordPiece whose two files declare different limits, as real ones do."""
    specials = ["[PAD]", "[UNK]", "[CLS]", "[SEP]", "[MASK]"]
    entries, _ = learn_wordpiece(paragraphs, specials)
    cut = {"direction": "Right", "max_length": 128, "strategy": "LongestFirst", "stride": 0}
    fill: Json = {"pad_to_multiple_of": None, "pad_id": 0, "pad_type_id": 0, "pad_token": "[PAD]"}
    cleaning = {"clean_text": True, "handle_chinese_chars": True, "strip_accents": None}
    model: Json = {"type": "WordPiece", "unk_token": "[UNK]", "continuing_subword_prefix": "##"}
    parts = {
        "truncation": cut,
        "padding": {"strategy": {"Fixed": 128}, "direction": "Right", **fill},
        "normalizer": {"type": "BertNormalizer", **cleaning, "lowercase": True},
        "pre_tokenizer": {"type": "BertPreTokenizer"},
        "post_processor": template(entries, "[CLS]:0 A:0 [SEP]:0", "B:1 [SEP]:1"),
        "decoder": {"type": "WordPiece", "prefix": "##", "cleanup": True},
        "model": {**model, "max_input_chars_per_word": 100, "vocab": entries},
    }
    write_json(folder / "tokenizer.json", tokenizer_file(entries, specials, parts))
    write_text(folder / "vocab.txt", "".join(f"{entry}\n" for entry in entries))
    settings = {"do_lower_case": True, "model_max_length": 512, "truncation_side": "right"}
    write_json(folder / "tokenizer_config.json", settings)
    limits = {"model_type": "bert", "max_position_embeddings": 128, "pad_token_id": 0}
    write_json(folder / "config.json", {**limits, "vocab_size": len(entries)})


def learn_bytelevel(paragraphs: list[str], specials: list[str]) -> Learnt:
    """Learn merges of bytes, each byte written as the one character that stands for it."""
    splitter = ByteLevel(add_prefix_space=False, use_regex=True)
    split = (splitter.pre_tokenize_str(paragraph) for paragraph in paragraphs)
    words = Counter(tuple(word) for pieces in split for word, _ in pieces)
    entries = numbered(specials, sorted(ByteLevel.alphabet()))
    return entries, MergeLearner(words, str.__add__).learn(entries, 6000)


def build_bytelevel(folder: Path, paragraphs: list[str]) -> None:
    """Write a byte-level BPE: no text is unknown, a rare script costs up to a token a byte."""
    specials = ["<s>", "<pad>", "</s>", "<unk>", "<mask>"]
    entries, pairs = learn_bytelevel(paragraphs, specials)
    merges = [f"{left} {right}" for left, right in pairs]
    spaces = {"type": "ByteLevel", "add_prefix_space": False, "trim_offsets": True}
    model = {"type": "BPE", "dropout": None, "unk_token": None, "byte_fallback": False}
    model |= {"ignore_merges": False, "fuse_unk": False}
    parts = {
        "pre_tokenizer": {**spaces, "use_regex": True},
        "post_processor": template(entries, "<s>:0 A:0 </s>:0", "</s>:0 B:0 </s>:0"),
        "decoder": {**spaces, "use_regex": True},
        "model": {**model, "vocab": entries, "merges": merges},
    }
    write_json(folder / "tokenizer.json", tokenizer_file(entries, specials, parts))
    write_json(folder / "vocab.json", entries)
    write_text(folder / "merges.txt", "\n".join(["#version: 0.2", *merges, ""]))
    settings = {"add_prefix_space": False, "model_max_length": 512, "truncation_side": "right"}
    write_json(folder / "tokenizer_config.json", settings)
    limits = {"model_type": "roberta", "max_position_embeddings": 514, "pad_token_id": 1}
    write_json(folder / "config.json", {**limits, "vocab_size": len(entries)})


def train_pieces(paragraphs: list[str], **options: Any) -> bytes:  # noqa: ANN401 - the trainer's
    """A SentencePiece model fed from memory, so that it records no path of the machine."""
    model = io.BytesIO()
    settled: Json = {"num_threads": 1, "shuffle_input_sentence": False, "minloglevel": 2}
    settled |= {"normalization_rule_name": "identity", "remove_extra_whitespaces": False}
    settled |= {"byte_fallback": True, **options}
    sentencepiece.SentencePieceTrainer.train(
        sentence_iterator=iter(paragraphs), model_writer=model, **settled
    )
    return model.getvalue()


def learn_unigram(paragraphs: list[str]) -> list[tuple[str, float]]:
    """Pieces and log probabilities (Kudo 2018, arXiv:1804.10959), id order, all byte pieces."""
    texts = [NFKC().normalize_str(paragraph) for paragraph in paragraphs]
    sizes = {"vocab_size": 5000, "character_coverage": 0.9995}
    ids = {"pad_id": 0, "eos_id": 1, "unk_id": 2, "bos_id": -1}
    model = train_pieces(texts, model_type="unigram", **sizes, **ids)
    pieces = sentencepiece.SentencePieceProcessor(model_proto=model)
    # Five decimals, because the last bits of a logarithm may differ between machines.
    scores = [round(pieces.get_score(at), 5) for at in range(len(pieces))]
    return [(str(pieces.id_to_piece(at)), score) for at, score in enumerate(scores)]


def build_unigram(folder: Path, paragraphs: list[str]) -> None:
    """Write a Unigram with all byte pieces and no declared limit."""
    vocab = learn_unigram(paragraphs)
    entries, specials = numbered(piece for piece, _ in vocab), ["<pad>", "</s>", "<unk>"]
    spaces = {"type": "Metaspace", "replacement": "▁", "prepend_scheme": "always", "split": True}
    decoders = [{"type": "ByteFallback"}, spaces, {"type": "Fuse"}]
    parts = {
        "normalizer": {"type": "NFKC"},
        "pre_tokenizer": spaces,
        "post_processor": template(entries, "A:0 </s>:0", "B:0 </s>:0"),
        "decoder": {"type": "Sequence", "decoders": decoders},
        "model": {"type": "Unigram", "unk_id": 2, "byte_fallback": True, "vocab": vocab},
    }
    write_json(folder / "tokenizer.json", tokenizer_file(entries, specials, parts))
    write_json(folder / "tokenizer_config.json", {"model_max_length": NOT_SET})


def build_sentencepiece(folder: Path, paragraphs: list[str]) -> None:
    """Write a SentencePiece BPE that leaves the rarest 2 % of characters to byte pieces."""
    sizes = {"vocab_size": 4000, "character_coverage": 0.98, "split_digits": True}
    limits = {"model_type": "llama", "max_position_embeddings": 2048, "rope_theta": 10000.0}
    write_json(folder / "config.json", {**limits, "vocab_size": sizes["vocab_size"]})
    (folder / "tokenizer.model").write_bytes(train_pieces(paragraphs, model_type="bpe", **sizes))


def build_all(folder: Path) -> None:
    """Build every vocabulary below `folder`."""
    paragraphs = [line for line in TEXT.read_text(encoding="utf-8").split("\n") if line]
    build_wordpiece(folder / "harbour-wordpiece", paragraphs)
    build_bytelevel(folder / "harbour-bytelevel", paragraphs)
    build_unigram(folder / "harbour-unigram", paragraphs)
    build_sentencepiece(folder / "harbour-sentencepiece", paragraphs)


def contents(folder: Path) -> dict[str, bytes]:
    """Name below `folder` to bytes of every file that the build writes."""
    found = (path for path in sorted(folder.glob("*/*")) if path.is_file())
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in found}


def differences() -> list[str]:
    """Names of the files that a fresh build writes differently, adds or leaves out."""
    with tempfile.TemporaryDirectory() as temporary:
        build_all(Path(temporary))
        fresh, kept = contents(Path(temporary)), contents(VOCABULARIES)
    return sorted(name for name in fresh | kept if fresh.get(name) != kept.get(name))


def main() -> int:
    """Write the vocabularies, or with `--check` report whether a rebuild gives the same bytes."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0] if __doc__ else None)
    parser.add_argument("--check", action="store_true", help="rebuild, compare, exit 1 if unequal")
    if not parser.parse_args().check:
        build_all(VOCABULARIES)
        return 0
    unequal = differences()
    for name in unequal:
        print(f"{name} differs from a fresh build", file=sys.stderr)
    return 1 if unequal else 0


if __name__ == "__main__":
    raise SystemExit(main())
