"""Every form of a vocabulary opens as what it is, and says what was switched off."""

from __future__ import annotations

import json
import shutil
from pathlib import Path

import pytest

from auditor.errors import VocabularyError
from auditor.vocabulary import VocabularySpec, facts_of, open_vocabulary
from tests.unit import small_vocabularies as small

DEMO = Path(__file__).parents[3] / "corpora_demo" / "vocabularies"


def opened(argument, **settings):
    return open_vocabulary(VocabularySpec(str(argument), **settings))


@pytest.mark.parametrize(
    ("name", "family", "entries", "overhead"),
    [
        ("harbour-bytelevel", "bpe", 6000, (2, 4)),
        ("harbour-wordpiece", "wordpiece", 4000, (2, 3)),
        ("harbour-unigram", "unigram", 5000, (1, 2)),
        ("harbour-sentencepiece", "bpe", 4000, (0, 0)),
    ],
)
def test_folders_of_the_demo(name, family, entries, overhead):
    """Family, entries and overhead, as the script that builds them states them."""
    found = opened(DEMO / name)
    assert (found.family, facts_of(found).entries, found.overhead) == (family, entries, overhead)


def test_all_forms_of_one_vocabulary_encode_alike(tmp_path):
    """`vocab.json` + `merges.txt` of the byte-level demo give the ids of its `tokenizer.json`."""
    for name in ("vocab.json", "merges.txt"):
        shutil.copy(DEMO / "harbour-bytelevel" / name, tmp_path)
    text = ["The lamp, No. 13, was re-lit.\n\tnaïve 中文"]
    ours, theirs = opened(tmp_path), opened(DEMO / "harbour-bytelevel")
    assert ours.engine.encode(text).ids.tolist() == theirs.engine.encode(text).ids.tolist()


def test_disagreement_between_the_forms_of_a_folder_is_reported(tmp_path):
    """`tokenizer.json` is measured; a `vocab.txt` beside it that encodes otherwise is named."""
    shutil.copy(DEMO / "harbour-wordpiece" / "tokenizer.json", tmp_path)
    (tmp_path / "vocab.txt").write_text("[PAD]\n[UNK]\nhello\n")
    found = opened(tmp_path)
    assert any("vocab.txt" in note and "differs on" in note for note in found.notes)


def test_a_form_that_does_not_open_is_reported_and_nothing_replaces_it(tmp_path):
    """A damaged SentencePiece model beside `tokenizer.json` is a note; alone it is an error."""
    (tmp_path / "tokenizer.model").write_bytes(b"\n\x05damaged")
    with pytest.raises(VocabularyError, match="sentencepiece"):
        opened(tmp_path)
    shutil.copy(DEMO / "harbour-unigram" / "tokenizer.json", tmp_path)
    assert any("does not open" in note for note in opened(tmp_path).notes)


def test_stored_truncation_padding_and_dropout_are_switched_off_and_told(tmp_path):
    """All three change counts; each is named in the notes."""
    data = json.loads((DEMO / "harbour-bytelevel" / "tokenizer.json").read_text())
    data["truncation"] = {
        "direction": "Right",
        "max_length": 3,
        "strategy": "LongestFirst",
        "stride": 0,
    }
    data["model"]["dropout"] = 0.9
    path = tmp_path / "tokenizer.json"
    path.write_text(json.dumps(data))
    found, plain = opened(path), opened(DEMO / "harbour-bytelevel")
    text = ["a longer sentence than three tokens"] * 20
    assert found.engine.encode(text).ids.tolist() == plain.engine.encode(text).ids.tolist()
    assert any("truncation" in note for note in found.notes)
    assert any("dropout 0.9" in note for note in found.notes)


def test_a_byte_order_mark_is_passed_over(tmp_path):
    """A BOM before the JSON makes the library fail; here it opens."""
    path = tmp_path / "tokenizer.json"
    path.write_bytes(b"\xef\xbb\xbf" + (DEMO / "harbour-unigram" / "tokenizer.json").read_bytes())
    assert opened(path).family == "unigram"


def test_lines_of_vocab_txt_are_split_at_line_feeds_only(tmp_path):
    """U+2028 and blank lines are entries: ids are line numbers."""
    found = small.wordpiece(tmp_path, ["[UNK]", "", "a\u2028b", "hello"])
    assert found.engine.encode(["hello"]).ids.tolist() == [3]


@pytest.mark.parametrize(("entries", "folds"), [(["hello"], True), (["Hello"], False)])
def test_case_folding_of_vocab_txt_is_inferred_and_told(tmp_path, entries, folds):
    """Without a configuration, an upper-case letter among the entries decides."""
    found = small.wordpiece(tmp_path, ["[UNK]", *entries])
    assert any(f"case folding {'on' if folds else 'off'}" in note for note in found.notes)


def test_words_alone_are_a_word_level_vocabulary(tmp_path):
    """`vocab.json` without `merges.txt`: whole words, and no decoder is assumed."""
    (tmp_path / "vocab.json").write_text('{"[UNK]": 0, "lamp": 1}')
    found = opened(tmp_path)
    assert (found.family, found.engine.encode(["lamp buoy"]).ids.tolist()) == ("wordlevel", [1, 0])
    assert facts_of(found).lacks >= {"decoder"}


def test_the_local_hub_cache_is_read(tmp_path, monkeypatch):
    """`hub:ORG/NAME` is the snapshot that refs/main names, below HF_HUB_CACHE."""
    entry = tmp_path / "models--buoys--small"
    (entry / "refs").mkdir(parents=True)
    (entry / "refs" / "main").write_text("abc123")
    shutil.copytree(DEMO / "harbour-unigram", entry / "snapshots" / "abc123")
    monkeypatch.setenv("HF_HUB_CACHE", str(tmp_path))
    found = opened("hub:buoys/small")
    assert (found.name, found.family) == ("buoys/small", "unigram")


def test_a_rank_file_called_tokenizer_model_is_known_by_its_content(tmp_path):
    """The name says SentencePiece, the content says ranks: the content is believed."""
    import base64

    lines = [f"{base64.b64encode(bytes([b])).decode()} {b}" for b in range(256)]
    (tmp_path / "tokenizer.model").write_text("\n".join(lines))
    found = opened(tmp_path, pattern=r"\S+|\s+")
    assert (found.family, found.engine.encode(["aé"]).ids.tolist()) == ("ranks", [97, 195, 169])


def test_control_strings_are_parsed_or_text(tmp_path):
    """`<s>` in a text is the control token, or its characters when asked for."""
    del tmp_path
    parsed = opened(DEMO / "harbour-bytelevel").engine.encode(["<s>"])
    as_text = opened(DEMO / "harbour-bytelevel", control_strings="text").engine.encode(["<s>"])
    assert len(parsed.ids) == 1
    assert len(as_text.ids) > 1


def test_remote_code_is_refused_with_a_remedy(tmp_path):
    """A folder that only asks for code of its own holds no vocabulary that is opened."""
    (tmp_path / "tokenizer_config.json").write_text(
        '{"auto_map": {"AutoTokenizer": ["x.Y", null]}}'
    )
    with pytest.raises(VocabularyError, match="never run"):
        opened(tmp_path)
