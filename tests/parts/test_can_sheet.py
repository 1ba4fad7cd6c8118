"""Rolled and folded cans: holes that meet, equal flats, neutral-fibre length, seam in the E-plane."""

from __future__ import annotations

import dataclasses
import itertools
import math
from functools import cache
from pathlib import Path
from typing import Any

import pytest
import shapely

from fabgen.errors import FabgenError, GeometryError, NotCoveredError
from fabgen.parts import kernel
from fabgen.parts.can_folded import can_folded
from fabgen.parts.can_printed import SKIRT_MM
from fabgen.parts.can_rolled import can_rolled
from fabgen.parts.can_sheet import can_wall, choke_wall, sheet_can
from fabgen.parts.choke_ring import folded_ring
from fabgen.parts.contour import Circle, sampled
from fabgen.parts.folding import Frame, frames
from fabgen.parts.kernel import placed
from fabgen.parts.nesting import nest
from fabgen.parts.records import Part
from fabgen.parts.strip_path import outward
from fabgen.parts.wall_strip import Wall, tab_holes, tab_tip_mm
from fabgen.sizing.records import Feed
from tests.parts.volume import volume_mm3
from tests.samples import sample_feed

MAKES: dict[str, dict[str, Any]] = {
    "rolled": {"make": "rolled", "choke": True},
    "rolled brass": {"make": "rolled", "metal": "cuzn37", "choke": True},
    "rolled small": {"make": "rolled", "frequency_mhz": 5760.0},
    "folded 6": {"make": "folded", "flats": 6, "choke": True},
    "folded 8": {"make": "folded", "metal": "cuzn37"},
    "folded 12": {"make": "folded", "flats": 12},
}
QUICK = ("rolled brass", "folded 8")
SOLIDS = [pytest.param(name, marks=() if name in QUICK else pytest.mark.slow) for name in MAKES]


@cache
def feed_of(name: str) -> Feed:
    kind = dict(MAKES[name])
    return sample_feed("wire", kind.pop("make"), **kind)


@cache
def parts_of(name: str) -> dict[str, Part]:
    return {part.key: part for part in sheet_can(feed_of(name))}


@cache
def solid_of(name: str, key: str) -> Any:
    build = parts_of(name)[key].solid
    assert build is not None
    return build()


def cylinders(solid: Any, diameter: float) -> list[tuple[tuple[float, float, float], tuple[float, float, float]]]:
    """Axis points and directions of the solid's cylindrical faces of that diameter."""
    found = []
    for face in solid.Faces():
        if face.geomType() == "CYLINDER":
            surface = face._geomAdaptor().Cylinder()
            if abs(2 * surface.Radius() - diameter) < 1e-6:
                at, along = surface.Axis().Location(), surface.Axis().Direction()
                found.append(((at.X(), at.Y(), at.Z()), (along.X(), along.Y(), along.Z())))
    return found


@pytest.mark.parametrize("name", SOLIDS)
def test_holes_of_tabs_and_floor_meet(name: str) -> None:
    """The tabs' holes in the wall's B-rep against the circles of the floor's flat pattern, within 0.05 mm."""
    wall = can_wall(feed_of(name))
    flat = parts_of(name)["floor"].flat
    assert flat is not None
    upright = [a for a, d in cylinders(solid_of(name, "wall"), wall.tab.hole_mm) if abs(d[2]) > 0.99]
    circles = [h for h in flat.holes if isinstance(h, Circle) and h.diameter_mm == wall.tab.hole_mm]
    assert len({(round(x, 3), round(y, 3)) for x, y, _ in upright}) == len(wall.tabs_mm)
    for x, y, _ in upright:
        assert min(math.hypot(x - h.x_mm, y - h.y_mm) for h in circles) < 0.05


