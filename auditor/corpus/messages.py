"""Conversations: a list of messages, each an object with a role and a content."""

from __future__ import annotations

from typing import Any, TypeGuard

from auditor.corpus.options import Render
from auditor.corpus.rows import Damage
from auditor.errors import CorpusError

MESSAGES = "messages"


def is_conversation(value: object) -> TypeGuard[list[dict[str, Any]]]:
    """Whether ``value`` is a list of messages, one at least."""
    return (
        isinstance(value, list)
        and bool(value)
        and all(isinstance(m, dict) and "role" in m and "content" in m for m in value)
    )


def conversation_text(value: object, render: Render | None) -> str | Damage:
    """Return the text of a conversation, Damage for what is none or what ``render`` refuses.

    The text parts of a content are joined; a content that is null adds nothing.
    """
    if not is_conversation(value):
        return Damage("not a conversation")
    messages: list[dict[str, Any]] = []
    for number, message in enumerate(value, start=1):
        content = _content(message["content"])
        if isinstance(content, Damage):
            return Damage(content.reason, f"message {number}")
        messages.append({**message, "content": content})
    if render is None:
        return "\n".join(m["content"] for m in messages if m["content"] is not None)
    try:
        return render(messages)
    except CorpusError as fault:
        return Damage("conversation cannot be rendered", fault.message)


def _content(content: object) -> str | Damage | None:
    if content is None or isinstance(content, str):
        return content
    if not isinstance(content, list):
        return Damage("not a conversation")
    texts: list[str] = []
    for part in content:
        text = part.get("text") if isinstance(part, dict) else None
        if not isinstance(text, str):
            return Damage("not a conversation")
        texts.append(text)
    return "".join(texts)
