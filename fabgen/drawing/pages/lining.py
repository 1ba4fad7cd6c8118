"""What a lining covers, drawn into a picture of the can: faces hatched where the eye sees them; and what a meter
should read on it.

Depends on: drawing.hidden, drawing.model, sizing.records, stock, theory.skin.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from fabgen.drawing.hidden import Direction
from fabgen.drawing.model import Line, Point, number
from fabgen.sizing.records import Feed, Sizes
from fabgen.stock import tables
from fabgen.theory.skin import lining_conductivity_s_per_m

STEP_DEG = 6.0
FLOOR_LINES = 14
PIECES = 48
PROBE_MM = 1.0
"""Radius of a meter's rounded probe on soft metal. Common practice, no source."""
CONTACT_OHM = 0.1
"""What two probes and their leads may add: no lining is asked to read less."""
METAL_OHM = "0.01"
"""From floor to rim of a can of bare metal with sound joints. Common practice, no source."""
COPPER_G_PER_MM3 = 8.96e-3


@dataclass(frozen=True)
class Reading:
    """What to measure on a lining: from the floor's middle to the rim, and what it weighs."""

    expected_ohm: float
    limit_ohm: float
    area_mm2: float
    gain_g: float


def is_coated(feed: Feed) -> bool:
    """True for a printed can that is painted or plated: its lining is no part."""
    return feed.job.can.make == "printed" and tables.lining(feed.job.can.lining).kind != "foil"


def spreading_ohm(sheet_ohm: float, distance_mm: float, probe_mm: float = PROBE_MM) -> float:
    """Resistance between a probe inside a thin sheet and one on its edge.

    R = R_s / (2 pi) ln(d/a) + R_s / pi ln(d/a): the current of a round contact spreads over the full circle, that
    of one on the edge over half of it (potential of a line source; conduction in thin sheets, textbooks).
    ``distance_mm`` is large against ``probe_mm``.
    """
    return 1.5 * sheet_ohm / math.pi * math.log(distance_mm / probe_mm)


def reading(feed: Feed) -> Reading:
    """Expected resistance, the limit at twice it, the lined area and the mass that plating adds."""
    lining, sizes = tables.lining(feed.job.can.lining), feed.sizes
    conductivity = lining_conductivity_s_per_m(lining, feed.job.can.lining_sheet_resistance_ohm)
    sheet = 1.0 / (conductivity * lining.thickness_mm * 1e-3)
    expected = spreading_ohm(sheet, sizes.can_bore_mm / 2 + sizes.can_depth_mm)
    area = math.pi * sizes.can_bore_mm * (sizes.can_bore_mm / 4 + sizes.can_depth_mm)
    return Reading(expected, max(CONTACT_OHM, 2 * expected), area, area * lining.thickness_mm * COPPER_G_PER_MM3)


def limit_text(feed: Feed) -> str:
    """The largest resistance from floor to rim that is still good, ohm: a hundredth on bare metal."""
    if feed.job.can.make != "printed":
        return METAL_OHM
    return one_digit(reading(feed).limit_ohm)


def one_digit(value: float) -> str:
    """A positive value to its first digit, without an exponent."""
    return number(float(f"{value:.1g}"), 6)


def lined(key: str, sizes: Sizes, can_outer_mm: float, eye: Direction) -> tuple[Line, ...]:
    """The lines of one lined face, by the key of the foil that covers it; nothing for another key."""
    post = (can_outer_mm / 2, sizes.can_depth_mm)
    match key, sizes.choke:
        case "foil-floor", _:
            return lined_floor(sizes.can_bore_mm, sizes.can_depth_mm, eye)
        case "foil-wall", _:
            return lined_wall(sizes.can_bore_mm, sizes.can_depth_mm, eye)
        case "foil-choke-wall", choke if choke is not None:
            rim = choke.floor_z_mm + choke.depth_mm
            return _uprights(choke.bore_mm / 2, choke.floor_z_mm, rim, eye, post)
        case "foil-choke-can", choke if choke is not None:
            rim = choke.floor_z_mm + choke.depth_mm
            return _outside(post, choke.floor_z_mm, (choke.bore_mm / 2, rim), eye)
        case "foil-choke-floor", choke if choke is not None:
            rim = choke.floor_z_mm + choke.depth_mm
            return _spokes(post, choke.floor_z_mm, (choke.bore_mm / 2, rim), eye)
    return ()


def lined_wall(bore_mm: float, depth_mm: float, eye: Direction) -> tuple[Line, ...]:
    """Upright lines on the bore as far as ``eye`` sees them over the rim, and the rim."""
    return _uprights(bore_mm / 2, 0.0, depth_mm, eye)


