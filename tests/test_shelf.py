"""Wire, sheet and printers as shops keep them."""

from __future__ import annotations

import math
from itertools import pairwise

import pytest

from fabgen.stock import tables
from fabgen.stock.gauges import awg_mm
from fabgen.stock.records import Printer, Sheet, Wire


def row(kind: str, key: str) -> Wire:
    found: Wire = next(item for item in tables.all_rows(kind) if item.key == key)
    return found


def test_american_sizes_follow_their_formula() -> None:
    # ASTM B258: d = 0.005 in * 92**((36 - n)/39)
    wanted = [awg_mm(number) for number in (4, 6, 8, 10, 12, 14, 16, 18, 20)]
    assert row("wire", "awg").diameters_mm == pytest.approx(wanted, abs=5e-4)


def test_conductors_have_their_area() -> None:
    # IEC 60228 class 1, nominal areas in mm2 (from memory)
    areas = [math.pi / 4 * d**2 for d in row("wire", "installation").diameters_mm]
    assert areas == pytest.approx([1.5, 2.5, 4, 6, 10], rel=0.01)


def test_preferred_numbers_grow_by_a_twentieth_of_a_decade() -> None:
    # ISO 3, series R20: ratio 10**(1/20); the series is rounded to three digits
    sizes = row("wire", "metric").diameters_mm
    for smaller, larger in pairwise(sizes):
        assert larger / smaller == pytest.approx(10 ** (1 / 20), rel=0.02)


def test_every_sheet_is_of_a_metal_in_the_table() -> None:
    sheets: tuple[Sheet, ...] = tables.all_rows("sheet")
    assert all(tables.metal(sheet.metal) for sheet in sheets)
    assert all(list(sheet.thicknesses_mm) == sorted(sheet.thicknesses_mm) for sheet in sheets)


def test_a_bed_has_three_sizes() -> None:
    printers: tuple[Printer, ...] = tables.all_rows("printer")
    assert all(len(printer.bed_mm) == 3 for printer in printers)
