"""Bad sheet parts: each finding has its limit and source, and its cure is the smallest that is enough.

The cure's own number is applied to the part: the finding is gone; 0.15 mm less, one step of the numbers that cures are
given in and a half, and it is still there.
"""

from __future__ import annotations

import random
import re
from collections.abc import Callable

import pytest

from fabgen.checks.records import Finding
from fabgen.checks.registry import Context, findings_of
from fabgen.parts.contour import Circle
from tests.checks.cases import alone, base, bracket, fold, rectangle, sheet_part, with_job
from tests.checks.test_codes import ENTRIES, Case

SHORT_MM = 0.15


def first(code: str, case: Case) -> Finding | None:
    return next(iter(findings_of(ENTRIES[code], Context(case[0], tuple(case[1])))), None)


def radius(given: float, more: float) -> Case:
    """1.5 mm EN AW-5754 H22 needs 1.0 t (SB-25, EN 485-2, read in a secondary page)."""
    return alone(base(), sheet_part(bracket(folds=(fold(radius=more or given),))))


def leg(given: float, more: float) -> Case:
    """V of 8 mm: 5.5 mm outside (SB-35, a press-brake maker's chart, read in a secondary page)."""
    feed = with_job(base(), limits={"die_opening_mm": 8.0})
    return alone(feed, sheet_part(bracket(folds=(fold(60.0 - given),), outline=rectangle(0, 0, 60.0 + more, 20))))


def hole(given: float, more: float) -> Case:
    """2 t + r from the hole's edge to the fold line (SB-42, design guides, read in a secondary page)."""
    return alone(base(), sheet_part(bracket(holes=(Circle(28.0 - given - more, 10, 4),))))


def tabs(given: float, more: float) -> Case:
    """Two tabs side by side whose fold lines overlap; 1 mm of gap for the laser (SB-43, design guides)."""
    low, high = fold(width=10.0), fold(number=2, width=10.0)
    up = 10.0 - given + more
    high = type(high)(2, (30.0, up), (30.0, up + 10.0), *(getattr(high, name) for name in (
        "angle_deg", "inside_radius_mm", "k_factor", "allowance_mm", "deduction_mm", "order")))  # fmt: skip
    return alone(base(), sheet_part(bracket(folds=(low, high))))


@pytest.mark.parametrize(
    ("code", "case", "range_mm", "severity"),
    [
        ("SHEET-101", radius, (0.3, 1.3), "stop"),
        ("SHEET-201", leg, (2.0, 4.0), "stop"),
        ("SHEET-301", hole, (0.5, 3.0), "caution"),
        ("SHEET-308", tabs, (0.5, 6.0), "stop"),
    ],
)
def test_the_cure_is_enough_and_no_larger_than_needed(
    code: str, case: Callable[[float, float], Case], range_mm: tuple[float, float], severity: str
) -> None:
    dice = random.Random(code)
    for _ in range(20):
        given = round(dice.uniform(*range_mm), 2)
        finding = first(code, case(given, 0.0))
        assert finding is not None, given
        assert finding.severity == severity
        assert re.search(r"\d", finding.limit)
        assert len(finding.source) > 10
        number = re.search(r"\d+(?:\.\d+)?", finding.cure)
        assert number is not None
        cure = float(number[0])
        assert first(code, case(given, cure)) is None, (given, finding.cure)
        assert first(code, case(given, cure - SHORT_MM)) is not None, (given, finding.cure)