def _uprights(
    r: float, low: float, rim: float, eye: Direction, post: tuple[float, float] | None = None
) -> tuple[Line, ...]:
    """Upright lines on the inside of a wall from ``low`` to ``rim``; ``post``: radius and height of what stands in
    the middle and hides some of them."""
    lines: list[Line] = []
    for i in range(round(360 / STEP_DEG)):
        x, y = _on_circle(r, STEP_DEG * i)
        if x * eye.towards_eye[0] + y * eye.towards_eye[1] >= 0:
            continue
        heights = [low + (rim - low) * k / PIECES for k in range(PIECES + 1)]
        seen = [z for z in heights if _clear(x, y, z, r, rim, eye) and not _behind(x, y, z, post, eye)]
        if seen and seen[0] < rim:
            lines.append(_line(eye.flat((x, y, seen[0])), eye.flat((x, y, rim))))
    return tuple(lines)


def _outside(post: tuple[float, float], low: float, ring: tuple[float, float], eye: Direction) -> tuple[Line, ...]:
    """Upright lines on the outside of what stands in the middle, radius and height in ``post``, as far as ``eye`` sees
    them over a ring of radius and rim ``ring``."""
    (r, high), lines = post, []
    for i in range(round(360 / STEP_DEG)):
        x, y = _on_circle(r, STEP_DEG * i)
        if x * eye.towards_eye[0] + y * eye.towards_eye[1] <= 0:
            continue
        heights = [low + (high - low) * k / PIECES for k in range(PIECES + 1)]
        seen = [z for z in heights if z >= ring[1] or _clear(x, y, z, *ring, eye)]
        if seen and seen[0] < high:
            lines.append(_line(eye.flat((x, y, seen[0])), eye.flat((x, y, high))))
    return tuple(lines)


def _spokes(post: tuple[float, float], level: float, ring: tuple[float, float], eye: Direction) -> tuple[Line, ...]:
    """Lines outwards on the floor between post and ring, as far as ``eye`` sees them."""
    lines: list[Line] = []
    for i in range(round(360 / STEP_DEG)):
        steps = [post[0] + (ring[0] - post[0]) * k / PIECES for k in range(PIECES + 1)]
        points = [_on_circle(r, STEP_DEG * i) for r in steps]
        seen = [p for p in points if _clear(*p, level, *ring, eye) and not _behind(*p, level, post, eye)]
        if len(seen) > 1:
            lines.append(_line(eye.flat((*seen[0], level)), eye.flat((*seen[-1], level))))
    return tuple(lines)


def lined_floor(bore_mm: float, depth_mm: float, eye: Direction) -> tuple[Line, ...]:
    """Lines across the floor, level on the paper, as far as ``eye`` sees them over the rim."""
    r = bore_mm / 2
    ahead = math.atan2(eye.towards_eye[1], eye.towards_eye[0])
    c, s = math.cos(ahead), math.sin(ahead)
    lines: list[Line] = []
    for i in range(1, FLOOR_LINES):
        away = r * (2 * i / FLOOR_LINES - 1)
        half = math.sqrt(r * r - away * away)
        across = [half * (2 * k / PIECES - 1) for k in range(PIECES + 1)]
        points = [(away * c - t * s, away * s + t * c) for t in across]
        seen = [p for p in points if _clear(*p, 0.0, r, depth_mm, eye)]
        if len(seen) > 1:
            lines.append(_line(eye.flat((*seen[0], 0.0)), eye.flat((*seen[-1], 0.0))))
    return tuple(lines)


def _on_circle(r: float, angle_deg: float) -> Point:
    return r * math.cos(math.radians(angle_deg)), r * math.sin(math.radians(angle_deg))


def _clear(x: float, y: float, z: float, r: float, depth: float, eye: Direction) -> bool:
    """True when the way from the point to the eye leaves the can through its aperture."""
    n = eye.towards_eye
    rise = (depth - z) / n[2]
    return math.hypot(x + rise * n[0], y + rise * n[1]) <= r * (1 + 1e-9)


def _behind(x: float, y: float, z: float, post: tuple[float, float] | None, eye: Direction) -> bool:
    """True when a post in the middle stands between the point and the eye."""
    if post is None or z >= post[1]:
        return False
    n = eye.towards_eye
    reach = (post[1] - z) / n[2]
    # The way's nearest point to the axis, held to the stretch below the post's top.
    near = min(max(-(x * n[0] + y * n[1]) / (n[0] ** 2 + n[1] ** 2), 0.0), reach)
    return math.hypot(x + near * n[0], y + near * n[1]) < post[0]


def _line(a: Point, b: Point) -> Line:
    return Line(*a, *b)
