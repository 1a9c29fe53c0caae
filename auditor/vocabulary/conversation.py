"""Conversations as the vocabulary's own chat template writes them, or their contents alone."""

from __future__ import annotations

import json
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING, Any, NoReturn

from jinja2 import Template, TemplateSyntaxError, UndefinedError, nodes
from jinja2.ext import Extension
from jinja2.sandbox import ImmutableSandboxedEnvironment

from auditor.errors import CorpusError, VocabularyError

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence
    from pathlib import Path

    from jinja2.parser import Parser

Message = dict[str, Any]
LARGEST_TEMPLATE = 1_000_000  # bytes
_TEMPLATE_FILE = "chat_template.jinja"
_SETTINGS_FILE = "tokenizer_config.json"


class _RefusedError(Exception):
    """The template itself called `raise_exception`."""


@dataclass(frozen=True, slots=True)
class Renderer:
    """Writes a conversation as one text; ``tokens`` are the control strings the template names.

    It holds plain values only, so it can be sent to another process; there the template is
    compiled anew on first use.
    """

    template: str
    tokens: Mapping[str, str | list[str]]

    @classmethod
    def from_folder(cls, folder: Path) -> Renderer:
        """Return the renderer of the vocabulary in ``folder``.

        Raises VocabularyError when there is no template, or one too large or not understood.
        """
        template, where = _find(folder)
        if template is None:
            raise VocabularyError("there is no chat template.", where=str(folder))
        try:
            _compiled(template)
        except TemplateSyntaxError as fault:
            raise VocabularyError(
                f"the chat template is not understood ({fault.message}).",
                hint=f"Mend it, or put a {_TEMPLATE_FILE} in its place.",
                where=f"{where}: template line {fault.lineno}",
            ) from fault
        except Exception as fault:  # whatever the compiler meets in a template nested too deeply
            raise VocabularyError(
                f"the chat template cannot be compiled ({type(fault).__name__}).", where=where
            ) from fault
        return cls(template, _special_tokens(folder))

    def render(self, messages: list[Message]) -> str:
        """Return the text of one conversation, without a prompt for the next answer.

        Raises CorpusError when the template refuses or fails on ``messages``.
        """
        _check(messages)
        try:
            return _compiled(self.template).render(
                **self.tokens,
                messages=messages, tools=None, documents=None, add_generation_prompt=False,
            )  # fmt: skip
        except Exception as fault:  # a template is a program: it may fail in any way
            raise CorpusError(_reason(fault)) from fault


def chat_template(folder: Path) -> str | None:
    """Return the chat template that lies in ``folder``, ``None`` without one.

    A `chat_template.jinja` wins over `chat_template` in `tokenizer_config.json`; of several named
    there the one called "default" counts. Raises VocabularyError for a damaged or too large one.
    """
    return _find(folder)[0]


def joined(messages: list[Message]) -> str:
    r"""Return the contents of the messages in order, joined by ``\n``.

    A content may be text, null (it adds nothing), or a list of text parts, which are joined alike.
    Raises CorpusError for any other content, since it would be lost without a word.
    """
    _check(messages)
    texts: list[str] = []
    for number, message in enumerate(messages, start=1):
        content = message.get("content")
        parts = [] if content is None else content if isinstance(content, list) else [content]
        texts += (_text_of(part, number) for part in parts)
    return "\n".join(texts)


def _text_of(part: object, number: int) -> str:
    text = part.get("text") if isinstance(part, dict) else part
    if not isinstance(text, str):
        raise CorpusError(f"message {number} of the conversation holds content that is not text")
    return text


def _check(messages: Sequence[object]) -> None:
    for number, message in enumerate(messages, start=1):
        if not isinstance(message, dict):
            raise CorpusError(f"message {number} of the conversation is not an object")


def _reason(fault: Exception) -> str:
    if isinstance(fault, _RefusedError):
        return f"chat template refuses the conversation: {fault}"
    if isinstance(fault, UndefinedError) and "strftime_now" in str(fault):
        return (
            "chat template refuses the conversation: it asks for the current date (strftime_now), "
            "with which counts would change from day to day"
        )
    return f"chat template fails on the conversation: {type(fault).__name__}: {fault}"


