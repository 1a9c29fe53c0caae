"""The table of byte-level vocabularies: every byte as one printable character.

Source: openai/gpt-2, src/encoder.py, ``bytes_to_unicode``: 188 bytes stand for themselves, the
other 68 are moved to U+0100 and after.
"""

from __future__ import annotations

_PRINTABLE = (*range(0x21, 0x7F), *range(0xA1, 0xAD), *range(0xAE, 0x100))
_MOVED = tuple(byte for byte in range(256) if byte not in _PRINTABLE)

CHARACTER_OF_BYTE: dict[int, str] = {
    **{byte: chr(byte) for byte in _PRINTABLE},
    **{byte: chr(0x100 + place) for place, byte in enumerate(_MOVED)},
}
BYTE_OF_CHARACTER = {character: byte for byte, character in CHARACTER_OF_BYTE.items()}
# Bytes as the characters of Latin-1; what stands for no byte becomes a character beyond it.
_AS_LATIN_1: dict[int, int] = dict.fromkeys(range(0x100), 0xFFFF)
_AS_LATIN_1 |= {ord(character): byte for character, byte in BYTE_OF_CHARACTER.items()}
SPACE = CHARACTER_OF_BYTE[0x20]


def bytes_of(entry: str) -> bytes | None:
    """Return the bytes that ``entry`` stands for, ``None`` when it is no byte-level spelling."""
    try:
        return entry.translate(_AS_LATIN_1).encode("latin-1")
    except UnicodeEncodeError:
        return None


def is_whole_text(spelled: bytes) -> bool:
    """Return whether ``spelled`` is valid UTF-8 on its own (RFC 3629)."""
    try:
        spelled.decode("utf-8")
    except UnicodeDecodeError:
        return False
    return True
