"""Drawn equals simulated: surfaces inside the metal, and the true solid computes to the same feed."""

from __future__ import annotations

import itertools
import math
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from fabgen.checks.solid import _off_holes, compare_solid, containment, drawn_can, drawn_loop, solid_findings
from fabgen.errors import GeometryError
from fabgen.fields.mesh import CHOKE, CROSSING, FLOOR, LOOP, WALL, Mesh
from fabgen.fields.solid_can import DrawnCan, can_faces
from fabgen.fields.solid_mesh import solid_mesh
from fabgen.parts import kernel
from fabgen.parts.build import build_parts
from fabgen.parts.can_section import can_section
from fabgen.parts.can_sheet import can_wall
from fabgen.parts.floor_plan import floor_bottom_mm
from fabgen.parts.loop_wire import axis_length_mm, wire_pieces
from fabgen.writers.step import write_step
from tests.samples import sample_feed


@pytest.mark.slow
@pytest.mark.parametrize(("form", "make"), [("wire", "rolled"), ("sheet", "printed")])
def test_simulated_surfaces_lie_in_the_drawn_metal(form: str, make: str) -> None:
    feed = sample_feed(form, make)
    groups = containment(feed, build_parts(feed))
    assert [g.name for g in groups] == ["loop and bars", "floor", "wall"]
    assert all(g.passed for g in groups)
    off = replace(feed, sizes=replace(feed.sizes, loop_height_mm=feed.sizes.loop_height_mm + 3.0))
    assert not containment(off, build_parts(feed))[0].passed


@pytest.mark.slow
@pytest.mark.thorough
@pytest.mark.parametrize(
    ("form", "make", "choke"),
    [
        ("wire", "rolled", False), ("sheet", "printed", False), ("wire", "tube", True), ("wire", "folded", True),
        ("sheet", "turned", False),
    ],
)
def test_the_drawn_solid_computes_to_the_strip_model(form: str, make: str, choke: bool, tmp_path: Path) -> None:
    # the reference is our own solver on the closed surface of the drawn loop, in place of strips
    feed = sample_feed(form, make, choke=choke)
    parts = build_parts(feed)
    write_step(next(p for p in parts if p.key == "loop"), tmp_path / "loop.step")
    found = compare_solid(feed, parts, tmp_path / "loop.step")
    assert found.can == ("the faces of the lining" if make == "printed" else "the drawn can with its flange")
    assert abs(found.model_ohm - found.solid_ohm) < 4.0
    assert abs(found.resonance_shift_mhz) < 0.01 * feed.job.target.frequency_mhz
    # R alone, as after trimming the capacitor: no worse than 25 dB apart from the model's
    assert abs((found.solid_ohm.real - found.model_ohm.real) / (found.solid_ohm.real + 50)) < 0.056


def test_points_in_a_drain_of_the_wall_are_left_out() -> None:
    feed = sample_feed("wire", "rolled")
    drain = can_wall(feed).drains[0]
    (x, y), _ = can_wall(feed).path.at(drain.along_mm)
    scale = feed.sizes.can_bore_mm / 2 / math.hypot(x, y)
    inner = np.array([x * scale, y * scale, drain.height_mm])
    points = inner + np.array([[0.0, 0.0, up] for up in (0.0, 1.4, 2.0)])
    assert len(_off_holes(points, feed)) == 1


@pytest.mark.slow
def test_each_surface_is_measured_against_its_own_part() -> None:
    feed = sample_feed("wire", "turned", choke=True)
    parts = build_parts(feed)
    groups = {g.name: g for g in containment(feed, parts)}
    assert all(g.passed for g in groups.values())
    assert set(groups) == {"loop and bars", "floor", "wall", "choke wall"}
    assert feed.sizes.choke is not None
    # 3 mm on the bore are 1.5 mm on the radius: into the metal or, for a smaller bore, out of it.
    small = replace(feed.sizes.choke, bore_mm=feed.sizes.choke.bore_mm - 3.0)
    off = {g.name: g for g in containment(replace(feed, sizes=replace(feed.sizes, choke=small)), parts)}
    assert off["choke wall"].gap_mm == pytest.approx(1.5, abs=1e-6)
    assert off["wall"].gap_mm == groups["wall"].gap_mm


@pytest.mark.slow
@pytest.mark.thorough
def test_findings_tell_the_comparison_and_a_wall_off_its_place(tmp_path: Path) -> None:
    feed = sample_feed("wire", "folded", choke=True)
    parts = build_parts(feed)
    write_step(next(p for p in parts if p.key == "loop"), tmp_path / "loop.step")
    (note,) = solid_findings(feed, parts, tmp_path / "loop.step")
    assert (note.code, note.severity) == ("CONS-302", "note")
    assert "unknowns" in note.message
    off = replace(feed, sizes=replace(feed.sizes, can_bore_mm=feed.sizes.can_bore_mm - 3.0))
    codes = [(f.code, f.part) for f in solid_findings(off, parts, tmp_path / "loop.step")]
    assert ("CONS-301", "wall") in codes


