"""Operations, memory and parameters against published models and by hand."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.errors import SettingsError
from auditor.planning import cost
from auditor.planning.histogram import LengthHistogram
from auditor.planning.model import ModelShape, parse_model
from auditor.planning.plan import Known, Wishes, weigh


def shape(layers, width, heads, **more):
    """Return a shape with the usual inner width of four times the width."""
    held = {"layers": layers, "width": width, "heads": heads, "inner": 4 * width}
    return ModelShape.of({**held, **more}, "test")


BASE = shape(12, 768, 12, entries=30522, positions=512)


def bert_parameters(layers, width, entries):
    """Layers, three embeddings with a norm, and the pooler: Devlin et al. 2019, section 3."""
    own = shape(layers, width, width // 64, entries=entries)
    types, norm, pooler = 2 * width, 2 * width, width * width + width
    tables = cost.embedding_parameters(own) + cost.position_parameters(own, 512)
    return layers * cost.layer_parameters(own) + tables + types + norm + pooler


def test_a_layer_has_the_published_parameters():
    """12H² + 13H = 7,087,872 at 768 (BERT base; Devlin et al. 2019, transcribed)."""
    assert cost.layer_parameters(BASE) == 12 * 768**2 + 13 * 768 == 7087872


@pytest.mark.parametrize(
    ("layers", "width", "entries", "parameters"),
    [
        (12, 768, 30522, 109482240),
        (24, 1024, 30522, 335141888),
        (12, 768, 28996, 108310272),
        (24, 1024, 28996, 333579264),
        (12, 768, 119547, 177853440),
    ],
)
def test_whole_models_have_the_published_parameters(layers, width, entries, parameters):
    """BERT base and large, uncased, cased and multilingual (counts of the released models)."""
    assert bert_parameters(layers, width, entries) == parameters


MINIATURES = {
    2: (4.4, 9.7, 22.8, 39.2), 4: (4.8, 11.3, 29.1, 53.4), 6: (5.2, 12.8, 35.4, 67.5),
    8: (5.6, 14.4, 41.7, 81.7), 10: (6.0, 16.0, 48.0, 95.9), 12: (6.4, 17.6, 54.3, 110.1),
}  # fmt: skip


@pytest.mark.parametrize("layers", MINIATURES)
def test_miniatures_have_the_published_parameters(layers):
    """Turc et al. 2019 (arXiv 1908.08962), Table 1, in millions; the table is from memory.

    With the head that predicts masked words: a matrix, a norm, and a bias for each entry.
    """
    for width, millions in zip((128, 256, 512, 768), MINIATURES[layers], strict=True):
        head = width * width + width + 2 * width + 30522
        assert abs(bert_parameters(layers, width, 30522) + head - millions * 1e6) <= 1e5


@pytest.mark.parametrize(
    ("layers", "width", "parameters"),
    [(12, 768, 124439808), (24, 1024, 354823168), (36, 1280, 774030080), (48, 1600, 1557611200)],
)
def test_causal_models_have_the_published_parameters(layers, width, parameters):
    """GPT-2: tables of 50,257 entries and 1,024 positions, layers, a last norm (released sizes)."""
    own = shape(layers, width, width // 64, entries=50257)
    tables = cost.embedding_parameters(own) + cost.position_parameters(own, 1024)
    assert tables + layers * cost.layer_parameters(own) + 2 * width == parameters


@pytest.mark.parametrize(
    ("length", "published"), [(1024, 188743680), (512, 179306496), (128, 172228608)]
)
def test_operations_follow_the_published_rule(length, published):
    """Kaplan et al. 2020, equation 2.2: 2N + 2·layers·length·width a token, at 12 and 768.

    They count half of all pairs; here the pairs of causal attention are counted exactly, which is
    half of them and half a token more.
    """
    ours = cost.forward_flops(shape(12, 768, 12, causal=True), length)
    assert published == 2 * 84934656 + 2 * 12 * length * 768
    assert ours == length * published + 2 * 12 * length * 768


def test_bidirectional_attention_takes_half_where_length_is_six_widths():
    """Its share is n / (6d + n): half at 4,608 for a width of 768 (from the two formulas)."""
    assert cost.attention_share(BASE, 6 * 768) == 0.5
    assert cost.attention_share(BASE, 512) == pytest.approx(512 / (6 * 768 + 512), rel=1e-15)


@given(st.integers(1, 4096))
def test_twice_the_length_is_four_times_the_attention(length):
    """O(n²·d) and O(n·d²): Vaswani et al. 2017, Table 1."""
    rest = lambda n: cost.forward_flops(BASE, n) - cost.attention_flops(BASE, n)  # noqa: E731
    assert cost.attention_flops(BASE, 2 * length) == 4 * cost.attention_flops(BASE, length)
    assert rest(2 * length) == 2 * rest(length)


def test_three_heads_of_full_width():
    """Width 2, three heads of width 2: nine 2 × 2 matrices and a 2 × 6 one (common practice, no
    source), beside a feed-forward of two 2 × 8 matrices."""
    own = parse_model("layers=1,width=2,heads=3,head_width=2,inner=8")
    attention = 9 * 2 * 2 + 2 * 6
    assert cost.forward_flops(own, 1) == 2 * (attention + 2 * 2 * 8) + 4 * 3 * 2


def test_heads_that_share_keys_have_smaller_matrices():
    """Four heads, one key and value: two full matrices and two of a quarter, by hand."""
    own = shape(1, 8, 4, key_value_heads=1, gated=True)
    matrices = 2 * 8 * 8 + 2 * 8 * 2 + 3 * 8 * 32
    assert cost.forward_flops(own, 1) == 2 * matrices + 4 * 8


def test_memory_of_scores_and_activations():
    """s·b·h·(34 + 5·a·s/h) a layer (Korthikanti et al. 2022, equation 2)."""
    s, b, h, a = 512, 8, 768, 12
    assert cost.activation_bytes(BASE, s, b, "float16") == 12 * s * b * h * (34 + 5 * a * s / h)
    assert cost.score_bytes(BASE, s, b, "float32") == b * a * s * s * 4
    assert cost.activation_bytes(BASE, s, b, "float32") is None
    with pytest.raises(SettingsError, match="no precision"):
        cost.score_bytes(BASE, s, b, "float8")


@pytest.mark.parametrize(("batch", "length"), [(64, 64), (32, 128), (16, 256), (12, 384), (6, 512)])
def test_the_largest_published_batches_need_alike_memory(batch, length):
    """BERT base on one card of 12 GB: 64 at 64 … 6 at 512 (README of google-research/bert).

    Memory grows faster than length: the batch at 512 holds fewer positions than the one at 64.
    """
    held = cost.activation_bytes(BASE, length, batch, "float16")
    most = cost.activation_bytes(BASE, 384, 12, "float16")
    assert 0.5 * most < held <= most


def test_a_plan_prices_documents_and_kept_tokens():
    """Three notes of 10, 20 and 50 positions, two the template's, cut at 20: by hand."""
    held = LengthHistogram.of([(10, 1), (20, 1), (50, 1)])
    own = parse_model("layers=1,width=2,heads=1,inner=8")
    wishes = Wishes(lengths=(20,), model=own)
    [found] = weigh(Known({"all": held}, 2, None), wishes, {20: ["asked for"]})
    one = 20 * 2 * (4 * 2 * 2 + 2 * 2 * 8) + 4 * 20 * 20 * 2
    fixed = found["cost"]["model"]["fixed"]
    assert fixed["forward_flops"] == 3 * one
    assert fixed["forward_flops_per_document"] == one
    assert fixed["training_flops_per_kept_token"] == 3 * 3 * one / (8 + 18 + 18)
    assert found["cost"]["model"]["packed"]["forward_flops"] == 3 * one
