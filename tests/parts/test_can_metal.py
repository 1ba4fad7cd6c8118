"""Tube and turned cans: volumes in closed form, radii read back from the solids, hole positions."""

from __future__ import annotations

import dataclasses
import math

import pytest

from fabgen.errors import GeometryError, NotCoveredError
from fabgen.parts.can_tube import can_tube
from fabgen.parts.can_turned import can_turned
from fabgen.parts.contour import area_mm2
from fabgen.parts.floor_plan import flange_plan
from fabgen.parts.records import Part
from fabgen.stock import tables
from tests.parts.feeds import with_cable
from tests.parts.volume import volume_mm3
from tests.samples import sample_feed


def density(part: Part) -> float:
    return tables.metal(part.material).density_kg_per_m3


def cylinder_radii(part: Part) -> set[float]:
    assert part.solid is not None
    faces = (f for f in part.solid().Faces() if f.geomType() == "CYLINDER")
    return {round(f._geomAdaptor().Cylinder().Radius(), 6) for f in faces}


@pytest.mark.parametrize("form", ["wire", "sheet"])
def test_turned_can_without_flange_has_its_closed_form_volume(form: str) -> None:
    feed = sample_feed(form, "turned", flange={"pattern": "none"}, drain_holes=False)
    sizes, (part,) = feed.sizes, can_turned(feed)
    outer = sizes.can_bore_mm / 2 + sizes.wall_mm
    whole = math.pi * outer**2 * (sizes.can_depth_mm + sizes.floor_mm)
    volume = whole - math.pi / 4 * sizes.can_bore_mm**2 * sizes.can_depth_mm
    screws = 3 * math.pi / 4 * 2.6**2
    if form == "wire":
        # One slot for coax and bar (4.2 wide), one hole for the other foot.
        between = (4.0 + max(3.58, 1.6 + 2 * 0.45)) / 2
        taken = screws + math.pi / 4 * 4.2**2 + 4.2 * between + math.pi / 4 * 4.2**2
    else:
        taken = screws + math.pi / 4 * 4.2**2 + 2 * math.pi / 4 * _foot_hole(feed.sizes.leg_width_mm) ** 2
    assert part.solid is not None
    assert part.solid().Volume() == pytest.approx(volume - taken * sizes.floor_mm, rel=1e-6)


def _foot_hole(width_mm: float) -> float:
    # ISO 273 medium, M4 to M2 (TO-16, read in a secondary page that quotes the source); the largest that leaves
    # one and a half thicknesses of 1.5 mm sheet on both sides (common practice).
    return next(d for d in (4.5, 3.4, 2.9, 2.4) if width_mm >= d + 2 * 1.5 * 1.5)


@pytest.mark.parametrize("pattern", ["circle", "square"])
def test_masses_of_turned_and_tube_cans_follow_from_their_solids(pattern: str) -> None:
    flange = {"pattern": pattern, "count": 8}
    turned = sample_feed("sheet", "turned", choke=True, flange=flange)
    tube = sample_feed("sheet", "tube", choke=True, flange=flange)
    for part in (*can_turned(turned), *can_tube(tube)):
        assert part.solid is not None
        assert part.mass_kg == pytest.approx(volume_mm3(part.solid()) * 1e-9 * density(part), rel=1e-6), part.key


def test_bores_are_the_simulated_ones() -> None:
    turned = sample_feed("wire", "turned", choke=True)
    can, choke = can_turned(turned)
    assert turned.sizes.can_bore_mm / 2 in cylinder_radii(can)
    assert turned.sizes.choke is not None
    assert turned.sizes.choke.bore_mm / 2 in cylinder_radii(choke)
    tube = sample_feed("wire", "tube")
    assert tube.sizes.can_bore_mm / 2 in cylinder_radii(can_tube(tube)[1])


def test_floor_of_a_tube_can_is_its_flat_pattern_thick() -> None:
    feed = sample_feed("sheet", "tube", flange={"pattern": "circle", "count": 6})
    floor = can_tube(feed)[0]
    assert floor.flat is not None
    assert floor.solid is not None
    area = area_mm2(floor.flat.outline) - sum(area_mm2(h) for h in floor.flat.holes)
    assert floor.solid().Volume() == pytest.approx(area * feed.sizes.floor_mm, rel=1e-9)
    box = floor.solid().BoundingBox(1e-6)
    assert (box.zmin, box.zmax) == pytest.approx((-feed.sizes.floor_mm, 0.0), abs=1e-5)


