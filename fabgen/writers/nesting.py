"""The sheet estimate of a pack: a table for ordering stock and a picture.

Depends on: drawing (nesting), parts.nesting, parts.records, job, writers (csv, svg).
"""

from __future__ import annotations

from collections.abc import Sequence

from fabgen.drawing.nesting import nest_items
from fabgen.job import Limits
from fabgen.parts.nesting import nest
from fabgen.parts.records import Part
from fabgen.writers.csv import csv_text
from fabgen.writers.svg import svg_text

HEADER = (
    "material", "designation", "temper", "thickness_mm", "sheet_x_mm", "sheet_y_mm", "sheets", "covered_percent",
    "parts", "too_large",
)  # fmt: skip


def nesting_files(parts: Sequence[Part], limits: Limits) -> dict[str, str]:
    """File name -> text: ``sheets.csv`` and ``sheets.svg``; nothing when no part is cut from sheet."""
    needs = nest(parts, limits)
    if not needs:
        return {}
    rows = (
        (
            need.material, need.material_name, need.temper, f"{need.thickness_mm:g}", f"{need.sheet_mm[0]:g}",
            f"{need.sheet_mm[1]:g}", need.sheets, f"{100 * need.share:.1f}",
            " ".join(sorted(item.key for item in need.laid)), " ".join(need.too_large),
        )
        for need in needs
    )  # fmt: skip
    return {"sheets.csv": csv_text(HEADER, rows), "sheets.svg": svg_text(nest_items(needs))}