@pytest.mark.parametrize("name", SOLIDS)
def test_hole_rows_of_the_seam_meet(name: str) -> None:
    """Each height has a hole in the inner and one in the outer layer; their axes agree within 0.05 mm."""
    wall = can_wall(feed_of(name))
    level = [(a, d) for a, d in cylinders(solid_of(name, "wall"), wall.seam.hole_mm) if abs(d[2]) < 0.01]
    for z in wall.seam.heights_mm:
        inner = _spot(wall, wall.seam.inner_row_mm)
        outer = _spot(wall, wall.seam.outer_row_mm)
        at_height = [(a, d) for a, d in level if abs(a[2] - z) < 1e-6]
        near = [(a, d) for a, d in at_height if _off_axis(a, d, inner) < 0.05 and _off_axis(a, d, outer) < 0.05]
        assert len(near) >= 2


def _spot(wall: Wall, along: float) -> tuple[float, float]:
    return wall.path.at(along)[0]


def _off_axis(at: tuple[float, ...], along: tuple[float, ...], spot: tuple[float, float]) -> float:
    return abs((spot[0] - at[0]) * along[1] - (spot[1] - at[1]) * along[0])


@pytest.mark.parametrize("name", ["rolled", "rolled brass", "folded 6"])
def test_holes_of_the_choke_ring_meet_the_cans_wall_and_the_chokes_tabs(name: str) -> None:
    feed = feed_of(name)
    wall, outer = can_wall(feed), choke_wall(feed)
    assert outer is not None
    assert feed.sizes.choke is not None
    base = Frame((0.0, 0.0, feed.sizes.choke.floor_z_mm - feed.sizes.floor_mm / 2), (1, 0, 0), (0, 1, 0), (0, 0, 1))
    sheet = folded_ring(feed, wall, outer)
    at = frames(sheet, base)
    tabs = [f for f in sheet.faces if f.parent]
    assert len(tabs) == len(wall.holes) >= 3
    for tab in tabs:
        hole = tab.holes[0]
        assert isinstance(hole, Circle)
        x, y, z = at[tab.name].at(hole.x_mm, hole.y_mm)
        gaps = []
        for other in wall.holes:
            (px, py), heading = wall.path.at(other.along_mm)
            ox, oy = outward(heading)
            gaps.append(math.hypot((x - px) * oy - (y - py) * ox, z - other.height_mm))
        assert min(gaps) < 0.05
    ring = {(round(h.x_mm, 6), round(h.y_mm, 6)) for h in sheet.faces[0].holes if isinstance(h, Circle)}
    assert ring == {(round(h.x_mm, 6), round(h.y_mm, 6)) for h in tab_holes(outer)}


@pytest.mark.parametrize("name", SOLIDS)
def test_every_solid_is_sound_and_has_its_closed_form_volume(name: str) -> None:
    """Mass is computed in closed form: from the flat, or for a rolled wall from its round pieces."""
    from fabgen.stock import tables

    for part in parts_of(name).values():
        if part.solid is None or part.process == ("buy",):
            continue
        solid = solid_of(name, part.key)
        volume = part.mass_kg / tables.metal(part.material).density_kg_per_m3 * 1e9
        assert solid.isValid()
        assert len(solid.Solids()) == 1
        assert volume_mm3(solid) == pytest.approx(volume, rel=1e-6)


@pytest.mark.parametrize("name", [pytest.param("rolled", marks=pytest.mark.slow), "rolled brass"])
def test_cylinder_radii_read_back_from_step_are_r_and_r_plus_t(name: str, tmp_path: Path) -> None:
    import cadquery as cq

    path = tmp_path / "wall.step"
    cq.exporters.export(cq.Workplane(solid_of(name, "wall")), str(path))
    faces = cq.importers.importStep(str(path)).faces("%CYLINDER").vals()
    radii = {round(f._geomAdaptor().Cylinder().Radius(), 6) for f in faces if _on_axis(f)}
    s = feed_of(name).sizes
    assert {s.can_bore_mm / 2, s.can_bore_mm / 2 + s.wall_mm} <= radii


def _on_axis(face: Any) -> bool:
    axis = face._geomAdaptor().Cylinder().Axis()
    return math.hypot(axis.Location().X(), axis.Location().Y()) < 1e-6 and abs(axis.Direction().Z()) > 0.99


