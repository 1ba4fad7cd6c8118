"""A picture of the sheet estimate: each sheet of stock with the parts laid on it.

Depends on: drawing (model, flat), parts.nesting.
"""

from __future__ import annotations

from collections.abc import Sequence

from fabgen.drawing.flat import outline_items
from fabgen.drawing.model import Item, Line, Text, moved
from fabgen.parts.contour import bounds_mm
from fabgen.parts.nesting import SheetNeed

SHEET_WIDTH_MM = 120.0
GAP_MM = 14.0
TEXT_MM = 2.5


def nest_items(needs: Sequence[SheetNeed]) -> tuple[Item, ...]:
    """All sheets from left to right, one stock below the other, each ``SHEET_WIDTH_MM`` wide on paper.

    Above each row: material, temper, thickness, sheets needed and the share of them that the parts cover.
    """
    items: list[Item] = []
    top = 0.0
    for need in needs:
        scale = SHEET_WIDTH_MM / need.sheet_mm[0]
        height = need.sheet_mm[1] * scale
        text = (
            f"{need.material_name}, {need.temper}, {need.thickness_mm:g} mm: {need.sheets} "
            f"of {need.sheet_mm[0]:g} x {need.sheet_mm[1]:g} mm, {100 * need.share:.1f} % covered"
        )
        if need.too_large:
            text += f"; too large for this sheet: {', '.join(need.too_large)}"
            height = height if need.sheets else 0.0
        items.append(Text(0.0, top + TEXT_MM, text, TEXT_MM))
        for sheet in range(need.sheets):
            at = (sheet * (SHEET_WIDTH_MM + GAP_MM), top - height)
            items += moved(_frame(SHEET_WIDTH_MM, height), *at)
            for laid in need.laid:
                if laid.sheet == sheet:
                    drawn = [i.scaled(scale) for o in laid.outlines for i in outline_items(o)]  # type: ignore[union-attr]
                    low = bounds_mm(laid.outlines[0])
                    items += moved(tuple(drawn), *at)
                    items.append(Text(at[0] + low[0] * scale + 1.0, at[1] + low[1] * scale + 1.0, laid.key, 1.8))
        top -= height + GAP_MM
    return tuple(items)


def _frame(width: float, height: float) -> tuple[Item, ...]:
    corners = ((0.0, 0.0), (width, 0.0), (width, height), (0.0, height))
    return tuple(Line(*a, *b, "thin") for a, b in zip(corners, (*corners[1:], corners[0]), strict=True))
