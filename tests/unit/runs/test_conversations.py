"""Records of messages are conversations, rendered by the vocabulary's own template if any."""

from __future__ import annotations

import json
import shutil

from auditor.corpus import ReadOptions
from auditor.runs.auditing import assess
from auditor.runs.plan import Plan
from auditor.vocabulary import VocabularySpec
from tests.unit.runs.conftest import DEMO

MESSAGES = [{"role": "user", "content": "Lamp?"}, {"role": "assistant", "content": "Lit."}]
TEMPLATE = "{% for m in messages %}[{{ m.role }}] {{ m.content }}\n{% endfor %}"


def audited(tmp_path, *folders):
    corpus = tmp_path / "talk.jsonl"
    corpus.write_text(json.dumps({"messages": MESSAGES}) + "\n")
    specs = tuple(VocabularySpec(str(folder)) for folder in folders)
    return assess(Plan((str(corpus),), specs, ReadOptions()), tmp_path / "out").audit


def with_template(tmp_path, name, template):
    folder = tmp_path / name
    shutil.copytree(DEMO / "vocabularies" / "harbour-bytelevel", folder)
    (folder / "chat_template.jinja").write_text(template)
    return folder


def test_the_template_is_used_and_named(tmp_path):
    """The document is what the template renders: 12 + 17 characters and two line ends."""
    audit = audited(tmp_path, with_template(tmp_path, "one", TEMPLATE))
    assert audit["settings"]["conversations"] == "chat template"
    assert audit["corpus"]["characters"] == len("[user] Lamp?\n[assistant] Lit.\n")


def test_without_a_template_contents_are_joined(tmp_path):
    """Plain text, joined by line feeds, and the settings say so."""
    audit = audited(tmp_path, DEMO / "vocabularies" / "harbour-bytelevel")
    assert audit["settings"]["conversations"].startswith("contents joined by line feeds")
    assert audit["corpus"]["characters"] == len("Lamp?\nLit.")


def test_vocabularies_with_different_templates_see_one_text(tmp_path):
    """Figures side by side must speak of the same document: neither template is used."""
    one, other = (with_template(tmp_path, n, TEMPLATE + n) for n in ("one", "other"))
    audit = audited(tmp_path, one, other)
    assert "differ" in audit["settings"]["conversations"]
    assert audit["corpus"]["characters"] == len("Lamp?\nLit.")
