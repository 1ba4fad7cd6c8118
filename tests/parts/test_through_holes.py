"""Euler number of every printed piece's STL: 2 - 2 g, with g the through holes that the plan gives the piece.

g comes from the openings, flange holes, screws and cuts that the parts are planned with, never from the mesh.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from pathlib import Path

import pytest
import trimesh

from fabgen.parts.build import build_parts
from fabgen.parts.can_printed import body_of, can_split, choke_screw_points, openings
from fabgen.parts.contour import Outline, Point, bounds_mm
from fabgen.parts.radome_cap import cap_of
from fabgen.parts.records import Part, Place
from fabgen.sizing.records import Feed
from fabgen.writers.stl import write_stl
from tests.parts.test_can_printed import CASES, case, printed_of


def middle(outline: Outline) -> Point:
    low_x, low_y, high_x, high_y = bounds_mm(outline)
    return (low_x + high_x) / 2, (low_y + high_y) / 2


def in_sector(points: Iterable[Point], first_deg: float, pitch_deg: float) -> int:
    return sum((math.degrees(math.atan2(y, x)) - first_deg) % 360.0 < pitch_deg for x, y in points)


def joint_places(feed: Feed, body: str) -> tuple[Place, ...]:
    """Screws through the ears of a split body, or the strips over a cap's joints; none for a whole one."""
    wanted = "radome-strip" if body == "radome" else f"screw-{body}"
    return next((p.places for p in build_parts(feed) if p.key == wanted), ())


def planned_holes(feed: Feed, body: str) -> list[Point]:
    if body == "can":
        plan = body_of(feed)
        flange = plan.flange.holes if plan.flange else ()
        return [*(middle(o) for o in openings(feed)), *((h.x_mm, h.y_mm) for h in flange)]
    if body == "choke":
        return list(choke_screw_points(feed, body_of(feed)))
    return [(h.x_mm, h.y_mm) for h in cap_of(feed).drains]


def through_holes(feed: Feed, part: Part) -> int:
    """Holes through the part by its plan; a ring without a floor has one more, its own middle."""
    body, _, number = part.key.partition("-")
    if part.key == "radome-strip":
        return 0
    if body == "jig":
        mandrel = dict(part.sizes)["mandrel_mm"]
        return 2 if number == "leg" or mandrel > 16.0 else 0
    joints, holes = joint_places(feed, body), planned_holes(feed, body)
    angles = list(dict.fromkeys(place.turn_deg for place in joints))
    if body == "can":
        angles = list(can_split(feed).cut_angles_deg())
    levels = can_split(feed).levels_mm if body == "can" else ()
    sectors = max(1, len(angles))
    ring, sector = divmod(int(number or 1) - 1, sectors)
    open_middle = body == "choke" or ring > 0
    if ring > 0:
        holes = []
    if sectors == 1:
        return len(holes) + open_middle
    pitch = 360.0 / sectors
    own = (angles[sector], angles[(sector + 1) % sectors])
    low = levels[ring - 1] if ring else -math.inf
    high = levels[ring] if ring < len(levels) else math.inf
    ears = sum(p.turn_deg in own and low < p.z_mm < high for p in joints) if body != "radome" else 0
    return in_sector(holes, angles[sector], pitch) + ears


@pytest.mark.parametrize("name", CASES)
def test_every_piece_has_the_euler_number_of_its_planned_holes(name: str, tmp_path: Path) -> None:
    feed = case(name)
    parts = printed_of(name)
    for part in parts:
        path = tmp_path / f"{part.key}.stl"
        write_stl(part, path)
        mesh = trimesh.load_mesh(str(path))
        assert mesh.is_watertight, part.key
        assert mesh.is_winding_consistent, part.key
        assert mesh.body_count == 1, part.key
        assert mesh.volume > 0
        assert mesh.euler_number == 2 - 2 * through_holes(feed, part), part.key


def test_a_whole_can_has_the_holes_counted_by_hand() -> None:
    # Flange 6, drains 4, coax with the foot of its bar 1, other foot 1, connector 3.
    (can,) = (p for p in printed_of("whole") if p.key == "can")
    assert through_holes(case("whole"), can) == 6 + 4 + 1 + 1 + 3