def test_tube_and_choke_stand_where_the_sizes_say() -> None:
    feed = sample_feed("wire", "tube", choke=True)
    parts = {p.key: p for p in can_tube(feed)}
    choke = feed.sizes.choke
    assert choke is not None
    assert parts["choke-tube"].places[0].z_mm == choke.floor_z_mm
    assert dict(parts["choke-tube"].sizes)["length_mm"] == choke.depth_mm
    assert dict(parts["can-tube"].sizes)["length_mm"] == feed.sizes.can_depth_mm


@pytest.mark.parametrize("count", [4, 6, 8, 12])
def test_flange_holes_lie_on_the_bolt_circle_clear_of_the_can(count: int) -> None:
    feed = sample_feed("wire", "turned", flange={"count": count, "bolt_circle_mm": 250.0})
    plan = flange_plan(feed, 223.6)
    assert plan is not None
    assert len(plan.holes) == count
    for hole in plan.holes:
        assert math.hypot(hole.x_mm, hole.y_mm) == pytest.approx(125.0)
        # ISO 273 medium, M4: 4.5 mm (TO-16, read in a secondary page that quotes the source).
        assert hole.diameter_mm == 4.5
        assert abs(hole.y_mm) > 5.0  # the notch on +x stays free


@pytest.mark.parametrize("count", [4, 8, 16])
def test_square_flange_has_its_holes_on_the_sides_of_a_square(count: int) -> None:
    feed = sample_feed("wire", "turned", flange={"pattern": "square", "count": count})
    plan = flange_plan(feed, 223.6)
    assert plan is not None
    side = plan.bolt_circle_mm / math.sqrt(2)
    points = {(round(h.x_mm, 6), round(h.y_mm, 6)) for h in plan.holes}
    assert len(points) == count
    for x, y in points:
        assert max(abs(x), abs(y)) == pytest.approx(side / 2, abs=1e-5)
        assert math.hypot(x, y) > 223.6 / 2 + 3.5  # half the head of an M4 socket screw, ISO 4762, from memory


def test_low_choke_is_turned_in_the_same_piece() -> None:
    plain = {"drain_holes": False, "flange": {"pattern": "none"}}
    feed = sample_feed("wire", "turned", frequency_mhz=5800.0, choke=True, **plain)
    (part,) = can_turned(with_cable(feed, coax="rg405"))
    sizes, choke = feed.sizes, feed.sizes.choke
    assert choke is not None
    assert part.solid is not None
    assert {sizes.can_bore_mm / 2, choke.bore_mm / 2} <= cylinder_radii(part)
    steps = {round(f.Center().z, 6) for f in part.solid().Faces() if f.geomType() == "PLANE" and f.normalAt().z > 0.5}
    assert steps == {0.0, sizes.can_depth_mm, choke.floor_z_mm, round(choke.floor_z_mm + choke.depth_mm, 6)}
    assert part.mass_kg == pytest.approx(part.solid().Volume() * 1e-9 * density(part), rel=1e-6)


def test_tube_can_with_a_flange_of_another_thickness_is_refused() -> None:
    feed = sample_feed("wire", "tube", flange={"thickness_mm": 5.0})
    with pytest.raises(NotCoveredError, match="make them equal"):
        can_tube(feed)


def test_choke_as_deep_as_the_can_stands_on_the_same_floor() -> None:
    feed = sample_feed("wire", "tube", choke=True)
    assert feed.sizes.choke is not None
    level = dataclasses.replace(feed.sizes, choke=dataclasses.replace(feed.sizes.choke, floor_z_mm=0.0))
    parts = {p.key: p for p in can_tube(dataclasses.replace(feed, sizes=level))}
    assert set(parts) == {"floor", "can-tube", "choke-tube"}
    assert dict(parts["floor"].sizes)["width_mm"] > feed.sizes.choke.bore_mm + 2 * feed.sizes.wall_mm
    close = dataclasses.replace(feed.sizes, choke=dataclasses.replace(feed.sizes.choke, floor_z_mm=1.0))
    with pytest.raises(GeometryError, match=r"give 0 for one floor, or 1\.5 or more"):
        can_tube(dataclasses.replace(feed, sizes=close))
