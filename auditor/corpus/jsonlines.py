"""JSON lines: every line is parsed by itself, so that a bad one loses no other."""

from __future__ import annotations

import json
import re
from collections.abc import Iterator

import orjson

from auditor.corpus.lines import Lines, whole_lines
from auditor.corpus.rows import NOT_MENDED, Damage, Mend, Row, decoded
from auditor.corpus.streams import Utf8

NOT_JSON = "not valid JSON"

_ESCAPE = re.compile(
    r"\\(?:u[dD][89abAB][0-9a-fA-F]{2}\\u[dD][c-fC-F][0-9a-fA-F]{2}"
    r"|(?P<lone>u[dD][89a-fA-F][0-9a-fA-F]{2})|.)",
    re.DOTALL,
)


def json_line_rows(stream: Utf8) -> Iterator[Row]:
    """Yield a row for every line that is not blank, its record whatever JSON value it holds."""
    loads = orjson.loads
    for block in whole_lines(stream):
        if not isinstance(block, Lines):
            yield block
            continue
        for number, raw in enumerate(block.content.split(b"\n"), block.first):
            try:
                yield number, loads(raw), NOT_MENDED
            except orjson.JSONDecodeError:
                if raw.strip(b" \t\r"):
                    yield (number, *parse_leniently(raw))


def parse(raw: bytes) -> tuple[object, tuple[Mend, ...]]:
    """Return the JSON value of ``raw`` (Damage when it is none) and what was mended in it."""
    try:
        return orjson.loads(raw), NOT_MENDED
    except orjson.JSONDecodeError:
        return parse_leniently(raw)


def parse_leniently(raw: bytes) -> tuple[object, tuple[Mend, ...]]:
    r"""Return what ``raw`` holds once its text is mended.

    Invalid UTF-8 and the escapes of lone surrogates (RFC 8259 §8.2) become U+FFFD; NaN and
    Infinity, which RFC 8259 has not, are let through.
    """
    text, mends = decoded(raw)
    mended = _ESCAPE.sub(lambda found: r"\ufffd" if found["lone"] else found[0], text)
    if mended != text:
        mends = (*mends, Mend("lone surrogate"))
    strange: list[str] = []
    try:
        value = json.loads(mended, parse_constant=strange.append)
    except json.JSONDecodeError as fault:
        return Damage(NOT_JSON, f"character {fault.pos + 1}: {fault.msg}"), NOT_MENDED
    except RecursionError:
        return Damage(NOT_JSON, "nested too deeply"), NOT_MENDED
    except ValueError:  # a number of more digits than Python converts
        return Damage(NOT_JSON, "a number is too long"), NOT_MENDED
    return value, (*mends, Mend("number that JSON has not", strange[0])) if strange else mends