def test_rolled_strip_is_as_long_as_its_neutral_fibre() -> None:
    """pi (bore + t) round the middle of the sheet, plus step and overlap, from the flat's bounding box."""
    feed = feed_of("rolled")
    s, wall = feed.sizes, can_wall(feed)
    flat = parts_of("rolled")["wall"].flat
    assert flat is not None
    length = shapely.Polygon(sampled(flat.outline)).bounds[2]
    overlap = wall.path.stretches[-1].flat_mm
    assert wall.path.flat_mm == pytest.approx(length, abs=1e-9)
    # The step takes a little more than the arc that it stands over: two bends of 42 degrees over t.
    assert length - overlap == pytest.approx(math.pi * (s.can_bore_mm + s.wall_mm), abs=1.0)


@pytest.mark.parametrize("name", MAKES)
def test_seam_is_in_the_e_plane(name: str) -> None:
    """phi = 90 degrees at the strip's beginning; with six flats beside the corner that lies there."""
    x, y = can_wall(feed_of(name)).path.at(0.0)[0]
    off = abs(math.degrees(math.atan2(y, x)) - 90.0)
    assert y > 0
    assert off < (5.0 if name == "folded 6" else 1e-6)


@pytest.mark.parametrize("name", ["folded 6", "folded 8", "folded 12"])
def test_flats_are_equal_and_lie_at_half_the_bore(name: str) -> None:
    feed = feed_of(name)
    wall, s = can_wall(feed), feed.sizes
    starts = wall.path.starts_mm()
    folds = [i for i, p in enumerate(wall.path.stretches) if p.radius_mm and p.sweep_deg == 360.0 / s.can_flats]
    assert len(folds) == s.can_flats
    middles = [starts[i] + wall.path.stretches[i].flat_mm / 2 for i in folds]
    pitches = [b - a for a, b in itertools.pairwise(middles)]
    assert max(pitches) - min(pitches) < 1e-9
    for i in folds[:-1]:
        (x, y), heading = wall.path.stretches[i + 1].at(0.5)
        ox, oy = outward(heading)
        assert x * ox + y * oy == pytest.approx((s.can_bore_mm + s.wall_mm) / 2)
        # One flat's middle lies on +x, so all middles are at multiples of the corner's angle.
        assert (math.degrees(math.atan2(oy, ox)) / (360.0 / s.can_flats)) % 1.0 == pytest.approx(0.0, abs=1e-6) or (
            math.degrees(math.atan2(oy, ox)) / (360.0 / s.can_flats)
        ) % 1.0 == pytest.approx(1.0, abs=1e-6)


@pytest.mark.parametrize("name", SOLIDS)
def test_wall_stands_on_the_floor_and_reaches_the_rim(name: str) -> None:
    feed = feed_of(name)
    box = solid_of(name, "wall").BoundingBox()
    assert (box.zmin, box.zmax) == pytest.approx((0.0, feed.sizes.can_depth_mm), abs=1e-6)
    assert tab_tip_mm(can_wall(feed)) < 0


def test_floor_carries_marks_bolts_connector_and_drains() -> None:
    feed = feed_of("rolled")
    flat = parts_of("rolled")["floor"].flat
    assert flat is not None
    ring = shapely.Polygon(sampled(flat.outline, 0.001))
    width = dict(parts_of("rolled")["floor"].sizes)["flange_width_mm"]
    for x, y in ((width / 2 - 0.5, 0.0), (0.0, width / 2 - 0.5), (0.0, -width / 2 + 0.5)):
        assert not ring.contains(shapely.Point(x, y))
    assert ring.contains(shapely.Point(-width / 2 + 0.1, 0.0))
    circles = [h for h in flat.holes if isinstance(h, Circle)]
    bolts = [h for h in circles if h.diameter_mm == 4.5]
    # M4 medium clearance hole 4.5 mm, ISO 273 (TO-16, read in a secondary page).
    assert len(bolts) == feed.job.can.flange.count
    assert all(shapely.Point(h.x_mm, h.y_mm).distance(ring.exterior) > h.diameter_mm / 2 + 1.5 for h in circles)


