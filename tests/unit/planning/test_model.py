"""The shape of a model, written out or read from its configuration."""

from __future__ import annotations

import json

import pytest

from auditor.errors import SettingsError
from auditor.planning.model import parse_model

ENCODER = {
    "model_type": "bert", "architectures": ["BertForMaskedLM"], "num_hidden_layers": 12,
    "hidden_size": 768, "num_attention_heads": 12, "intermediate_size": 3072,
    "max_position_embeddings": 512, "vocab_size": 30522,
}  # fmt: skip
DECODER = {
    "model_type": "gpt2", "architectures": ["GPT2LMHeadModel"], "n_layer": 12, "n_embd": 768,
    "n_head": 12, "n_inner": None, "n_positions": 1024, "vocab_size": 50257,
}  # fmt: skip
GATED = {
    "model_type": "mistral", "architectures": ["MistralForCausalLM"], "num_hidden_layers": 32,
    "hidden_size": 4096, "num_attention_heads": 32, "num_key_value_heads": 8, "head_dim": 128,
    "intermediate_size": 14336, "vocab_size": 32000,
}  # fmt: skip


def read(folder, config):
    (folder / "config.json").write_text(json.dumps(config), encoding="utf-8")
    return parse_model(str(folder))


def test_written_out():
    """The four that are needed; a head's width and its own keys follow."""
    found = parse_model("layers=12, width=768, heads=12, inner=3072, causal=yes")
    assert (found.head_width, found.key_value_heads) == (64, 12)
    assert (found.causal, found.gated, found.entries) == (True, False, None)


def test_an_encoders_configuration(tmp_path):
    """The folder is enough."""
    found = read(tmp_path, ENCODER)
    assert (found.layers, found.width, found.inner, found.head_width) == (12, 768, 3072, 64)
    assert (found.causal, found.gated) == (False, False)
    assert (found.positions, found.entries) == (512, 30522)


def test_a_decoders_configuration(tmp_path):
    """Other names; no inner width there means four times the width."""
    found = read(tmp_path, DECODER)
    assert (found.inner, found.causal, found.positions) == (3072, True, 1024)


def test_a_nested_and_gated_configuration(tmp_path):
    """Sizes under text_config; three matrices in the feed-forward, eight keys for 32 heads."""
    found = read(tmp_path, {"text_config": GATED})
    assert (found.gated, found.causal, found.key_value_heads) == (True, True, 8)
    assert (found.head_width, found.inner) == (128, 14336)


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("layers=12,width=768", "lacks heads, inner"),
        ("layers=12,width=768,heads=12,inner=many", "inner needs a whole number"),
        ("layers=12,width=768,heads=12,inner=3072,causal=perhaps", "yes or no"),
        ("layers=12,width=768,heads=12,inner=3072,depth=3", "'depth' is no part"),
        ("layers=12,layers=13,width=768,heads=12,inner=3072", "given twice"),
        ("layers=12,width=768,heads=7,inner=3072", "7 heads do not divide"),
        ("layers=0,width=768,heads=12,inner=3072", "from 1 on"),
        ("nowhere/config.json", "no such file"),
    ],
)
def test_what_is_no_shape_is_refused_with_the_remedy(text, told):
    """The message names the part; the hint shows how to write it."""
    with pytest.raises(SettingsError, match=told) as refused:
        parse_model(text)
    assert "=" in (refused.value.hint or "") or "Parts:" in (refused.value.hint or "")


@pytest.mark.parametrize("content", ["[]", "{", '{"hidden_size": "wide"}'])
def test_a_configuration_that_does_not_tell_is_refused(tmp_path, content):
    """The place and the way out are named."""
    (tmp_path / "config.json").write_text(content, encoding="utf-8")
    with pytest.raises(SettingsError) as refused:
        parse_model(str(tmp_path / "config.json"))
    assert "config.json" in (refused.value.where or "")
    assert "--model layers=12" in (refused.value.hint or "")
