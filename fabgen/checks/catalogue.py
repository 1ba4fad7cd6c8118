"""The catalogue of all codes as a page, made from the register.

    python -m fabgen.checks.catalogue > fabgen/checks/CATALOGUE.md

Depends on: checks (pack_register, readback, registry, solid), stock.
"""

from __future__ import annotations

import sys

from fabgen.checks.pack_register import PACK_CODES, SHEETS_CODE, SHEETS_TITLE, SOURCE, TABLES_CODE, TABLES_TITLE
from fabgen.checks.readback import LOADED
from fabgen.checks.registry import GROUPS, Check, all_checks, source_text
from fabgen.checks.solid import SOLID_CODES
from fabgen.checks.solid import SOURCE as SOLID_SOURCE
from fabgen.stock import tables

HEAD = """# Codes of the checks

Made from the code by `python -m fabgen.checks.catalogue`; a test keeps it current. The severity is the usual one;
some checks raise or lower it by the case. Limits stand in `fabgen/stock/limits.toml` and may be overridden under
`[overrides]` in the job file; an override is itself a finding (NOTE-101).
"""


def catalogue_text() -> str:
    """The page as Markdown: a section per group, a row per code, then every limit with its source."""
    lines = [HEAD]
    entries = all_checks()
    for group, title in GROUPS.items():
        rows = [entry for entry in entries if entry.code.startswith(f"{group}-")]
        lines += [f"## {title}", "", "| code | severity | what it checks | limits | source |", "|---|---|---|---|---|"]
        lines += [_row(entry) for entry in rows]
        if group == "CONS":
            lines += [f"| {code} | stop | {title} |  | {SOURCE} |" for code, (title, _) in sorted(PACK_CODES.items())]
            lines.append(f"| {SHEETS_CODE} | stop | {SHEETS_TITLE} |  | {SOURCE} |")
            lines.append(f"| {TABLES_CODE} | stop | {TABLES_TITLE} |  | {SOURCE} |")
            lines += [f"| {c} | {level} | {title} |  | {SOLID_SOURCE} |" for c, (level, title) in SOLID_CODES.items()]
        lines.append("")
    lines += ["## Limits", "", "| key | value | meaning | source |", "|---|---|---|---|"]
    for row in tables.all_rows("limit"):
        cells = f"`{row.key}`", f"{row.value:g} {row.unit}", row.meaning, source_text(row.source)
        lines.append("| " + " | ".join(cells) + " |")
    return "\n".join(lines) + "\n"


def _row(entry: Check) -> str:
    limits = ", ".join(f"`{key}`" for key in entry.limits)
    source = entry.source or ("see the limits" if entry.limits else "the finding names it")
    cells = entry.code, entry.severity, " ".join(entry.title.split()), limits, source
    return "| " + " | ".join(cell.replace("|", "/") for cell in cells) + " |"


if __name__ == "__main__" and LOADED:
    sys.stdout.write(catalogue_text())
