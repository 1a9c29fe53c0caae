"""How families of models number positions: what their declared number leaves, and who enforces it.

Read in the modelling code of the library `transformers` 4.57.1 (`models/*/modeling_*.py`), where a
family is named by `model_type`. Families marked "from memory" publish their code elsewhere.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from collections.abc import Mapping

_HEAD = re.compile(r"(?:For[A-Z]|WithLMHead|LMHead|DoubleHeads|EncoderModel|PreTrain|Model|$)")


@dataclass(frozen=True, slots=True)
class Positions:
    """What a number of positions means: rows taken from it, whether it binds, and why."""

    taken: int
    enforced: bool
    note: str


def _plain(name: str) -> str:
    return re.sub(r"[^a-z0-9]", "", name.lower())


def _families(names: str) -> frozenset[str]:
    return frozenset(map(_plain, names.split()))


# A learned table whose first position is the padding id + 1 (`create_position_ids_from_input_ids`):
# the rows up to it are never used, an index beyond the table fails.
AFTER_PADDING = _families(
    "altclip_text_model bridgetower_text_model camembert clap_text_model data2vec-text ernie_m esm "
    "ibert layoutlmv3 lilt longformer luke markuplm mpnet roberta roberta-prelayernorm xlm-roberta "
    "xlm-roberta-xl xmod"
)
# The module adds two rows to the declared number before it shifts positions by two.
WITH_OWN_ROWS = _families("bart biogpt mbart mra mvp nystromformer opt plbart yoso")
# A table of exactly the declared number of rows, be it learned or filled once with sines, rotations
# or distances (marian, gptj, mpt): an index beyond it fails although a formula could go on.
PLAIN_TABLE = _families(
    "albert align_text_model bert bert-generation big_bird bigbird_pegasus blenderbot "
    "blenderbot-small blip_text_model chinese_clip_text_model clip clip_text_model codegen "
    "convbert ctrl deberta deberta-v2 distilbert electra ernie flaubert fnet gpt2 gpt_bigcode "
    "gpt_neo gptj layoutlm layoutlmv2 led marian megatron-bert mobilebert mpt openai-gpt "
    "pegasus rembert roc_bert roformer siglip_text_model splinter squeezebert tapas visual_bert "
    "xlm"
)
# Nothing in the module is as long as the declared number; beyond it quality is not promised.
ROTARY = _families(
    "apertus arcee aria_text bamba bitnet cohere cohere2 dbrx deepseek_v2 deepseek_v3 "
    "diffllama doge dots1 emu3_text_model ernie4_5 ernie4_5_moe exaone4 falcon_h1 flex_olmo gemma "
    "gemma2 gemma3 gemma3_text gemma3n gemma3n_text glm glm4 glm4_moe glm4v_text gpt_neox "
    "gpt_neox_japanese gpt_oss granite granitemoe granitemoehybrid granitemoeshared helium "
    "hunyuan_v1_dense hunyuan_v1_moe idefics jetmoe lfm2 llama llama4_text minimax ministral "
    "mistral mixtral mllama_text_model modernbert modernbert-decoder nemotron olmo olmo2 olmo3 "
    "olmoe persimmon phi phi3 phimoe qwen2 qwen2_moe qwen2_vl qwen2_vl_text qwen2_5_vl "
    "qwen2_5_vl_text qwen3 qwen3_moe qwen3_next qwen3_vl_text qwen3_vl_moe_text recurrent_gemma "
    "seed_oss smollm3 stablelm starcoder2 t5_gemma_module vaultgemma zamba2 "
    "chatglm internlm internlm2 nomic_bert qwen"  # this line from memory
)
SOFT = {
    "rotary positions": ROTARY,
    "attention biased by distance (ALiBi)": _families("bloom falcon"),
    "relative positions in buckets": _families(
        "longt5 mt5 pix2struct pop2piano switch_transformers t5 transfo-xl udop umt5 xlnet"
    ),
    "sines computed to any length": _families(
        "fsmt m2m_100 nllb-moe pegasus_x seamless_m4t seamless_m4t_v2 xglm"
    ),
}
# The library leaves a default out of the file; 1 is the default of all others.
_OTHER_DEFAULT_PADDING = {"lilt": 0, "markuplm": 0}
# Their modules count from 1 whatever the file says.
_FIXED_PADDING = {"erniem": 1, "mpnet": 1}


def positions_of(section: Mapping[str, Any], whole: Mapping[str, Any]) -> Positions:
    """Return what the numbers of ``section`` mean; it is ``whole``, or an object inside it.

    What the section does not say (family, padding id) is taken from the whole configuration.
    """
    soft = _soft_by_settings(section)
    if soft is not None:
        return Positions(0, enforced=False, note=_soft_note(soft))
    family = _family(section) or _family(whole)
    if str(section.get("position_embedding_type", "")).startswith("relative_key"):
        return Positions(0, enforced=True, note="a learned table of distances of this reach")
    for manner, families in SOFT.items():
        if family in families:
            return Positions(0, enforced=False, note=_soft_note(manner))
    return _table(family, section, whole)


def _table(family: str, section: Mapping[str, Any], whole: Mapping[str, Any]) -> Positions:
    if family in AFTER_PADDING:
        padding, origin = _padding(family, section, whole)
        note = f"positions start after the padding id {padding}{origin}: {padding + 1} rows unused"
        return Positions(padding + 1, enforced=True, note=note)
    if family in WITH_OWN_ROWS:
        return Positions(0, enforced=True, note="a table with two more rows of its own")
    if family in PLAIN_TABLE:
        return Positions(0, enforced=True, note="a table of this many rows")
    what = f"family not known ({family})" if family else "family not named"
    return Positions(0, enforced=True, note=f"{what}: taken as is")


def _padding(family: str, section: Mapping[str, Any], whole: Mapping[str, Any]) -> tuple[int, str]:
    if family in _FIXED_PADDING:
        return _FIXED_PADDING[family], " (fixed in the module)"
    for settings in (section, whole):
        given = settings.get("pad_token_id")
        if isinstance(given, int) and not isinstance(given, bool) and given >= 0:
            return given, ""
    return _OTHER_DEFAULT_PADDING.get(family, 1), " (the family's default, the file names none)"


def _soft_by_settings(section: Mapping[str, Any]) -> str | None:
    """Return the manner that the settings name themselves, whatever the family."""
    manner = str(section.get("position_embedding_type", "")).lower()
    if section.get("alibi") is True or manner == "alibi":
        return "attention biased by distance (ALiBi)"
    rotary = any(section.get(key) for key in ("rope_scaling", "rope_parameters", "rope_theta"))
    if rotary or manner in {"rotary", "rope"}:
        return "rotary positions"
    unbiased = section.get("position_biased_input") is False
    return "relative positions in buckets" if unbiased else None


def _soft_note(manner: str) -> str:
    return f"soft: {manner}, the number is declared and not enforced by the model"


def _family(settings: Mapping[str, Any]) -> str:
    """Return the family in plain letters, ``""`` when none is named."""
    named = settings.get("model_type")
    if isinstance(named, str) and named:
        return _plain(named)
    classes = settings.get("architectures")
    if not isinstance(classes, list) or not classes or not isinstance(classes[0], str):
        return ""
    head = _HEAD.search(classes[0])
    return _plain(classes[0][: head.start()] if head else classes[0])
