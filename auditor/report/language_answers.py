"""The plain sentences of a comparison of languages; terminal and page say the same words."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from auditor.report.formatting import clean, count, figure, plural, proportion

Json = Mapping[str, Any]

COST_IS_NOT_QUALITY = (
    "Token counts measure cost and room, not the quality of a model in a language; deciding who is"
    " served worse needs people who speak it."
)
SAME_SCRIPT = "A swap between languages of one script cannot be seen by script."
NO_GUESSING = "No language is guessed: only scripts are compared with labels."
WEAKER = (
    "Without the same content in each language, cost by character, grapheme or byte is weaker"
    " evidence: scripts hold different amounts of content in a character."
)
_NAMED = 3
REMEDIES = {
    "longer limit": (
        "{language}: a limit of {length} keeps {share} of its tokens that are cut off now"
    ),
    "entries for characters": (
        "{language}: were its costliest byte-spelled characters ({entries}) entries, each one"
        " token, {share} of its tokens would be saved"
    ),
    "entries for words": (
        "{language}: were all its broken words entries, {share} of its tokens would be saved at"
        " most"
    ),
    "normalise first": "{language}: normalising to NFC first saves {share} of its tokens",
}


def answers(document: Json, vocabulary: Json) -> list[str]:
    """Return what there is to say of one vocabulary, most important first."""
    parts = (_costliest, _spread, _why, _remedies)
    told = [sentence for part in parts for sentence in part(vocabulary)]
    return [*told, *label_answers(document)]


def _costliest(vocabulary: Json) -> Iterator[str]:
    languages = vocabulary["languages"]
    if vocabulary["ranked_by"] == "premium":
        reference = clean(languages[0]["premium"]["reference"], 60)
        for language in languages[:_NAMED]:
            own = language["premium"]
            if own["ratio_of_totals"]["value"] is not None:
                yield (
                    f"{clean(language['language'], 60)} pays {figure(own['ratio_of_totals'])} ×"
                    f" the tokens of {reference} for the same content"
                    f" ({plural(own['pairs'], 'pair')})."
                )
        return
    for language in languages[:_NAMED]:
        own = language["figures"]["tokens_per_grapheme"]
        yield f"{clean(language['language'], 60)} pays {figure(own)} tokens a grapheme."
    yield WEAKER


def _spread(vocabulary: Json) -> Iterator[str]:
    found = vocabulary["spread"]
    if found is not None and found["ratio_of_totals"]["value"] is not None:
        highest, lowest = clean(found["highest"], 60), clean(found["lowest"], 60)
        yield (
            f"The costliest, {highest}, pays {figure(found['ratio_of_totals'])} × what the"
            f" cheapest, {lowest}, pays."
        )


def _why(vocabulary: Json) -> Iterator[str]:
    language = vocabulary["languages"][0]
    spent, tokens = language["cost"], language["counts"]["tokens"]
    if tokens:
        shares = {name: proportion(spent[name] / tokens) for name in spent}
        yield (
            f"Of the tokens of {clean(language['language'], 60)}, {shares['byte_spelled']} are"
            f" bytes of characters, {shares['broken_words']} other parts of broken words,"
            f" {shares['whole_words']} whole words, {shares['between_words']} between words."
        )


def _remedies(vocabulary: Json) -> Iterator[str]:
    for language in vocabulary["languages"][:_NAMED]:
        for remedy in language["remedies"]:
            yield f"{told(language['language'], remedy)}."


def told(language: str, remedy: Json) -> str:
    """Return a remedy in words, with the effect that was computed."""
    return REMEDIES[remedy["remedy"]].format(
        language=clean(language, 60),
        share=proportion(remedy["share"]),
        length=count(remedy.get("length")),
        entries=count(remedy.get("entries")),
    )


def label_answers(document: Json) -> list[str]:
    """Return what there is to say of labels."""
    found = document["labels"]
    sentences = []
    if found["contradicting"]:
        worst = sorted(found["rows"], key=lambda row: -sum(row["contradicting"].values()))
        named = ", ".join(
            f"{clean(row['label'], 60) or '(empty)'} {count(sum(row['contradicting'].values()))}"
            for row in worst[:_NAMED]
            if row["contradicting"]
        )
        sentences.append(
            f"The script of {plural(found['contradicting'], 'document')} contradicts the label:"
            f" {named}; all of them stand in doubtful_labels.jsonl."
        )
    else:
        sentences.append("No document's script contradicts its label.")
    if found["unknown"]:
        named = ", ".join(clean(label, 60) or "(empty)" for label in found["unknown"][:_NAMED])
        many = plural(len(found["unknown"]), "label names", "labels name")
        sentences.append(f"{many} no known language: {named}.")
    sentences += [
        f"{', '.join(clean(label, 60) for label in group)} name one language."
        for group in found["near_duplicates"][:_NAMED]
    ]
    return sentences