@pytest.mark.parametrize("name", [case for case in SOLIDS if case.values != ("rolled small",)])
def test_the_walls_drains_are_open_and_lie_in_the_corner_on_all_four_sides(name: str) -> None:
    """Whichever side is lowest for the polarisation, a hole of 3 mm is there; water under 1.5 mm or 1.5 t stays."""
    import cadquery as cq

    wall = can_wall(feed_of(name))
    t = wall.path.thickness_mm
    angles = []
    for hole in wall.drains:
        (x, y), heading = wall.path.at(hole.along_mm)
        angles.append(math.degrees(math.atan2(y, x)))
        assert hole.height_mm - hole.diameter_mm / 2 == pytest.approx(max(1.0, 1.5 * t))
        ox, oy = outward(heading)
        ends = [cq.Vector(x + k * ox, y + k * oy, hole.height_mm) for k in (-5.0, 5.0)]
        free = cq.Edge.makeLine(*ends).distance(solid_of(name, "wall"))
        assert free == pytest.approx(hole.diameter_mm / 2, abs=0.02)
    near = 25.0
    for side in (0.0, 90.0, 180.0, -90.0):
        assert min(abs((a - side + 180.0) % 360.0 - 180.0) for a in angles) < near


@pytest.mark.parametrize("name", MAKES)
def test_drains_keep_clear_of_folds_edges_lap_and_choke_tabs(name: str) -> None:
    """2 t + r to a fold, 1.5 t to an edge (SB-42, SB-44: design guides, read in a secondary page)."""
    feed, wall = feed_of(name), can_wall(feed_of(name))
    flat = parts_of(name)["wall"].flat
    assert flat is not None
    t, edge = wall.path.thickness_mm, shapely.Polygon(sampled(flat.outline, 0.001)).exterior
    others = [h for h in flat.holes if isinstance(h, Circle) and h.diameter_mm != 3.0]
    for hole in wall.drains:
        spot = shapely.Point(hole.along_mm, hole.height_mm)
        assert Circle(hole.along_mm, hole.height_mm, 3.0) in flat.holes
        assert edge.distance(spot) - 1.5 > 1.5 * t - 0.01
        for fold in flat.folds:
            least = 1.5 + 2 * t + fold.inside_radius_mm
            assert shapely.LineString([fold.start, fold.end]).distance(spot) > least - 1e-6
        assert min(spot.distance(shapely.Point(h.x_mm, h.y_mm)) - h.diameter_mm / 2 for h in others) > 1.5 + t
        assert wall.path.stretches[-1].flat_mm + 1.5 < hole.along_mm < wall.seam.step_at_mm - 1.5
        # An opening of 3 mm is far below cut-off: under a fiftieth of a wavelength, or a tenth at the highest.
        assert hole.diameter_mm < feed.job.wavelength_mm / 10


def test_a_choke_open_upwards_drains_too_and_drains_may_be_left_out() -> None:
    outer = choke_wall(feed_of("rolled brass"))
    assert outer is not None
    assert len(outer.drains) == 4
    dry = sample_feed("wire", "rolled", drain_holes=False)
    assert can_wall(dry).drains == ()
    notes = {p.key: " ".join(p.notes) for p in sheet_can(dry)}
    assert "drain" not in notes["wall"]
    assert "drain" in " ".join(parts_of("rolled")["wall"].notes)


def test_tabs_too_close_for_a_drain_leave_it_to_the_floor() -> None:
    """In a can of 55 mm bore the reliefs beside the tabs are closer to each other than a hole with its edges."""
    assert can_wall(feed_of("rolled small")).drains == ()


