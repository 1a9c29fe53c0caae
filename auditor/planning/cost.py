"""What a length costs a transformer: operations, memory and parameters.

A multiplication and an addition count as two operations, as in Kaplan et al. 2020 (arXiv
2001.08361, section 2.1). Counted are the products of matrices; look-ups, norms, softmax and biases
are not, nor is the output matrix over the vocabulary. All results are exact integers.
"""

from __future__ import annotations

from auditor.errors import SettingsError
from auditor.planning.model import ModelShape

BYTES = {"float32": 4, "float16": 2, "bfloat16": 2}


def forward_flops(shape: ModelShape, length: int) -> int:
    """Return the operations of one forward pass over a sequence of ``length`` positions.

    Every position pays for the matrices of each layer; every pair of positions for a score and for
    the value that it weighs (Vaswani et al. 2017, Table 1: O(n²·d)). Bidirectional attention has n²
    pairs, causal attention n(n + 1)/2.
    """
    return length * shape.layers * 2 * _matrix_weights(shape) + attention_flops(shape, length)


def attention_flops(shape: ModelShape, length: int) -> int:
    """Return the part of ``forward_flops`` that pairs of positions take."""
    pairs = length * (length + 1) // 2 if shape.causal else length * length
    return shape.layers * 4 * pairs * shape.heads * shape.head_width


def _matrix_weights(shape: ModelShape) -> int:
    """Return the weights of one layer's matrices: queries, keys, values, output, feed-forward."""
    inner = shape.width * shape.heads * shape.head_width
    shared = shape.width * shape.key_value_heads * shape.head_width
    return 2 * inner + 2 * shared + (3 if shape.gated else 2) * shape.width * shape.inner


def attention_share(shape: ModelShape, length: int) -> float:
    """Return the share of ``forward_flops`` that pairs of positions take."""
    return attention_flops(shape, length) / forward_flops(shape, length)


def training_flops(forward: int) -> int:
    """Return the operations of training on what takes ``forward`` operations forward.

    The backward pass takes twice the forward pass (Kaplan et al. 2020, section 2.1).
    """
    return 3 * forward


def score_bytes(shape: ModelShape, length: int, batch: int, precision: str) -> int:
    """Return the bytes of one layer's attention scores, where they are held at all."""
    return batch * shape.heads * length * length * _bytes(precision)


def activation_bytes(shape: ModelShape, length: int, batch: int, precision: str) -> int | None:
    """Return the bytes of activations that training keeps for the backward pass, all layers.

    Korthikanti et al. 2022 (arXiv 2205.05198), equation 2: s·b·h·(34 + 5·a·s/h) a layer, for two
    bytes a value, a feed-forward width of 4h, heads that share the width, nothing computed twice.
    ``None`` where the model or the precision is another.
    """
    usual = shape.inner == 4 * shape.width and shape.heads * shape.head_width == shape.width
    if not usual or shape.gated or shape.key_value_heads != shape.heads or _bytes(precision) != 2:
        return None
    kept = 34 * length * batch * shape.width + 5 * batch * shape.heads * length * length
    return shape.layers * kept


def position_parameters(shape: ModelShape, length: int) -> int:
    """Return the parameters of a table of ``length`` positions (common practice, no source)."""
    return length * shape.width


def embedding_parameters(shape: ModelShape) -> int | None:
    """Return the parameters of the embedding, entries × width; ``None`` without the entries."""
    return None if shape.entries is None else shape.entries * shape.width


def layer_parameters(shape: ModelShape) -> int:
    """Return the parameters of one layer: matrices, a bias for each, and two norms.

    12H² + 13H for an inner width of 4H (Devlin et al. 2019). Gated layers and those that share keys
    have no biases in common practice, which are counted here all the same.
    """
    attention = (shape.heads + 2 * shape.key_value_heads) * shape.head_width + shape.width
    forward = (2 if shape.gated else 1) * shape.inner + shape.width
    return _matrix_weights(shape) + attention + forward + 4 * shape.width


def _bytes(precision: str) -> int:
    if precision not in BYTES:
        raise SettingsError(
            f"{precision} is no precision known here.", hint=f"Known: {', '.join(BYTES)}."
        )
    return BYTES[precision]
