"""Imports point one way: the layers of DEVELOPERS.md, read from the sources themselves."""

from __future__ import annotations

import ast
from pathlib import Path

import auditor

ROOT = Path(auditor.__file__).parent
# Lower layers come first; layers in one row do not know each other.
LAYERS = [
    {"errors"},
    {"text"},
    {"corpus", "vocabulary", "tallies"},
    {"encoding"},
    {"inspection"},
    {"figures"},
    {"comparing", "planning"},
    {"policy", "report"},
    {"runs"},
    {"api"},
    {"cli"},
]
RANK = {name: rank for rank, row in enumerate(LAYERS) for name in row}
# `auditor/__init__.py` is the public API; `__main__` only starts the command line.
FILES = {"__init__": "api", "__main__": "cli"}


def layer_of(parts: tuple[str, ...]) -> str:
    first = parts[0] if parts else "__init__"
    return FILES.get(first, first)


def imports_of(source: str) -> list[tuple[str, ...]]:
    found = []
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, ast.ImportFrom) and node.module and node.level == 0:
            modules = [node.module]
            if node.module == "auditor":
                modules = [f"auditor.{name.name}" for name in node.names]
        elif isinstance(node, ast.Import):
            modules = [name.name for name in node.names]
        else:
            continue
        found += [tuple(m.split(".")[1:]) for m in modules if m.split(".")[0] == "auditor"]
    return found


def wrong_way(layer: str, source: str) -> list[str]:
    """Return the layers that ``source``, standing in ``layer``, must not import."""
    targets = {layer_of(parts) for parts in imports_of(source)} - {layer}
    return sorted(target for target in targets if RANK[target] >= RANK[layer])


def test_every_module_imports_only_lower_layers():
    """No module of the package imports its own row's neighbours or anything above."""
    offences = {}
    for path in ROOT.rglob("*.py"):
        parts = path.relative_to(ROOT).with_suffix("").parts
        if found := wrong_way(layer_of(parts), path.read_text()):
            offences["/".join(parts)] = found
    assert offences == {}


def test_every_package_has_a_layer():
    """A new package must be given its place before it is imported."""
    held = {path.name for path in ROOT.iterdir() if (path / "__init__.py").exists()}
    assert held <= set(RANK)


def test_a_wrong_import_is_seen():
    """The guard itself notices an import that points the wrong way."""
    assert wrong_way("text", "from auditor.figures import values") == ["figures"]
    assert wrong_way("corpus", "import auditor.vocabulary.opening") == ["vocabulary"]
    assert wrong_way("runs", "from auditor.text import words") == []


def test_engines_are_known_to_one_layer_only():
    """Only `vocabulary` imports a library that encodes."""
    engines = {"tokenizers", "sentencepiece", "tiktoken"}
    offenders = []
    for path in ROOT.rglob("*.py"):
        for node in ast.walk(ast.parse(path.read_text())):
            names = [n.name for n in node.names] if isinstance(node, ast.Import) else []
            if isinstance(node, ast.ImportFrom) and node.module:
                names = [node.module]
            if any(name.split(".")[0] in engines for name in names):
                offenders.append(path.relative_to(ROOT).parts[0])
    assert set(offenders) == {"vocabulary"}
