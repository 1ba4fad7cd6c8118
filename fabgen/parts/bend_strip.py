"""A strip for a test bend, which gives the user's own K back.

Flat, seen from the top side; fold at the middle line by 90 degrees up, inside radius as the feed's folds::

         |<-------------- STRIP_LENGTH -------------->|
         .--------------------+-----------------------.  ---
         |                    : fold                  |   | STRIP_WIDTH
         '--------------------+-----------------------'  ---

Measure the legs a and b to the outside, then with t and the inside radius r:

    deduction = a + b - STRIP_LENGTH
    K = ((2 (r + t) - deduction) * 2 / pi - r) / t        (theory.bending.k_from_test_bend)

and enter it as limits.test_bend_k with limits.bend_rule = "test-bend"; that of the can's sheet as
limits.can_test_bend_k where the loop has another sheet.

Depends on: errors, stock, parts (bend_rule, contour, folding, kernel, making), sizing.records, theory.bending.
"""

from __future__ import annotations

from functools import partial

from fabgen.parts.bend_rule import chosen_k, rule_text
from fabgen.parts.folding import (
    Bend,
    Face,
    FoldedSheet,
    allowance_mm,
    box_face,
    flat_pattern,
    folded_solid,
    folded_volume_mm3,
)
from fabgen.parts.kernel import once
from fabgen.parts.making import metal_part
from fabgen.parts.records import Part
from fabgen.parts.wall_plan import fold_radius_mm
from fabgen.sizing.records import Feed
from fabgen.stock import tables
from fabgen.theory.bending import bend_deduction

STRIP_LENGTH_MM = 100.0
STRIP_WIDTH_MM = 25.0
"""At least eight thicknesses, so that the edges do not lift (plane strain). Common practice, no source."""


def bend_strip(feed: Feed) -> tuple[Part, ...]:
    """One strip for each sheet that the feed folds: the loop's, the can's wall, the choke's ring."""
    s, job = feed.sizes, feed.job
    strips: dict[tuple[str, str | None, float], float] = {}
    if s.sheet_mm is not None:
        strips[job.loop.metal, job.loop.temper, s.sheet_mm] = s.leg_bend_radius_mm
    if job.can.make in ("rolled", "folded"):
        sheets = (s.wall_mm, s.floor_mm) if s.choke else (s.wall_mm,)
        for t in sheets:
            strips.setdefault((job.can.metal, job.can.temper, t), fold_radius_mm(feed, t))
    loops = (job.loop.metal, job.loop.temper, s.sheet_mm)
    return tuple(
        _strip(feed, (metal, temper), t, radius, number, s.sheet_mm is not None and (metal, temper, t) != loops)
        for number, ((metal, temper, t), radius) in enumerate(strips.items(), start=1)
    )


def _strip(feed: Feed, stock: tuple[str, str | None], t: float, radius: float, number: int, can: bool) -> Part:
    k = chosen_k(feed.job.limits, tables.temper(*stock), radius, t, can=can)
    key = "can_test_bend_k" if can else "test_bend_k"
    bend = Bend(90.0, radius, k)
    leg = (STRIP_LENGTH_MM - allowance_mm(bend, t)) / 2
    first = box_face(STRIP_WIDTH_MM, leg)
    faces = (Face("leg a", first), Face("leg b", box_face(STRIP_WIDTH_MM, leg), (), "leg a", (0, 2), bend))
    sheet = FoldedSheet(faces, t)
    expected = (STRIP_LENGTH_MM + bend_deduction(90.0, radius, k, t)) / 2
    return metal_part(
        f"bend-strip-{number}",
        f"strip for a test bend, {t:g} mm",
        ("laser", "fold"),
        stock,
        feed,
        volume_mm3=folded_volume_mm3(sheet),
        sizes=(
            ("length_mm", STRIP_LENGTH_MM), ("width_mm", STRIP_WIDTH_MM), ("inside_radius_mm", radius),
            ("k_factor", k), ("expected_leg_mm", expected),
        ),
        flat=flat_pattern(sheet),
        thickness_mm=t,
        print_solid=once(partial(folded_solid, sheet, what="test strip")),
        notes=(
            f"fold by 90 degrees at the middle over R = {radius:g} mm; both legs should be {expected:.2f} mm outside",
            f"measure legs a and b outside: K = ((2 (R + t) - (a + b - {STRIP_LENGTH_MM:g})) 2/pi - R) / t; "
            f"enter it as limits.{key} with limits.bend_rule = 'test-bend'",
            rule_text(feed.job.limits),
        ),
    )  # fmt: skip