class _Generation(Extension):
    """Passes over the marks around what the model is to learn; the text between them stays."""

    tags = {"generation"}  # noqa: RUF012 - declared so by the base class

    def parse(self, parser: Parser) -> nodes.Node:
        line = next(parser.stream).lineno
        body = parser.parse_statements(("name:endgeneration",), drop_needle=True)
        return nodes.Scope(body, lineno=line)


@lru_cache(maxsize=8)
def _compiled(template: str) -> Template:
    """Return the template, compiled as chat templates expect, with nothing that depends on chance.

    `strftime_now` is left out on purpose, as are the random filter and filler text.
    """
    environment = ImmutableSandboxedEnvironment(
        trim_blocks=True, lstrip_blocks=True, extensions=[_Generation, "jinja2.ext.loopcontrols"]
    )
    environment.filters["tojson"] = _to_json
    environment.globals["raise_exception"] = _refuse
    del environment.filters["random"], environment.globals["lipsum"]
    return environment.from_string(template)


def _refuse(message: object) -> NoReturn:
    raise _RefusedError(message)


def _to_json(
    value: object,
    ensure_ascii: bool = False,  # noqa: FBT001, FBT002
    indent: int | None = None,
    separators: tuple[str, str] | None = None,
    sort_keys: bool = False,  # noqa: FBT001, FBT002
) -> str:
    """Return JSON without the escapes for HTML that Jinja's own filter adds."""
    return json.dumps(
        value, ensure_ascii=ensure_ascii, indent=indent, separators=separators, sort_keys=sort_keys
    )


def _find(folder: Path) -> tuple[str | None, str]:
    """Return the template, if any, and the place where it stands."""
    path = folder / _TEMPLATE_FILE
    if path.is_file():
        return _bounded(path.read_bytes(), str(path)), str(path)
    where = str(folder / _SETTINGS_FILE)
    given = _settings(folder / _SETTINGS_FILE).get("chat_template")
    if isinstance(given, list):
        named = {own.get("name"): own.get("template") for own in given if isinstance(own, dict)}
        given = named.get("default")
    if given is None:
        return None, where
    if not isinstance(given, str):
        raise VocabularyError(
            "`chat_template` is neither text nor a list of named texts.",
            hint=f"Put the template into a {_TEMPLATE_FILE} beside it.",
            where=where,
        )
    return _bounded(given.encode("utf-8", "surrogatepass"), where), where


def _bounded(content: bytes, where: str) -> str:
    if len(content) > LARGEST_TEMPLATE:
        raise VocabularyError(
            f"the chat template takes {len(content)} bytes; at most {LARGEST_TEMPLATE} are read.",
            hint="Is this the right file?",
            where=where,
        )
    try:
        return content.removeprefix(b"\xef\xbb\xbf").decode()
    except UnicodeDecodeError as fault:
        raise VocabularyError(
            f"the chat template is not UTF-8 (byte {fault.start}).",
            hint="Save it as UTF-8.",
            where=where,
        ) from fault


def _settings(path: Path) -> dict[str, Any]:
    """Return the JSON object in ``path``, an empty one without such a file."""
    if not path.is_file():
        return {}
    try:
        value = json.loads(path.read_bytes().removeprefix(b"\xef\xbb\xbf"))
    except (ValueError, RecursionError) as fault:
        raise VocabularyError(
            f"not valid JSON ({fault}).",
            hint="The file may be cut short; fetch it again.",
            where=str(path),
        ) from fault
    if not isinstance(value, dict):
        raise VocabularyError("not a JSON object.", hint="Fetch the file again.", where=str(path))
    return value


def _special_tokens(folder: Path) -> dict[str, str | list[str]]:
    """Return the control strings that a template may name; the tokenizer's settings win."""
    tokens: dict[str, str | list[str]] = {}
    for file in ("special_tokens_map.json", _SETTINGS_FILE):
        settings = _settings(folder / file)
        extra = settings.get("extra_special_tokens")
        named = {**(extra if isinstance(extra, dict) else {}), **settings}
        for key, value in named.items():
            text = _token_text(value)
            if key.endswith("_token") and text is not None:
                tokens[key] = text
        several = settings.get("additional_special_tokens")
        if isinstance(several, list):
            texts = [_token_text(value) for value in several]
            tokens["additional_special_tokens"] = [text for text in texts if text is not None]
    return tokens


def _token_text(value: object) -> str | None:
    text = value.get("content") if isinstance(value, dict) else value
    return text if isinstance(text, str) else None
