"""The position limit: what is declared beside a vocabulary, what binds, what disagrees.

How each family numbers positions was read in the modelling code of `transformers` 4.57.1
(`models/<family>/modeling_<family>.py`), named "modelling code" below.
"""

from __future__ import annotations

import json

import pytest

from auditor.errors import SettingsError
from auditor.vocabulary.limits import DeclaredLimit, PositionLimit, declared_limits, with_override


@pytest.fixture
def folder_with(tmp_path):
    """Return a function that writes settings, one keyword a file, and reads the limit."""

    def write(**files):
        for name, content in files.items():
            text = content if isinstance(content, str) else json.dumps(content)
            (tmp_path / f"{name}.json").write_text(text, encoding="utf-8")
        return declared_limits(tmp_path)

    return write


def test_nothing_declared_gives_no_limit(folder_with):
    """A folder without settings, and no folder at all, have no limit and nothing to say."""
    assert folder_with() == declared_limits(None) == PositionLimit(None, (), ())


@pytest.mark.parametrize(
    ("family", "rows", "padding", "usable"),
    [
        ("roberta", 514, 1, 512),  # modelling code: "Position numbers begin at padding_idx+1"
        ("xlm-roberta", 514, 1, 512),
        ("xlm_roberta", 514, 1, 512),
        ("camembert", 514, 3, 510),
        ("longformer", 4098, 1, 4096),
        ("lilt", 514, None, 513),  # the library's default padding id of this family is 0
        ("roberta", 514, None, 512),  # ... and 1 of this one
        ("mpnet", 514, 3, 512),  # modelling code: `self.padding_idx = 1`, whatever the file says
        ("bart", 1024, 1, 1024),  # modelling code: `num_embeddings + self.offset`
        ("opt", 2048, 1, 2048),
        ("bert", 512, 0, 512),
        ("marian", 512, 58100, 512),
    ],
)
def test_rows_before_the_first_position_are_taken_off(folder_with, family, rows, padding, usable):
    """A table whose positions start after the padding id is shorter than its declared rows."""
    config = {"model_type": family, "max_position_embeddings": rows, "pad_token_id": padding}
    limit = folder_with(config=config)
    assert limit.value == usable
    assert (limit.declared[0].value, limit.declared[0].usable) == (rows, usable)
    assert "not known" not in limit.declared[0].note


@pytest.mark.parametrize(("manner", "taken"), [("absolute", 2), ("rotary", 0), ("relative_key", 0)])
def test_esm_subtracts_only_with_absolute_positions(folder_with, manner, taken):
    """The same family keeps its whole number when positions are rotary or relative."""
    config = {"model_type": "esm", "position_embedding_type": manner, "pad_token_id": 1}
    assert folder_with(config={**config, "max_position_embeddings": 1026}).value == 1026 - taken


@pytest.mark.parametrize(
    ("config", "reason"),
    [
        ({"model_type": "llama", "max_position_embeddings": 4096}, "rotary"),
        ({"model_type": "novel", "rope_scaling": {"factor": 2}, "n_positions": 4096}, "rotary"),
        ({"model_type": "novel", "rope_parameters": {"a": 1}, "n_ctx": 4096}, "rotary"),
        ({"model_type": "bert", "position_embedding_type": "alibi", "n_ctx": 4096}, "ALiBi"),
        ({"model_type": "bloom", "seq_length": 4096}, "ALiBi"),
        ({"model_type": "t5", "n_positions": 4096}, "buckets"),
        ({"model_type": "deberta-v2", "position_biased_input": False, "n_ctx": 4096}, "buckets"),
        ({"model_type": "m2m_100", "max_position_embeddings": 4096}, "sines"),
    ],
)
def test_a_number_that_no_table_holds_is_soft(folder_with, config, reason):
    """Declared and not enforced: it is used for want of another, and both notes say so."""
    limit = folder_with(config=config)
    assert limit.value == 4096
    assert limit.declared[0].note.startswith("soft: ")
    assert reason in limit.declared[0].note
    assert "enforces none of the declared limits" in limit.notes[-1]


def test_distances_in_a_learned_table_are_enforced(folder_with):
    """BERT with relative_key looks distances up in 2·n − 1 rows (modelling code): n is a bound."""
    config = {"model_type": "bert", "position_embedding_type": "relative_key"}
    limit = folder_with(config={**config, "max_position_embeddings": 512})
    assert (limit.value, limit.notes) == (512, ())
    assert "soft" not in limit.declared[0].note


