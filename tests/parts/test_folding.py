"""Flat pattern and folded solid come from one list: held against an independent folding of the pattern, closed
forms, and the CAD kernel's own measures."""

from __future__ import annotations

import itertools
import math
import random
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
import shapely

from fabgen.errors import GeometryError
from fabgen.parts.bend_table import fold_edges_mm
from fabgen.parts.can_sheet import can_wall, choke_wall
from fabgen.parts.choke_ring import folded_ring
from fabgen.parts.contour import Circle, Contour, Vertex, area_mm2, polygon, rectangle, sampled
from fabgen.parts.folding import (
    Bend,
    Face,
    FoldedSheet,
    allowance_mm,
    box_face,
    flat_area_mm2,
    flat_pattern,
    folded_solid,
    folded_volume_mm3,
    frames,
)
from fabgen.parts.loop_sheet import folded_loop
from fabgen.parts.wall_strip import wall_flat
from tests.parts.flat_folder import fold
from tests.parts.test_loops import sheet_feed
from tests.samples import sample_feed


def random_sheet(seed: int) -> FoldedSheet:
    """A plate with tabs on its four edges, each narrower than its edge, some with a second fold at their end."""
    dice = random.Random(seed)
    t = dice.uniform(0.3, 3.0)
    a, b = dice.uniform(40, 90), dice.uniform(40, 90)
    corners = [(0.0, 0.0), (a, 0.0), (a, b), (0.0, b)]
    vertices: list[Vertex] = []
    edges: list[tuple[int, float]] = []
    for i in range(4):
        (x0, y0), (x1, y1) = corners[i], corners[(i + 1) % 4]
        length = math.hypot(x1 - x0, y1 - y0)
        low, high = dice.uniform(0.05, 0.3), dice.uniform(0.6, 0.95)
        vertices += [Vertex(x0, y0), Vertex(x0 + low * (x1 - x0), y0 + low * (y1 - y0))]
        edges.append((len(vertices) - 1, (high - low) * length))
        vertices.append(Vertex(x0 + high * (x1 - x0), y0 + high * (y1 - y0)))

    def bend() -> Bend:
        angle = dice.uniform(10, 130) * dice.choice((1, -1))
        return Bend(angle, dice.uniform(0.3, 3.0) * t, dice.uniform(0.2, 0.5))

    faces = [Face("plate", Contour(tuple(vertices)), (Circle(a / 2, b / 2, 5.0),))]
    for number, (index, width) in enumerate(edges[: dice.randint(1, 4)]):
        first = box_face(width, dice.uniform(5, 30))
        faces.append(Face(f"tab {number}", first, (), "plate", (0, index), bend()))
        if dice.random() < 0.6:
            last = box_face(width, dice.uniform(5, 20))
            faces.append(Face(f"end {number}", last, (), f"tab {number}", (0, 2), bend()))
    return FoldedSheet(tuple(faces), t)


@pytest.mark.parametrize("block", range(10))
def test_folding_the_pattern_gives_the_mid_surface_of_500_random_parts(block: int) -> None:
    """50 parts a block; corners of every face, folded both ways, agree within 0.01 mm (the issue's figure)."""
    for seed in range(50 * block, 50 * block + 50):
        sheet = random_sheet(seed)
        pattern = flat_pattern(sheet)
        base = shapely.Polygon(sampled(sheet.faces[0].outline)).representative_point()
        pieces = fold(pattern, (base.x + 4.0, base.y))
        assert len(pieces) == len(sheet.faces)
        lying, folded = frames(sheet, folded=False), frames(sheet)
        for face in sheet.faces:
            corners = [(v.x_mm, v.y_mm) for v in face.outline.vertices]
            middle = np.mean(corners, axis=0)
            spot = lying[face.name].at(middle[0] * 0.9, middle[1] * 0.9)
            piece = min(pieces, key=lambda p, s=spot: p.region.distance(shapely.Point(s[:2])))
            for x, y in corners:
                flat_at = lying[face.name].at(x, y)
                assert np.allclose(piece.folded(flat_at[0], flat_at[1]), folded[face.name].at(x, y), atol=0.01)


@pytest.mark.parametrize("seed", range(40))
def test_outline_of_the_pattern_has_the_area_of_faces_and_bend_zones(seed: int) -> None:
    sheet = random_sheet(seed)
    pattern = flat_pattern(sheet)
    area = area_mm2(pattern.outline) - sum(area_mm2(h) for h in pattern.holes)
    assert area == pytest.approx(flat_area_mm2(sheet), rel=1e-12)
    t = sheet.thickness_mm
    term = sum(
        f.outline.vertices[1].x_mm * t * t * math.radians(abs(f.bend.angle_deg)) * (0.5 - f.bend.k_factor)
        for f in sheet.faces
        if f.bend
    )
    assert folded_volume_mm3(sheet) - area * t == pytest.approx(term, abs=1e-9)