def test_connectors_of_the_sma_table_have_their_screw_pitch_in_the_floor() -> None:
    """SMA 4-hole flange: 8.64 mm pitch (CN-05, MIL-STD-348 drawings, partly read)."""
    feed = sample_feed("sheet", "rolled")
    floor = next(p for p in sheet_can(feed) if p.key == "floor")
    assert floor.flat is not None
    small = [(h.x_mm, h.y_mm) for h in floor.flat.holes if isinstance(h, Circle) and h.diameter_mm == 2.6]
    gaps = sorted(math.dist(a, b) for i, a in enumerate(small) for b in small[i + 1:])
    assert gaps[:2] == pytest.approx([8.64] * 2, abs=0.01)


@pytest.mark.parametrize(
    ("make", "sizes", "error"),
    [
        ("rolled", {"can_depth_mm": 12.0}, GeometryError),
        ("rolled", {"can_flats": 8}, GeometryError),
        ("folded", {"can_flats": 0}, GeometryError),
        ("folded", {"can_bore_mm": 24.0}, FabgenError),
    ],
)
def test_cans_that_cannot_be_made_are_refused(make: str, sizes: dict[str, float], error: type[Exception]) -> None:
    feed = sample_feed("wire", make)
    feed = dataclasses.replace(feed, sizes=dataclasses.replace(feed.sizes, **sizes))
    with pytest.raises(error):
        (can_rolled if make == "rolled" else can_folded)(feed)


def test_a_flange_of_another_thickness_is_not_covered() -> None:
    feed = sample_feed("wire", "rolled", flange={"thickness_mm": 4.0})
    with pytest.raises(NotCoveredError, match="one sheet"):
        can_rolled(feed)


@pytest.mark.parametrize("name", ["rolled", "rolled brass", "folded 6"])
def test_every_joint_hole_has_its_screw_and_nut(name: str) -> None:
    feed, parts = feed_of(name), parts_of(name)
    wall, outer = can_wall(feed), choke_wall(feed)
    assert outer is not None
    wanted = {
        "wall": len(wall.tabs_mm), "choke": len(outer.tabs_mm), "choke-ring": len(wall.holes),
        "seam": len(wall.seam.heights_mm), "choke-seam": len(outer.seam.heights_mm),
    }  # fmt: skip
    for key, count in wanted.items():
        assert parts[f"screw-{key}"].quantity == parts[f"nut-{key}"].quantity == count
        assert len(parts[f"screw-{key}"].places) == len(parts[f"nut-{key}"].places) == count


@pytest.mark.parametrize("name", ["rolled brass", pytest.param("folded 6", marks=pytest.mark.slow)])
def test_joint_screws_seat_on_the_sheet_and_cut_into_nothing(name: str) -> None:
    parts = parts_of(name)
    sheets = {key: solid_of(name, key) for key in ("floor", "wall", "choke-ring", "choke-wall")}
    held = {
        "wall": ("wall", "floor"), "choke": ("choke-wall", "choke-ring"), "choke-ring": ("wall", "choke-ring"),
        "seam": ("wall", "wall"), "choke-seam": ("choke-wall", "choke-wall"),
    }  # fmt: skip
    for key, (under_head, under_nut) in held.items():
        screw, nut = parts[f"screw-{key}"], parts[f"nut-{key}"]
        bodies = placed(screw.solid(), screw.places[0]), placed(nut.solid(), nut.places[0])
        box = bodies[0].fuse(bodies[1]).BoundingBox()
        near = kernel.box((box.xmin, box.ymin, box.zmin), (box.xmax, box.ymax, box.zmax))
        local = {sheet: sheets[sheet].intersect(near) for sheet in {under_head, under_nut}}
        for body, sheet in zip(bodies, (under_head, under_nut), strict=True):
            # A flat nut touches a rolled wall along a line, a flat head inside it at two points of its rim.
            assert body.distance(local[sheet]) < 1e-3, (key, sheet)
            assert all(body.intersect(other).Volume() < 1e-3 for other in local.values()), key
        assert bodies[0].intersect(bodies[1]).Volume() < 1e-3, key


def test_seam_nuts_stay_below_the_skirt_of_a_radome_cap() -> None:
    feed = sample_feed("wire", "rolled", radome=True)
    parts = {part.key: part for part in can_rolled(feed)}
    top = max(placed(parts["nut-seam"].solid(), p).BoundingBox().zmax for p in parts["nut-seam"].places)
    assert top < feed.sizes.can_depth_mm - SKIRT_MM