def test_an_enforced_limit_counts_before_a_smaller_soft_one(folder_with):
    """The tokenizer's own cut binds; that it passes the model's declared number is noted."""
    limit = folder_with(
        config={"model_type": "qwen2", "max_position_embeddings": 32768},
        tokenizer_config={"model_max_length": 131072},
    )
    assert limit.value == 131072
    assert "allows 32768 positions" in limit.notes[0]
    assert "does not enforce" in limit.notes[0]


def test_the_tokenizer_is_compared_with_what_the_model_enforces(folder_with):
    """Where a model declares soft and enforced numbers, the enforced one is the one to meet."""
    limit = folder_with(
        config={
            "text_config": {"model_type": "llama", "max_position_embeddings": 64},
            "decoder": {"model_type": "gpt2", "n_positions": 256},
        },
        tokenizer_config={"model_max_length": 128},
    )
    assert limit.value == 128
    assert "config.json (decoder.n_positions) allows 256: text is cut earlier" in limit.notes[1]


def test_an_unknown_family_is_taken_as_it_is(folder_with):
    """A family that is not known counts as enforced, and its note names it."""
    limit = folder_with(config={"model_type": "buoyformer", "n_positions": 300, "pad_token_id": 1})
    note = "family not known (buoyformer): taken as is"
    assert limit.declared == (DeclaredLimit("config.json", "n_positions", 300, 300, note),)
    assert (limit.value, limit.notes) == (300, ())


@pytest.mark.parametrize(
    ("name", "usable"),
    [
        ("XLMRobertaForMaskedLM", 512),
        ("RobertaPreLayerNormForCausalLM", 512),
        ("BertModel", 514),
        ("GPT2LMHeadModel", 514),
        ("XLMWithLMHeadModel", 514),
    ],
)
def test_the_class_of_the_model_stands_in_for_its_family(folder_with, name, usable):
    """Without `model_type` the family is read from `architectures`."""
    limit = folder_with(config={"architectures": [name], "max_position_embeddings": 514})
    assert limit.value == usable
    assert "not known" not in limit.declared[0].note


@pytest.mark.parametrize(
    "key",
    [
        "max_position_embeddings", "n_positions", "n_ctx", "max_seq_len", "seq_length",
        "context_length", "max_sequence_length", "max_encoder_position_embeddings",
    ],
)  # fmt: skip
def test_every_key_of_the_field_is_read(folder_with, key):
    """Each name under which a number of positions is declared is listed under that name."""
    limit = folder_with(config={"model_type": "bert", key: 77})
    assert [(own.key, own.usable) for own in limit.declared] == [(key, 77)]


@pytest.mark.parametrize(
    "key",
    ["max_length", "sliding_window", "attention_window", "block_size", "max_relative_positions"],
)
def test_numbers_that_bound_something_else_are_not_limits(folder_with, key):
    """Bounds of generation, attention and distances never become a position limit."""
    assert folder_with(config={"model_type": "bert", key: 20}) == PositionLimit(None, (), ())


def test_nested_settings_are_listed_by_dotted_key(folder_with):
    """Each part has its own family; a part that names none takes the whole's, its padding too."""
    limit = folder_with(
        config={
            "model_type": "roberta", "pad_token_id": 3,
            "encoder": {"max_position_embeddings": 514},
            "decoder": {"model_type": "gpt2", "n_positions": 1024},
            "text_config": {"model_type": "mistral", "max_position_embeddings": 64},
        }
    )  # fmt: skip
    found = {own.key: own.usable for own in limit.declared}
    assert found == {
        "encoder.max_position_embeddings": 510,
        "decoder.n_positions": 1024,
        "text_config.max_position_embeddings": 64,
    }
    assert limit.value == 510
    assert "several numbers" in limit.notes[0]


def test_the_sentence_encoder_cuts_earlier_than_both(folder_with):
    """Three files, three numbers: all are listed, the smallest one binds."""
    limit = folder_with(
        config={"model_type": "mpnet", "max_position_embeddings": 514},
        tokenizer_config={"model_max_length": 512},
        sentence_bert_config={"max_seq_length": 384, "do_lower_case": False},
    )
    assert [own.usable for own in limit.declared] == [512, 512, 384]
    assert limit.value == 384
    assert "cut earlier than the model needs" in limit.notes[0]
    assert limit.notes[1].endswith("the shorter cut is counted")


def test_a_tokenizer_that_cuts_too_late_is_noted(folder_with):
    """The model holds fewer positions than the tokenizer lets pass: such text fails."""
    limit = folder_with(
        config={"model_type": "bert", "max_position_embeddings": 128},
        tokenizer_config={"model_max_length": 512},
    )
    assert limit.value == 128
    assert " ".join(limit.notes) == (
        "config.json (max_position_embeddings) allows 128 positions, tokenizer_config.json "
        "(model_max_length) says 512: a text between the two is not cut in time and fails in "
        "the model"
    )


