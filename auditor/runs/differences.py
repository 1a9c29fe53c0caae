"""The comparison of two audits: two folders in, a written comparison out."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

from auditor.comparing.document import Tables, compare
from auditor.comparing.pairs import Pair, Side, choose, differing
from auditor.errors import SettingsError
from auditor.report import comparison_contract, comparison_page, comparison_tables, contract, tables
from auditor.runs.audits import Audit, demanded_audit
from auditor.runs.beside import CHARACTERS, WORDS, table_beside
from auditor.runs.output import COMPARISON_FILES, OutputFolder

Json = dict[str, Any]


@dataclass(frozen=True)
class Wanted:
    """What is compared: the vocabulary ``before`` and ``after`` by name, ``None`` for all common.

    ``different`` goes on where settings differ; ``excerpts`` says whether words are shown.
    """

    before: str | None = None
    after: str | None = None
    different: bool = False
    excerpts: bool = True


@dataclass(frozen=True)
class WrittenComparison:
    """A finished comparison: the document of `comparison.json` and the files that were written."""

    document: Json
    folder: Path
    files: list[Path]


def compare_audits(
    before: str, after: str, wanted: Wanted, out: Path | None = None, *, overwrite: bool = False
) -> WrittenComparison:
    """Compare two audits, each an `audit.json` or its folder, and write it to ``out``.

    Raises AuditError for whatever the user can mend; then nothing is written.
    """
    audits = demanded_audit(before), demanded_audit(after)
    sides = [Side(own.document, str(own.path)) for own in audits]
    pairs = choose(sides[0], sides[1], wanted.before, wanted.after)
    differs = differing(sides[0].document, sides[1].document, pairs)
    if differs and not wanted.different:
        raise _different(differs, sides[1].where)
    folder = out or Path("reports") / _default_name(audits, pairs)
    with OutputFolder(folder, overwrite=overwrite, files=COMPARISON_FILES) as output:
        held = [_tables(own, excerpts=wanted.excerpts) for own in audits]
        parts = compare(sides[0], sides[1], pairs, (held[0], held[1]))
        document = comparison_contract.document(
            {
                "settings": {
                    "vocabulary": wanted.before,
                    "vocabulary_after": wanted.after,
                    "excerpts": wanted.excerpts,
                    "different_settings": differs,
                },
                **parts,
            }
        )
        output.write("comparison.json", contract.dump(document))
        output.write("differences.csv", tables.as_csv(comparison_tables.differences(document)))
        output.write("report.html", comparison_page.render(document))
        return WrittenComparison(document, folder, output.finish())


def _tables(audit: Audit, *, excerpts: bool) -> Tables:
    words = table_beside(audit.path, WORDS) if excerpts else None
    return Tables(words, table_beside(audit.path, CHARACTERS), left_out=not excerpts)


def _default_name(audits: tuple[Audit, Audit], pairs: list[Pair]) -> str:
    names = [own.name for own in audits]
    if names[0] == names[1]:
        names = [pairs[0].before["name"], pairs[0].after["name"]]
    return f"{names[0]}--to--{names[1]}"


def _different(differs: list[Json], where: str) -> SettingsError:
    told = "; ".join(f"{own['what']}: {own['before']!r} and {own['after']!r}" for own in differs)
    return SettingsError(
        f"the audits were made with different settings, so that a difference may come of them"
        f" ({told}).",
        hint="Make one again with the other's settings, or go on with --allow-different-settings.",
        where=where,
    )