@pytest.mark.parametrize("flats", [0, 6, 12])
@pytest.mark.parametrize("floor_mm", [None, 0.0, 15.0])
def test_meshed_inner_faces_have_their_area(flats: int, floor_mm: float | None, tmp_path: Path) -> None:
    feed = sample_feed("wire", "printed")
    can = DrawnCan(220.0, 60.0, flats)
    if floor_mm is not None:
        can = replace(can, choke_bore_mm=300.0, choke_floor_mm=floor_mm, choke_depth_mm=40.0)
    write_step(next(p for p in build_parts(feed) if p.key == "loop"), tmp_path / "loop.step")
    area = areas_mm2(solid_mesh(drawn_loop(feed, tmp_path / "loop.step", can)))
    # Circumference and area over those of the circle of the same bore across flats.
    ratio = flats / math.pi * math.tan(math.pi / flats) if flats else 1.0
    limit = 1e-6 if flats else 6e-3
    foot = math.pi / 4 * 4.0**2
    ring = ratio * math.pi / 2 * (150.0**2 - 110.0**2) if floor_mm is not None else 0.0
    floor = ratio * math.pi * 110.0**2 / 2 + (ring if floor_mm == 0.0 else 0.0)
    assert area[FLOOR] + foot == pytest.approx(floor, rel=limit, abs=2.0)
    assert area[WALL] == pytest.approx(ratio * math.pi * 110.0 * 60.0, rel=limit)
    if floor_mm is not None:
        walls = ratio * math.pi * 150.0 * 40.0 + (ring if floor_mm else 0.0)
        assert area[CHOKE] == pytest.approx(walls, rel=limit)
    # Wire of 4 mm: pi d over half the length of its axis above the floor.
    below = -floor_bottom_mm(feed)
    axis = sum(axis_length_mm(piece) for piece in wire_pieces(feed)) / 2 - below
    assert area[LOOP] == pytest.approx(math.pi * 4.0 * axis, rel=0.03)


def areas_mm2(mesh: Mesh) -> dict[int, float]:
    assert np.isfinite(mesh.vertices_m).all()
    crossing = mesh.vertices_m[np.unique(mesh.triangles[mesh.label == CROSSING])]
    assert crossing[:, 1].min() == 0.0
    return {label: 1e6 * mesh.areas_m2()[mesh.label == label].sum() for label in (FLOOR, WALL, CHOKE, LOOP)}


@pytest.mark.parametrize(
    ("make", "can"),
    [("turned", {"choke": True}), ("tube", {}), pytest.param("folded", {"flats": 6}, marks=pytest.mark.slow)],
)
def test_drawn_cans_of_metal_have_the_skin_of_their_section(make: str, can: dict[str, Any], tmp_path: Path) -> None:
    feed = sample_feed("wire", make, **can)
    parts = build_parts(feed)
    drawn, told = drawn_can(feed, parts)
    assert told == "the drawn can with its flange"
    sizes = feed.sizes
    rim, wall = sizes.can_depth_mm, sizes.can_bore_mm / 2
    # By hand: inner face, rim as wide as the sheet, outer face; the floor's two faces start at the axis.
    assert drawn.section[0] == (0.0, 0.0)
    assert drawn.section[-1] == pytest.approx((0.0, -sizes.floor_mm), abs=0.02)
    for corner in ((wall, 0.0), (wall, rim), (wall + sizes.wall_mm, rim)):
        assert min(math.dist(corner, p) for p in drawn.section) < 0.02
    write_step(next(p for p in parts if p.key == "loop"), tmp_path / "loop.step")
    area = areas_mm2(solid_mesh(drawn_loop(feed, tmp_path / "loop.step", drawn)))
    n = sizes.can_flats
    ratio = n / math.pi * math.tan(math.pi / n) if n else 1.0
    skin = math.fsum(
        ratio * math.pi / 2 * (a[0] + b[0]) * math.dist(a, b) for a, b in itertools.pairwise(drawn.section)
    )
    assert area[FLOOR] + area[WALL] + math.pi / 4 * 4.0**2 == pytest.approx(skin, rel=1e-6 if n else 6e-3, abs=2.0)


def test_a_can_that_is_cut_everywhere_has_no_section() -> None:
    ring = kernel.tube((0, 0, 0), (0, 0, 10), 100.0, 80.0)
    feed = sample_feed("wire", "turned")
    (can,) = (p for p in build_parts(feed) if p.key == "can")
    assert can_section([replace(can, solid=lambda: ring)]) is None


def test_a_can_without_a_plane_of_symmetry_is_refused() -> None:
    with pytest.raises(GeometryError, match="use 6, 8 or 12"):
        can_faces(DrawnCan(200.0, 60.0, 7), None, None)