@pytest.mark.parametrize("number", ["1000000000000000019884624838656", "1e30", "Infinity"])
def test_the_stand_in_for_no_limit_is_not_a_limit(folder_with, number):
    """1e20 and more means "not set", in each spelling that Python writes."""
    limit = folder_with(tokenizer_config=f'{{"model_max_length": {number}}}')
    assert (limit.value, limit.declared) == (None, ())
    assert '"not set"' in limit.notes[0]


def test_stored_truncation_is_listed_and_does_not_bind(folder_with):
    """A truncation left in tokenizer.json says how someone once encoded, not what fits."""
    limit = folder_with(
        config={"model_type": "bert", "max_position_embeddings": 512},
        tokenizer={"truncation": {"max_length": 64, "stride": 0}},
    )
    assert limit.value == 512
    own = limit.declared[1]
    assert (own.file, own.key, own.value) == ("tokenizer.json", "truncation.max_length", 64)
    assert own.usable is None
    assert limit.notes == ()


@pytest.mark.parametrize("number", ["true", "-1", "0", '"512"', "12.5", "[512]", "NaN", "1e19"])
def test_a_number_that_is_none_is_noted_with_its_place(folder_with, number):
    """Wrong types and impossible numbers are passed over, with file and key."""
    limit = folder_with(config=f'{{"model_type": "bert", "n_ctx": 9, "n_positions": {number}}}')
    assert limit.value == 9
    assert limit.notes[0].startswith("config.json: n_positions is ")
    assert limit.notes[0].endswith("passed over")


@pytest.mark.parametrize("content", ['{"n_positions": 5', "", "[" * 100_000, "[1]", "\x00"])
def test_a_damaged_file_is_a_note_and_the_others_count(folder_with, content):
    """One file that cannot be read hides nothing that the next one says."""
    limit = folder_with(config=content, tokenizer_config={"model_max_length": 40})
    assert limit.value == 40
    assert limit.notes[0].startswith("config.json ")
    assert limit.notes[0].endswith("what it declares is not known")


def test_a_byte_order_mark_is_passed_over(folder_with):
    """A BOM before the settings, or before the vocabulary itself, changes nothing."""
    limit = folder_with(
        config='\ufeff{"model_type": "bert", "n_positions": 5}',
        tokenizer='\ufeff{"truncation": {"max_length": 4}}',
    )
    assert (limit.value, limit.notes) == (5, ())
    assert [own.value for own in limit.declared] == [5, 4]


def test_a_table_without_a_usable_row_declares_nothing(folder_with):
    """A number that its padding uses up is listed, and binds nothing."""
    limit = folder_with(config={"model_type": "roberta", "n_positions": 2, "pad_token_id": 1})
    assert (limit.value, limit.declared[0].usable) == (None, None)
    assert limit.declared[0].note.endswith("this leaves no position")


def test_floats_without_a_fraction_are_numbers(folder_with):
    """512.0 is 512, as an integer."""
    declared = folder_with(tokenizer_config={"model_max_length": 512.0}).declared
    assert [type(own.value) for own in declared] == [int]


DECLARED = PositionLimit(
    512, (DeclaredLimit("tokenizer_config.json", "model_max_length", 512, 512, ""),), ()
)


@pytest.mark.parametrize(("given", "how"), [(1024, "exceeds"), (128, "is below")])
def test_the_option_wins_and_says_over_what(given, how):
    """--limit replaces the value, keeps the declarations and adds a note."""
    limit = with_override(DECLARED, given, 2)
    assert (limit.value, limit.declared) == (given, DECLARED.declared)
    assert limit.notes == (f"--limit {given} is used and {how} the declared 512",)


def test_the_option_alone_is_a_limit():
    """Where nothing is declared, --limit is the limit."""
    assert with_override(PositionLimit(None, (), ()), 3, 2).value == 3


@pytest.mark.parametrize("given", [None, 512])
def test_no_option_or_the_same_number_changes_nothing(given):
    """The limit stays as declared."""
    assert with_override(DECLARED, given, 2) is DECLARED


@pytest.mark.parametrize("given", [2, 1, 0, -5])
def test_an_option_without_room_is_refused(given):
    """A limit that the template alone fills is an error at the option, with the remedy."""
    with pytest.raises(SettingsError, match="leaves no room") as refusal:
        with_override(DECLARED, given, 2)
    assert refusal.value.where == "--limit"
    assert "above 2" in refusal.value.hint


def test_a_declared_limit_without_room_is_refused_at_its_place():
    """The same for a declared number: the error names its file and key."""
    with pytest.raises(SettingsError) as refusal:
        with_override(DECLARED, None, 512)
    assert refusal.value.where == "tokenizer_config.json: model_max_length"
