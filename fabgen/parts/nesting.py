"""How much sheet the flat parts need: an estimate for ordering stock, not a cutting plan.

Each part's box, with room for the cut, is laid on sheets of the stock size; parts stay one per file.

Depends on: errors, parts.contour, parts.records, job.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from fabgen.errors import GeometryError
from fabgen.job import Limits
from fabgen.parts.contour import Outline, area_mm2, bounds_mm, moved
from fabgen.parts.records import Part

SPACING_MM = 5.0
"""Between parts and to the sheet's edge: kerf, clamps, a skeleton that holds. Common practice, no source."""


@dataclass(frozen=True)
class Laid:
    """One copy of a part on a sheet: outlines moved to their place, turned by 90 degrees where that fits better."""

    key: str
    sheet: int
    x_mm: float
    y_mm: float
    turned: bool
    outlines: tuple[Outline, ...]


@dataclass(frozen=True)
class SheetNeed:
    """Sheets needed of one stock (material, temper, thickness), long side along x. ``share`` of them that the
    parts cover; ``too_large``: parts that no sheet of this size holds."""

    material: str
    material_name: str
    temper: str
    thickness_mm: float
    sheet_mm: tuple[float, float]
    sheets: int
    share: float
    laid: tuple[Laid, ...]
    too_large: tuple[str, ...] = ()


def nest(parts: Sequence[Part], limits: Limits) -> tuple[SheetNeed, ...]:
    """Sheets of ``limits.sheet_mm`` needed for all flat parts cut from sheet, by stock; foil is cut by hand."""
    stocks: dict[tuple[str, str, str, float], list[Part]] = {}
    for part in parts:
        if part.flat is not None and "laser" in part.process:
            key = (part.material, part.material_name, part.temper, part.thickness_mm or part.flat.thickness_mm)
            stocks.setdefault(key, []).append(part)
    low, high = sorted(limits.sheet_mm)
    return tuple(_need(key, group, (high, low)) for key, group in sorted(stocks.items(), key=lambda s: s[0]))


def _need(stock: tuple[str, str, str, float], group: list[Part], sheet_mm: tuple[float, float]) -> SheetNeed:
    import rectpack

    ordered = sorted(group, key=lambda p: p.key)
    too_large = tuple(part.key for part in ordered if not _fits(*_box(part), sheet_mm))
    copies = [part for part in ordered if part.key not in too_large for _ in range(part.quantity)]
    if not copies:
        return SheetNeed(*stock, sheet_mm, 0, 0.0, (), too_large)
    # The packer counts in whole hundredths of a millimetre so that its result does not hang on rounding.
    packer = rectpack.newPacker(rotation=True, sort_algo=rectpack.SORT_LSIDE)
    for index, part in enumerate(copies):
        width, height = _box(part)
        packer.add_rect(_units(width + SPACING_MM), _units(height + SPACING_MM), index)
    packer.add_bin(_units(sheet_mm[0] - SPACING_MM), _units(sheet_mm[1] - SPACING_MM), count=float("inf"))
    packer.pack()
    placed = sorted(packer.rect_list(), key=lambda r: r[5])
    laid = tuple(_laid(copies[index], sheet, x, y, width) for sheet, x, y, width, _, index in placed)
    sheets = max(item.sheet for item in laid) + 1
    covered = sum(area_mm2(part.flat.outline) for part in copies if part.flat is not None)
    share = covered / (sheets * sheet_mm[0] * sheet_mm[1])
    return SheetNeed(*stock, sheet_mm, sheets, share, laid, too_large)


def _units(length_mm: float) -> int:
    return round(length_mm * 100)


def _fits(width: float, height: float, sheet_mm: tuple[float, float]) -> bool:
    low, high = sorted((width + 2 * SPACING_MM, height + 2 * SPACING_MM))
    return low <= min(sheet_mm) and high <= max(sheet_mm)


def _box(part: Part) -> tuple[float, float]:
    if part.flat is None:
        raise GeometryError(f"{part.name} has no flat pattern to lay on a sheet")
    x0, y0, x1, y1 = bounds_mm(part.flat.outline)
    return x1 - x0, y1 - y0


def _laid(part: Part, sheet: int, x: int, y: int, width: int) -> Laid:
    if part.flat is None:
        raise GeometryError(f"{part.name} has no flat pattern to lay on a sheet")
    box = _box(part)
    turned = width != _units(box[0] + SPACING_MM)
    turn = 90.0 if turned else 0.0
    outlines = [moved(o, turn_deg=turn) for o in (part.flat.outline, *part.flat.holes)]
    low = bounds_mm(outlines[0])
    at = (x / 100 + SPACING_MM, y / 100 + SPACING_MM)
    shifted = tuple(moved(o, at[0] - low[0], at[1] - low[1]) for o in outlines)
    return Laid(part.key, sheet, at[0], at[1], turned, shifted)