HALVES: dict[str, dict[str, Any]] = {
    "rolled": {"make": "rolled", "metal": "cuzn37", "choke": True},
    "folded 6": {"make": "folded", "flats": 6},
    "folded 8": {"make": "folded", "flats": 8, "metal": "cuzn37"},
    "folded 12": {"make": "folded", "flats": 12},
}


@cache
def halved(name: str, sheet_mm: tuple[float, float] = (600.0, 600.0)) -> Feed:
    kind = dict(HALVES[name])
    feed = sample_feed("wire", kind.pop("make"), **kind)
    limits = feed.job.limits.model_copy(update={"sheet_mm": sheet_mm})
    return dataclasses.replace(feed, job=feed.job.model_copy(update={"limits": limits}))


def test_a_wall_is_halved_only_where_the_sheet_is_too_short_for_it() -> None:
    """The same rule as in the estimate of sheets: the strip and 5 mm at both ends."""
    whole = can_wall(halved("rolled", (1000.0, 2000.0)))
    just = whole.path.flat_mm + 10.0
    assert whole.copies == 1
    assert can_wall(halved("rolled", (300.0, just + 0.01))).copies == 1
    half = can_wall(halved("rolled", (300.0, just - 0.01)))
    assert half.copies == 2
    lap = half.path.stretches[-1].flat_mm
    assert 2 * (half.path.flat_mm - lap) == pytest.approx(whole.path.flat_mm - lap, abs=1.0)
    parts = sheet_can(halved("rolled"))
    assert {p.key: p.quantity for p in parts if "wall" in p.key and p.flat} == {"wall": 2, "choke-wall": 2}
    assert all(need.too_large == () for need in nest(parts, halved("rolled").job.limits))


@pytest.mark.parametrize("name", ["rolled", pytest.param("folded 6", marks=pytest.mark.slow), "folded 8",
                                  pytest.param("folded 12", marks=pytest.mark.slow)])  # fmt: skip
def test_two_halves_meet_at_both_seams_and_on_the_floor(name: str) -> None:
    """Hole pairs in 3-D within 0.05 mm (the issue's figure), both seams in the E-plane, halves clear of each other."""
    feed = halved(name)
    wall, parts = can_wall(feed), {p.key: p for p in sheet_can(feed)}
    part = parts["wall"]
    assert part.solid is not None
    assert [p.turn_deg for p in part.places] == [0.0, 180.0]
    one, other = (placed(part.solid(), p) for p in part.places)
    assert one.isValid()
    assert one.intersect(other).Volume() < 1e-6
    for sign, first, second in ((1.0, one, other), (-1.0, other, one)):
        x, y = (sign * v for v in _spot(wall, wall.seam.inner_row_mm))
        assert y * sign > 0
        assert abs(x) < (0.07 if name != "folded 6" else 0.2) * feed.sizes.can_bore_mm
        for z in wall.seam.heights_mm:
            for body in (first, second):
                assert any(_is_hole_at(face, (x, y, z), wall.seam.hole_mm) for face in body.Faces())
    upright = [a for body in (one, other) for a, d in cylinders(body, wall.tab.hole_mm) if abs(d[2]) > 0.99]
    flat = parts["floor"].flat
    assert flat is not None
    circles = [h for h in flat.holes if isinstance(h, Circle) and h.diameter_mm == wall.tab.hole_mm]
    assert len({(round(x, 3), round(y, 3)) for x, y, _ in upright}) == 2 * len(wall.tabs_mm) <= len(circles)
    for x, y, _ in upright:
        assert min(math.hypot(x - h.x_mm, y - h.y_mm) for h in circles) < 0.05
    for kind, count in (("seam", 2 * len(wall.seam.heights_mm)), ("wall", 2 * len(wall.tabs_mm))):
        assert parts[f"screw-{kind}"].quantity == len(parts[f"screw-{kind}"].places) == count


