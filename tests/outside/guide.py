"""A technical text in many languages: the paragraphs of Debian's installation guide.

Package `installation-guide-amd64` of Debian 12; translations hold untranslated passages, commands,
names and program output.
"""

from __future__ import annotations

import subprocess
from hashlib import sha256
from html.parser import HTMLParser
from pathlib import Path

PACKAGE = "installation-guide-amd64"
_BLOCKS = frozenset({"p", "li", "td", "th", "dt", "dd", "pre", "h1", "h2", "h3", "h4"})
_SKIPPED = frozenset({"script", "style", "head"})


def fetch_guide(folder: Path) -> Path:
    """Download the package into ``folder``, unpack it, and return the folder of its languages."""
    subprocess.run(
        ["apt-get", "download", "-q", PACKAGE], cwd=folder, check=True, capture_output=True
    )
    [package] = folder.glob(f"{PACKAGE}_*.deb")
    unpacked = folder / "unpacked"
    subprocess.run(["dpkg-deb", "-x", str(package), str(unpacked)], check=True)
    return unpacked / "usr" / "share" / "doc" / PACKAGE


def guide_paragraphs(guide: Path) -> list[dict[str, str]]:
    """Return every block of text that holds no other, in a fixed order: id, lang, text."""
    rows = []
    for folder in sorted(path for path in guide.iterdir() if path.is_dir()):
        for page in sorted(folder.glob("*.html")):
            parser = _Blocks()
            parser.feed(page.read_text(encoding="utf-8"))
            for number, text in enumerate(parser.texts):
                row = {"id": f"{folder.name}/{page.name}#{number}", "lang": folder.name}
                rows.append({**row, "text": text})
    return rows


def digest(text: str) -> str:
    """Return twelve hexadecimal digits that stand for a text."""
    return sha256(text.encode()).hexdigest()[:12]


class _Blocks(HTMLParser):
    """Collects the text of the innermost blocks, white space as it stands but at the ends."""

    def __init__(self) -> None:
        super().__init__()
        self.texts: list[str] = []
        self._open: list[list[str]] = []
        self._skipping = 0

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        del attrs
        if tag in _SKIPPED:
            self._skipping += 1
        elif tag in _BLOCKS:
            self._flush()
            self._open.append([])

    def handle_endtag(self, tag: str) -> None:
        if tag in _SKIPPED:
            self._skipping -= 1
        elif tag in _BLOCKS and self._open:
            self._flush()
            self._open.pop()

    def handle_data(self, data: str) -> None:
        if self._open and not self._skipping:
            self._open[-1].append(data)

    def _flush(self) -> None:
        if self._open:
            text = "".join(self._open[-1]).strip()
            self._open[-1] = []
            if text:
                self.texts.append(text)
