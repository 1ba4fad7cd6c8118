"""The volume of every solid of every make against its closed form, which also gives the part's mass.

The closed forms are derived from the sizes alone (areas, Pappus, sectors, elliptic integrals of tools through round
walls); the solids are integrated by the CAD kernel.
"""

from __future__ import annotations

import math

import pytest
import shapely
from scipy.integrate import dblquad, quad

from fabgen.parts.build import build_parts
from fabgen.parts.can_sheet import sheet_can
from fabgen.parts.curved_cuts import drilled_shell_mm3, round_end_corner_mm2, slotted_shell_mm3
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed
from fabgen.stock import tables
from tests.parts.feeds import small_feed, with_bed, with_cable
from tests.parts.volume import volume_mm3
from tests.samples import sample_feed

STAINLESS, SEMI_RIGID, PTFE, LEADED_BRASS = 7900.0, 5500.0, 2200.0, 8400.0
"""Densities that the masses of bought parts are stated with, kg/m3 (from memory)."""
LARGE = (500.0, 500.0, 500.0)
MAKES = ("rolled", "folded", "printed", "tube", "turned")


def density(part: Part, feed: Feed) -> float:
    bought = {
        "a2": STAINLESS, "ptfe": PTFE, "cuzn39pb3": LEADED_BRASS,
        "connector": tables.metal("cuzn37").density_kg_per_m3, feed.job.cable.coax: SEMI_RIGID,
    }
    if part.material in bought:
        return bought[part.material]
    if part.process[0] == "print":
        return tables.plastic(part.material).density_kg_per_m3
    return tables.metal(part.material).density_kg_per_m3


def off_closed_form(feed: Feed) -> dict[str, float]:
    """Relative difference of each part with a solid from its closed form."""
    found = {}
    for part in build_parts(feed):
        build = part.solid or part.print_solid
        if build is not None:
            closed = part.mass_kg / density(part, feed) * 1e9
            found[part.key] = volume_mm3(build()) / closed - 1
    return found


@pytest.mark.parametrize("form", ["wire", "sheet"])
@pytest.mark.parametrize("make", MAKES)
def test_every_part_has_its_closed_form_volume(form: str, make: str) -> None:
    metal = "cuzn37" if make in {"rolled", "folded"} else "en-aw-5754"
    feed = with_bed(sample_feed(form, make, choke=True, radome=True, metal=metal), LARGE)
    off = off_closed_form(feed)
    assert {k: v for k, v in off.items() if abs(v) > 1e-6} == {}
    assert {"loop", "connector", "coax-stub"} <= off.keys()


@pytest.mark.parametrize("connector", ["n-4", "sma-2"])
def test_other_connectors_and_their_spacers_too(connector: str) -> None:
    off = off_closed_form(with_cable(sample_feed("sheet", "tube"), connector=connector))
    assert ("connector-spacer" in off) == (connector == "n-4")
    assert {k: v for k, v in off.items() if abs(v) > 1e-6} == {}


def test_small_cans_have_their_volume_too() -> None:
    rolled = sample_feed("wire", "rolled", frequency_mhz=5760.0)
    wall = next(p for p in sheet_can(rolled) if p.key == "wall")
    assert wall.solid is not None
    assert volume_mm3(wall.solid()) == pytest.approx(wall.mass_kg / density(wall, rolled) * 1e9, rel=1e-6)
    off = off_closed_form(small_feed(choke=True, radome=True))
    assert {k: v for k, v in off.items() if abs(v) > 1e-6} == {}


def test_cuts_through_round_walls_by_another_integration() -> None:
    # Reference: adaptive integration of the same volumes in Cartesian coordinates.
    inner, outer, a = 9.0, 10.5, 2.0

    def thickness(y: float) -> float:
        return math.sqrt(outer**2 - y**2) - math.sqrt(inner**2 - y**2)

    hole, _ = dblquad(lambda z, y: thickness(y), -a, a, lambda y: -math.sqrt(a * a - y * y),
                      lambda y: math.sqrt(a * a - y * y))  # fmt: skip
    assert drilled_shell_mm3(inner, outer, 2 * a) == pytest.approx(hole, rel=1e-8)
    assert slotted_shell_mm3(inner, outer, 1.0, 3.0) == pytest.approx(quad(thickness, 1.0, 3.0)[0], rel=1e-10)


def test_rounding_between_an_arc_and_a_plane_by_polygons() -> None:
    # An arc of radius 10 and the plane y = 3, rounded by 1, as fine polygons.
    end, half, r = 10.0, 3.0, 1.0
    x0 = math.sqrt((end - r) ** 2 - (half - r) ** 2)
    plate = shapely.Point(0, 0).buffer(end, quad_segs=50_000).intersection(shapely.box(0, 0, 20, half))
    disc = shapely.Point(x0, half - r).buffer(r, quad_segs=50_000)
    hull = shapely.union_all([disc, shapely.Polygon([(0, 0), (x0, half), (x0, half - r)])])
    touch = end / (end - r)
    far = 2 * x0 * touch, 2 * (half - r) * touch
    beside = shapely.Polygon([(x0, half - r), (x0, 20.0), (far[0], 20.0), far])
    taken = plate.intersection(beside).difference(hull).area
    assert round_end_corner_mm2(end, half, r) == pytest.approx(taken, rel=1e-6)