@pytest.mark.parametrize("seed", range(24))
def test_the_kernels_volume_differs_from_flat_area_by_the_neutral_fibre_term(seed: int) -> None:
    sheet = random_sheet(seed)
    solid = folded_solid(sheet)
    assert solid.isValid()
    assert solid.Volume() == pytest.approx(folded_volume_mm3(sheet), rel=1e-9)


def test_cylinder_radii_read_back_from_step_are_r_and_r_plus_t(tmp_path: Path) -> None:
    import cadquery as cq

    bend = Bend(90.0, 2.0, 0.4)
    faces = (Face("a", box_face(20.0, 30.0)), Face("b", box_face(20.0, 15.0), (), "a", (0, 2), bend))
    solid = folded_solid(FoldedSheet(faces, 1.5))
    path = tmp_path / "angle.step"
    cq.exporters.export(cq.Workplane(solid), str(path))
    back = cq.importers.importStep(str(path))
    radii = sorted(f.toPln() if f.geomType() == "PLANE" else f._geomAdaptor().Cylinder().Radius()
                   for f in back.faces("%CYLINDER").vals())  # fmt: skip
    assert radii == pytest.approx([2.0, 3.5])


def test_a_90_degree_angle_is_as_long_as_din_6935_says() -> None:
    """SB-06: r 1, s 1, legs 50 + 50 to the outside: flat 98.0813 (DIN 6935 formula, computed apart)."""
    bend = Bend(90.0, 1.0, 0.325)
    leg = 50.0 - 2.0
    faces = (Face("a", box_face(10.0, leg)), Face("b", box_face(10.0, leg), (), "a", (0, 2), bend))
    pattern = flat_pattern(FoldedSheet(faces, 1.0))
    assert area_mm2(pattern.outline) / 10.0 == pytest.approx(98.0813, abs=1e-4)
    assert pattern.folds[0].deduction_mm == pytest.approx(1.9187, abs=1e-4)
    assert fold_edges_mm(pattern, pattern.folds[0]) == pytest.approx((98.0813 / 2, 98.0813 / 2), abs=1e-3)


def test_tabs_inside_a_hole_are_spliced_into_the_hole() -> None:
    bend = Bend(-90.0, 1.0, 0.33)
    hole = rectangle((20, 20), (40, 50))
    plate = rectangle((0, 0), (80, 80))
    # Clockwise from the lower left: (20, 20), (20, 50), (40, 50), (40, 20).
    sheet = FoldedSheet(
        (Face("plate", plate, (hole,)), Face("tab", box_face(20.0, 8.0), (), "plate", (1, 1), bend)), 1.0
    )
    pattern = flat_pattern(sheet)
    width = allowance_mm(bend, 1.0) + 8.0
    assert area_mm2(pattern.holes[0]) == pytest.approx(600.0 - 20.0 * width)
    assert folded_solid(sheet).Volume() == pytest.approx(folded_volume_mm3(sheet), rel=1e-9)


def test_faces_that_hang_on_nothing_or_on_a_wrong_edge_are_refused() -> None:
    plate, bend = Face("plate", rectangle((0, 0), (30, 20))), Bend(90.0, 1.0, 0.4)
    with pytest.raises(GeometryError, match="hang on"):
        FoldedSheet((plate, Face("tab", box_face(30.0, 5.0), (), "wall", (0, 0), bend)), 1.0)
    with pytest.raises(GeometryError, match="as wide as"):
        FoldedSheet((plate, Face("tab", box_face(10.0, 5.0), (), "plate", (0, 0), bend)), 1.0)


def test_fold_lines_are_measured_to_the_first_edge_on_either_side() -> None:
    """A tab that points into a ring is measured to its own tip, not to the ring's far side."""
    bend = Bend(-90.0, 1.0, 0.33)
    hole, plate = rectangle((20, 20), (40, 50)), rectangle((0, 0), (80, 80))
    sheet = FoldedSheet(
        (Face("plate", plate, (hole,)), Face("tab", box_face(20.0, 8.0), (), "plate", (1, 1), bend)), 1.0
    )
    pattern = flat_pattern(sheet)
    zone = allowance_mm(bend, 1.0)
    assert sorted(fold_edges_mm(pattern, pattern.folds[0])) == pytest.approx([8.0 + zone / 2, 30.0 + zone / 2])