def test_a_choke_ring_about_two_halves_clears_both_laps_and_meets_all_holes() -> None:
    feed = halved("rolled")
    wall, parts = can_wall(feed), {p.key: p for p in sheet_can(feed)}
    ring, half = parts["choke-ring"], parts["wall"]
    assert ring.solid is not None
    assert half.solid is not None
    for place in half.places:
        assert placed(half.solid(), place).intersect(ring.solid()).Volume() < 1e-6
    level = [(a, d) for a, d in cylinders(ring.solid(), wall.tab.hole_mm) if abs(d[2]) < 0.01]
    spots = [(sign * x, sign * y) for x, y in (_spot(wall, h.along_mm) for h in wall.holes) for sign in (1.0, -1.0)]
    assert len(spots) == parts["screw-choke-ring"].quantity >= 4
    for spot in spots:
        assert min(_off_axis(a, d, spot) for a, d in level) < 0.05


def test_screws_of_two_halves_seat_on_the_sheet_and_cut_into_nothing() -> None:
    parts = {p.key: p for p in sheet_can(halved("folded 8"))}
    walls = [placed(parts["wall"].solid(), p) for p in parts["wall"].places]  # type: ignore[misc]
    for key in ("seam", "wall"):
        for kind in ("screw", "nut"):
            part = parts[f"{kind}-{key}"]
            assert part.solid is not None
            for place in (part.places[0], part.places[-1]):
                body = placed(part.solid(), place)
                near = [wall.intersect(kernel.box(*_around(body))) for wall in walls]
                assert all(body.intersect(w).Volume() < 1e-3 for w in near)
                assert min(body.distance(w) for w in near if w.Volume() > 0) < (1e-3 if key == "seam" else 3.0)


def _is_hole_at(face: Any, spot: tuple[float, float, float], diameter: float) -> bool:
    """A level hole whose face lies within 5 mm of the spot and whose axis passes it within 0.05 mm."""
    if face.geomType() != "CYLINDER" or face.Center().sub(type(face.Center())(*spot)).Length > 5.0:
        return False
    surface = face._geomAdaptor().Cylinder()
    at, along = surface.Axis().Location(), surface.Axis().Direction()
    near = _off_axis((at.X(), at.Y()), (along.X(), along.Y()), spot[:2]) < 0.05 and abs(at.Z() - spot[2]) < 0.05
    return near and abs(2 * surface.Radius() - diameter) < 1e-6 and abs(along.Z()) < 0.01


def _around(body: Any) -> tuple[tuple[float, float, float], tuple[float, float, float]]:
    box = body.BoundingBox()
    return (box.xmin - 3, box.ymin - 3, box.zmin - 3), (box.xmax + 3, box.ymax + 3, box.zmax + 3)


def test_a_sheet_too_short_for_halves_is_a_stop_with_the_sheet_that_does() -> None:
    from fabgen.checks.run import run_checks
    from fabgen.parts.build import build_parts

    fits, short = halved("rolled"), halved("rolled", (320.0, 320.0))
    assert not [f for f in run_checks(fits, build_parts(fits)) if f.code == "SHEET-402"]
    found = [f for f in run_checks(short, build_parts(short)) if f.code == "SHEET-402" and f.part == "wall"]
    assert [f.severity for f in found] == ["stop"]
    assert "limits.sheet_mm" in found[0].cure
    assert float(found[0].cure.split()[4]) < 400.0


def test_a_metal_that_solders_needs_fewer_tabs() -> None:
    """Joints that are not soldered are fixed at most a tenth of a wavelength apart (common practice, no source)."""
    bare, soldered = can_wall(feed_of("rolled")), can_wall(feed_of("rolled brass"))
    gaps = [b - a for a, b in zip(bare.tabs_mm, bare.tabs_mm[1:], strict=False)]
    assert max(gaps) <= 0.1 * feed_of("rolled").job.wavelength_mm + 1e-9
    assert len(soldered.tabs_mm) * 2 < len(bare.tabs_mm)
