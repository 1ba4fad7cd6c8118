"""The printing limits that the printed parts are drawn to, read once from the stock table and the job.

Depends on: stock, job, sizing.records.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from fabgen.sizing.records import Feed
from fabgen.stock import tables


@dataclass(frozen=True)
class PrintRules:
    """Millimetres. ``hole_mm`` is added to hole diameters; ``clearance_mm`` lies between
    faces that slide into each other; ``margin_mm`` stays free at the bed's edges; ``insert_wall_mm``
    stands around an insert; ``tolerance_mm`` is what a print holds, the one that the sizing counts with."""

    line_mm: float
    wall_min_mm: float
    hole_mm: float
    clearance_mm: float
    margin_mm: float
    insert_wall_mm: float
    bed_mm: tuple[float, float, float]
    tolerance_mm: float

    def wall(self, lines: int) -> float:
        """A wall of whole lines, never under the minimum wall."""
        return max(lines * self.line_mm, self.wall_over(self.wall_min_mm))

    def wall_over(self, least_mm: float) -> float:
        """The thinnest wall of whole lines that is no thinner than ``least_mm``."""
        return math.ceil(least_mm / self.line_mm - 1e-9) * self.line_mm


def print_rules(feed: Feed) -> PrintRules:
    """The rules that hold for this feed, with the job's overrides."""

    def limit(key: str) -> float:
        return tables.limit(key, feed.job.overrides).value

    return PrintRules(
        line_mm=feed.job.limits.line_width_mm,
        wall_min_mm=limit("print_wall_min_mm"),
        hole_mm=limit("print_hole_allowance_mm"),
        clearance_mm=limit("sliding_clearance_mm"),
        margin_mm=limit("printer_clearance_mm"),
        insert_wall_mm=limit("insert_wall_min_mm"),
        bed_mm=feed.job.limits.bed_mm,
        tolerance_mm=limit("print_tolerance_mm"),
    )