def _half_way(sheet: FoldedSheet, now: int, share: float) -> FoldedSheet:
    """Bends before ``now`` in the order done, those of ``now`` turned by a share, later ones flat."""
    faces = []
    for face in sheet.faces:
        bend = face.bend
        if bend is not None:
            done = 1.0 if bend.order < now else share if bend.order == now else 0.0
            bend = replace(bend, angle_deg=bend.angle_deg * done)
        faces.append(replace(face, bend=bend))
    return FoldedSheet(tuple(faces), sheet.thickness_mm)


def _pierced(sheet: FoldedSheet) -> list[tuple[str, str]]:
    """Pairs of faces, not joined by a bend, of which the second one's edge goes through the first one's material."""
    at, found = frames(sheet), []
    edges = {f.name: np.array([at[f.name].at(x, y) for x, y in sampled(f.outline, 0.5)]) for f in sheet.faces}
    for face, other in itertools.permutations(sheet.faces, 2):
        if other.parent == face.name or face.parent == other.name:
            continue
        frame = at[face.name]
        local = (edges[other.name] - np.array(frame.origin)) @ np.array([frame.u, frame.v, frame.n]).T
        ahead = np.roll(local, -1, axis=0)
        across = np.flatnonzero(local[:, 2] * ahead[:, 2] < 0)
        share = local[across, 2] / (local[across, 2] - ahead[across, 2])
        spots = local[across] + share[:, None] * (ahead[across] - local[across])
        region = shapely.Polygon(sampled(face.outline, 0.1))
        if any(region.contains(shapely.Point(x, y)) for x, y, _ in spots):
            found.append((face.name, other.name))
    return found


@pytest.mark.parametrize("kind", ["inward", "outward", "choke ring"])
def test_folding_in_the_stated_order_never_runs_the_part_into_itself(kind: str) -> None:
    """Every bend of the order is turned in steps of 5 degrees with the earlier ones done and the later ones flat."""
    if kind == "choke ring":
        feed = sample_feed("wire", "rolled", metal="cuzn37", choke=True)
        outer = choke_wall(feed)
        assert outer is not None
        sheet = folded_ring(feed, can_wall(feed), outer)
    else:
        sheet = folded_loop(sheet_feed(kind))
    for now in sorted({f.bend.order for f in sheet.faces if f.bend}):
        for share in np.linspace(0.0, 1.0, 19):
            assert _pierced(_half_way(sheet, now, float(share))) == [], (now, share)


def test_a_fold_that_runs_into_the_part_is_seen_by_that_measure() -> None:
    bend = Bend(130.0, 1.0, 0.33)
    wide = polygon([(-10, 0), (40, 0), (40, 40), (30, 40), (0, 40), (-10, 40)])
    plate, long = Face("plate", wide), box_face(30.0, 38.0)
    sheet = FoldedSheet(
        (plate, Face("web", box_face(30.0, 12.0), (), "plate", (0, 3), bend),
         Face("flange", long, (), "web", (0, 2), replace(bend, order=2))), 1.0,
    )  # fmt: skip
    assert ("plate", "flange") in _pierced(sheet)


@pytest.mark.parametrize("flats", [6, 8, 12])
def test_a_folded_wall_gets_its_step_first_its_corners_in_turn_and_its_tabs_last(flats: int) -> None:
    """The strip's way after each fold of the order: no two stretches cross until the lap closes."""
    feed = sample_feed("wire", "folded", flats=flats)
    wall = can_wall(feed)
    folds = wall_flat(wall, 0.5).folds
    order = [f.number for f in sorted(folds, key=lambda f: (f.order, f.number))]
    corners = list(range(1, flats + 1))
    assert order == [flats + 1, flats + 2, *corners, *range(flats + 3, len(folds) + 1)]
    assert len({f.order for f in folds if f.number <= flats + 2}) == flats + 2
    for count in range(flats + 3):
        ready = set(order[:count])
        points, heading, at, number = [np.zeros(2)], 0.0, np.zeros(2), 0
        for piece in wall.path.stretches:
            turn = 0.0
            if piece.radius_mm:
                number += 1
                turn = piece.sweep_deg if number in ready else 0.0
            heading += turn / 2
            at = at + piece.middle_mm * np.array([math.cos(math.radians(heading)), math.sin(math.radians(heading))])
            heading += turn / 2
            points.append(at)
        assert shapely.LineString(points).is_simple, count
