"""The shape of a transformer: written as text, or read from a `config.json`."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import orjson

from auditor.errors import SettingsError

EXAMPLE = "layers=12,width=768,heads=12,inner=3072"
_NEEDED = ("layers", "width", "heads", "inner")
_COUNTS = (*_NEEDED, "head_width", "key_value_heads", "positions", "entries")
_SWITCHES = ("gated", "causal")
_WORDS = {"yes": True, "no": False}

# Names that configurations use for one thing, the usual one first.
_KEYS = {
    "layers": ("num_hidden_layers", "n_layer", "num_layers", "n_layers"),
    "width": ("hidden_size", "n_embd", "d_model", "dim"),
    "heads": ("num_attention_heads", "n_head", "n_heads", "num_heads"),
    "inner": ("intermediate_size", "n_inner", "ffn_dim", "d_ff", "hidden_dim"),
    "head_width": ("head_dim", "d_kv"),
    "key_value_heads": ("num_key_value_heads",),
    "positions": ("max_position_embeddings", "n_positions", "n_ctx"),
    "entries": ("vocab_size",),
}
# Families whose feed-forward has a third matrix that gates (Shazeer 2020, arXiv 2002.05202).
_GATED = frozenset(
    {
        "llama", "mistral", "mixtral", "qwen2", "qwen3", "gemma", "gemma2", "gemma3", "gemma3_text",
        "phi3", "olmo", "olmo2", "cohere", "granite", "internlm2", "yi", "stablelm", "modernbert",
    }
)  # fmt: skip
_CAUSAL = ("ForCausalLM", "LMHeadModel")


@dataclass(frozen=True)
class ModelShape:
    """The sizes that costs follow from.

    ``inner`` is the width of the feed-forward layer, ``gated`` says that it has three matrices.
    ``key_value_heads`` is smaller than ``heads`` where heads share keys and values. ``positions``
    and ``entries`` are the rows of the two tables, where known.
    """

    layers: int
    width: int
    heads: int
    inner: int
    head_width: int
    key_value_heads: int
    gated: bool = False
    causal: bool = False
    positions: int | None = None
    entries: int | None = None

    @classmethod
    def of(cls, held: Mapping[str, Any], where: str) -> ModelShape:
        """Return the shape of the values ``held``; SettingsError when they do not make one."""
        missing = [name for name in _NEEDED if held.get(name) is None]
        if missing:
            raise _refused(f"the model lacks {', '.join(missing)}.", where)
        for name in _COUNTS:
            number = held.get(name)
            if number is not None and (type(number) is not int or number < 1):
                raise _refused(f"{name} must be a whole number from 1 on, not {number}.", where)
        if held.get("head_width") is None and held["width"] % held["heads"]:
            told = f"{held['heads']} heads do not divide a width of {held['width']}."
            raise _refused(told, where, "Give the width of a head: head_width=N.")
        usual = {
            "head_width": held["width"] // held["heads"], "key_value_heads": held["heads"]
        }  # fmt: skip
        given = {name: value for name, value in held.items() if value is not None}
        return cls(**{**usual, **given})


def parse_model(text: str) -> ModelShape:
    """Return the shape that ``text`` writes out, or that the `config.json` it names holds.

    Raises SettingsError, with what is wrong and how to write it, for anything else.
    """
    path = Path(text)
    if path.is_dir():
        path = path / "config.json"
    if path.is_file():
        return _from_file(path)
    if "=" not in text:
        raise _refused("there is no such file, and it is no shape of a model.", text)
    return ModelShape.of(_written(text), text)


def _written(text: str) -> dict[str, Any]:
    held: dict[str, Any] = {}
    for part in text.split(","):
        name, _, value = (side.strip() for side in part.partition("="))
        if name in held:
            raise _refused(f"{name} is given twice.", text)
        if name in _COUNTS and value.isdigit():
            held[name] = int(value)
        elif name in _SWITCHES and value in _WORDS:
            held[name] = _WORDS[value]
        elif name in _COUNTS or name in _SWITCHES:
            needs = "a whole number" if name in _COUNTS else "yes or no"
            raise _refused(f"{name} needs {needs}, not {value!r}.", text)
        else:
            known = ", ".join((*_COUNTS, *_SWITCHES))
            raise _refused(f"{name!r} is no part of a shape.", text, f"Parts: {known}.")
    return held


def _from_file(path: Path) -> ModelShape:
    try:
        config = orjson.loads(path.read_bytes())
    except (orjson.JSONDecodeError, OSError) as fault:
        raise _refused(f"the file cannot be read ({fault}).", str(path)) from None
    if not isinstance(config, dict):
        raise _refused("the file holds no JSON object.", str(path))
    nested = config.get("text_config")
    own = {**config, **nested} if isinstance(nested, dict) else config
    held: dict[str, Any] = {name: _first(own, keys) for name, keys in _KEYS.items()}
    if held["inner"] is None and own.get("model_type") == "gpt2" and held["width"]:
        held["inner"] = 4 * held["width"]  # what a null n_inner means there
    held["gated"] = own.get("model_type") in _GATED or str(
        own.get("feed_forward_proj", "")
    ).startswith("gated")
    named = own.get("architectures") or []
    held["causal"] = bool(own.get("is_decoder")) or any(
        n.endswith(_CAUSAL) for n in map(str, named)
    )
    return ModelShape.of(held, str(path))


def _first(config: Mapping[str, Any], keys: tuple[str, ...]) -> Any:  # noqa: ANN401 - JSON
    return next((config[key] for key in keys if config.get(key) is not None), None)


def _refused(message: str, where: str, hint: str | None = None) -> SettingsError:
    return SettingsError(message, hint=hint or f"Write it as --model {EXAMPLE}.", where=where)
