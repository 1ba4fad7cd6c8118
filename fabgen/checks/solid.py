"""The sizing model against the drawn parts: where the surfaces lie, and what the true solid computes to.

Depends on: errors, fields, parts, sizing, writers of STEP through the caller.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from fabgen.checks.records import Finding, Severity
from fabgen.fields.geometry import CanGeometry, FeedGeometry
from fabgen.fields.mesh import LOOP
from fabgen.fields.model import solve_mesh
from fabgen.fields.plan import plan_mesh
from fabgen.fields.solid_can import DrawnCan
from fabgen.fields.solid_mesh import SolidLoop, solid_mesh
from fabgen.fields.surfaces import feed_mesh
from fabgen.parts.can_section import can_section
from fabgen.parts.can_sheet import can_wall, choke_wall
from fabgen.parts.containment import gaps_mm
from fabgen.parts.contour import bounds_mm
from fabgen.parts.floor_holes import floor_holes
from fabgen.parts.records import Part
from fabgen.sizing.field_model import FieldModel, feed_geometry
from fabgen.sizing.records import Feed, Sizes

STEP_OF_FREQUENCY = 0.01
SOLID_DENSITY = 14.0
SEAM_HALF_MM = 20.0
POLYGON_MM = 0.02
DRAWN_AS = {"loop and bars": "loop", "floor": "floor can", "wall": "wall can", "choke wall": "choke can"}
"""Beginnings of the keys of the parts that each group of surfaces is drawn as."""
SOLID_CODES = {
    "CONS-301": ("stop", "Simulated surfaces lie in the drawn metal, within half its thickness (`check --solid`)."),
    "CONS-302": ("note", "The true surfaces of the drawn loop and can compute to the sizing model (`check --solid`)."),
}
SOURCE = "the drawn solids and the project's own field computation"


@dataclass(frozen=True)
class Containment:
    """Largest distance of the simulated surfaces outside the drawn metal, and what is allowed, for one group."""

    name: str
    points: int
    gap_mm: float
    limit_mm: float

    @property
    def passed(self) -> bool:
        """Whether the surfaces lie in the metal."""
        return self.gap_mm <= self.limit_mm


@dataclass(frozen=True)
class SolidComparison:
    """Sizing model against the surfaces of the drawn loop and can: impedance at the tap, return loss, resonance.

    ``can``: what of the can was solved.
    """

    can: str
    model_ohm: complex
    solid_ohm: complex
    model_return_loss_db: float
    solid_return_loss_db: float
    resonance_shift_mhz: float
    unknowns: int
    trimmed_capacitor_pf: float
    trimmed_return_loss_db: float


def containment(feed: Feed, parts: Sequence[Part]) -> tuple[Containment, ...]:
    """Sample the simulated surfaces and measure them against the solids of the parts.

    Strips are sampled over the width of the metal they stand for (a wire: on its axis). Points in holes of floor and
    walls and beside the seam, with its screws, are left out: there metal is meant to be missing.
    """
    sizes = feed.sizes
    drawn = _metal_widths(feed_geometry(sizes), sizes)
    mesh, _ = feed_mesh(drawn, plan_mesh(drawn, feed.job.wavelength_mm / 1e3, 20.0))
    loop = mesh.corners_m[mesh.label == LOOP].mean(1) * 1e3
    floor = _disc_points(drawn)
    samples: list[tuple[str, NDArray[np.float64], float]] = [
        # on the axis or mid-plane: a point of it within half the thickness lies inside the metal
        ("loop and bars", loop, POLYGON_MM + 0.02 * (sizes.wire_mm or sizes.sheet_mm or 0.0)),
        ("floor", floor[~_in_holes(floor, feed)], sizes.floor_mm / 2),
        ("wall", _off_holes(_off_the_seam(_wall_points(drawn.can, 0.0)), feed), sizes.wall_mm / 2),
    ]
    choke = drawn.can.choke
    if choke is not None:
        ring = CanGeometry(choke.radius_m, choke.depth_m, drawn.can.flats)
        outer = _off_holes(_off_the_seam(_wall_points(ring, choke.floor_z_m)), feed)
        samples.append(("choke wall", outer, sizes.wall_mm / 2))
    return tuple(
        Containment(name, len(points), float(gaps_mm(points, _drawn_as(name, parts)).max()), limit)
        for name, points, limit in samples
    )


def _drawn_as(group: str, parts: Sequence[Part]) -> list[Part]:
    """The parts that a group of surfaces stands for: no screw or neighbour may hold a point in their place."""
    return [p for p in parts if p.solid is not None and p.key.split("-")[0] in DRAWN_AS[group].split()]


def _wall_points(can: CanGeometry, foot_m: float) -> NDArray[np.float64]:
    """Points of a wall, in millimetres, over its height and the half turn; on flats between their corners."""
    angle = np.pi * (np.arange(24) + 0.5) / 24
    radius = np.full(len(angle), can.radius_m)
    if can.flats:
        half = np.pi / can.flats
        radius = can.radius_m / np.cos(np.mod(angle + half, 2 * half) - half)
    rows = foot_m + can.depth_m * (np.arange(6) + 0.5) / 6
    x, y = radius * np.cos(angle), radius * np.sin(angle)
    return 1e3 * np.stack([np.tile(x, 6), np.tile(y, 6), np.repeat(rows, len(angle))], -1)


def _off_the_seam(points: NDArray[np.float64]) -> NDArray[np.float64]:
    return points[np.abs(points[:, 0]) > SEAM_HALF_MM]


def _off_holes(points: NDArray[np.float64], feed: Feed) -> NDArray[np.float64]:
    """Without the points in drains and in a choke's screw holes; walls of other makes have none."""
    if feed.job.can.make not in {"rolled", "folded"}:
        return points
    keep = np.ones(len(points), dtype=bool)
    walls = [wall for wall in (can_wall(feed), choke_wall(feed)) if wall is not None]
    for wall in walls:
        for hole in (*wall.holes, *wall.drains):
            (x, y), _ = wall.path.at(hole.along_mm)
            centre = np.array([x, y, wall.base_z_mm + hole.height_mm])
            reach = math.hypot(hole.diameter_mm / 2, wall.path.thickness_mm / 2) + POLYGON_MM
            keep &= np.linalg.norm(points - centre, axis=1) > reach
    return points[keep]


def _disc_points(feed: FeedGeometry) -> NDArray[np.float64]:
    angle, share = np.pi * (np.arange(24) + 0.5) / 24, (np.arange(8) + 0.5) / 8
    r, phi = np.meshgrid(share * feed.can.radius_m * 0.99, angle, indexing="ij")
    return 1e3 * np.stack([(r * np.cos(phi)).ravel(), (r * np.sin(phi)).ravel(), np.zeros(r.size)], -1)


def solid_findings(
    feed: Feed, parts: Sequence[Part], loop_step: Path, progress: Callable[[str], None] = lambda _: None
) -> tuple[Finding, ...]:
    """Containment (stop where it fails) and the comparison with the solve on the drawn loop (note, caution above
    one percent of detuning)."""
    progress("measuring the simulated surfaces against the solids")
    found = []
    for group in containment(feed, parts):
        if not group.passed:
            message = f"{group.name}: the simulated surface lies {group.gap_mm:.2f} mm outside the drawn metal"
            cure = "write the pack anew; if it stays, report the job file"
            found.append(
                _finding(
                    "CONS-301", "stop", group.name, f"{group.gap_mm:.2f} mm", f"{group.limit_mm:.2f} mm", message, cure
                )
            )
    compared = compare_solid(feed, parts, loop_step, progress)
    limit_mhz = 0.01 * feed.job.target.frequency_mhz
    shift = compared.resonance_shift_mhz
    message = (
        f"{compared.solid_ohm.real:.1f} {compared.solid_ohm.imag:+.1f}j ohm on the drawn surface of loop and bars in "
        f"{compared.can} ({compared.unknowns} unknowns), "
        f"{compared.model_ohm.real:.1f} {compared.model_ohm.imag:+.1f}j ohm in the sizing model; return loss "
        f"{compared.solid_return_loss_db:.1f} dB against {compared.model_return_loss_db:.1f} dB, "
        f"{compared.trimmed_return_loss_db:.1f} dB with {compared.trimmed_capacitor_pf:.2f} pF"
    )
    cure = f"expect to trim the series capacitor towards {compared.trimmed_capacitor_pf:.2f} pF on the bench"
    severity: Severity = "note" if abs(shift) <= limit_mhz else "caution"
    found.append(_finding("CONS-302", severity, "loop", f"{shift:+.1f} MHz", f"{limit_mhz:.1f} MHz", message, cure))
    return tuple(found)


def _finding(code: str, severity: Severity, part: str, value: str, limit: str, message: str, cure: str) -> Finding:
    return Finding(code, severity, part, "drawn equals simulated", value, limit, SOURCE, message, cure)


def _metal_widths(geometry: FeedGeometry, sizes: Sizes) -> FeedGeometry:
    loop = geometry.loop
    if sizes.wire_mm is not None:
        thin = 0.02 * sizes.wire_mm / 1e3
        return replace(
            geometry, loop=replace(loop, band_m=thin, leg_band_m=thin, bend_radius_m=sizes.leg_bend_radius_mm / 1e3)
        )
    return replace(
        geometry, loop=replace(loop, band_m=(sizes.strip_width_mm or 0.0) / 1e3, leg_band_m=sizes.leg_width_mm / 1e3)
    )


def _in_holes(points: NDArray[np.float64], feed: Feed) -> NDArray[np.bool_]:
    inside = np.zeros(len(points), dtype=bool)
    for hole in floor_holes(feed):
        low_x, low_y, high_x, high_y = bounds_mm(hole.outline)
        centre = (low_x + high_x) / 2, (low_y + high_y) / 2
        reach = math.hypot(high_x - low_x, high_y - low_y) / 2
        inside |= np.hypot(points[:, 0] - centre[0], points[:, 1] - centre[1]) <= reach
    return inside


def compare_solid(
    feed: Feed, parts: Sequence[Part], loop_step: Path, progress: Callable[[str], None] = lambda _: None
) -> SolidComparison:
    """Solve the feed on the true surface of the drawn loop (STEP in the feed's frame) and can near the target.

    A can of metal is meshed with both faces of its sheet, rims and flange, as its section through the drawn solids
    shows them; holes, tabs and seam are left out. A printed can is its lining. Perfect conductors in both models.
    """
    sizes, target = feed.sizes, feed.job.target.frequency_mhz
    progress("cutting the drawn can")
    can, told = drawn_can(feed, parts)
    progress("meshing the drawn loop and can")
    mesh = solid_mesh(drawn_loop(feed, loop_step, can))
    model = FieldModel(target)
    frequencies = target * np.array([1.0, 1.0 - STEP_OF_FREQUENCY, 1.0 + STEP_OF_FREQUENCY])
    pairs = []
    unknowns = 0
    for frequency in frequencies:
        progress(f"solving the drawn loop at {frequency:.1f} MHz")
        solid = solve_mesh(mesh, frequency * 1e6)
        unknowns = solid.unknowns
        pairs.append((model.solve(sizes, float(frequency)).impedance_ohm, solid.impedance_ohm))
    impedance = np.array(pairs)
    return _compared(told, impedance, frequencies, sizes.series_capacitor_pf, unknowns)


def _compared(
    can: str, impedance: NDArray[np.complex128], frequencies: NDArray[np.float64], capacitor_pf: float, unknowns: int
) -> SolidComparison:
    series = 1 / (2j * np.pi * frequencies * 1e6 * capacitor_pf * 1e-12)
    total = impedance + series[:, None]
    slope = (total[2].imag - total[1].imag) / (frequencies[2] - frequencies[1])
    zero = frequencies[0] - total[0].imag / slope
    trimmed = complex(impedance[0, 1]).imag
    loss = [_return_loss_db(complex(z)) for z in total[0]]
    return SolidComparison(
        can,
        complex(impedance[0, 0]),
        complex(impedance[0, 1]),
        loss[0],
        loss[1],
        float(zero[1] - zero[0]),
        unknowns,
        1e6 / (2 * math.pi * float(frequencies[0]) * trimmed),
        _return_loss_db(complex(impedance[0, 1].real)),
    )


def _return_loss_db(impedance: complex) -> float:
    return -20 * math.log10(max(abs((impedance - 50) / (impedance + 50)), 1e-9))


def drawn_can(feed: Feed, parts: Sequence[Part]) -> tuple[DrawnCan, str]:
    """The can's surface to be meshed, and what it is in words."""
    sizes, choke = feed.sizes, feed.sizes.choke
    faces = DrawnCan(sizes.can_bore_mm, sizes.can_depth_mm, sizes.can_flats)
    if choke is not None:
        faces = replace(
            faces, choke_bore_mm=choke.bore_mm, choke_floor_mm=choke.floor_z_mm, choke_depth_mm=choke.depth_mm
        )
    if feed.job.can.make == "printed":
        return faces, "the faces of the lining"
    section = can_section(parts, sizes.can_flats)
    if section is None:
        return faces, "the can's inner faces (no section through the drawn can is free of openings)"
    return replace(faces, section=section), "the drawn can with its flange"


def drawn_loop(feed: Feed, step_file: Path, can: DrawnCan) -> SolidLoop:
    """What the mesh of the drawn loop needs to know of the feed."""
    sizes = feed.sizes
    width = sizes.wire_mm or sizes.strip_width_mm or 1.0
    wire = sizes.wire_mm is not None
    bend = sizes.leg_bend_radius_mm + (0.0 if wire else sizes.sheet_mm or 0.0)
    return SolidLoop(
        step_file=step_file,
        can=can,
        leg_x_mm=sizes.leg_x_mm,
        bar_reach_mm=sizes.leg_pitch_mm / 2 + sizes.leg_width_mm,
        bar_top_mm=sizes.loop_height_mm - bend - (0.0 if wire else (sizes.sheet_mm or 0.0) / 2),
        gap_mm=sizes.leg_pitch_mm - sizes.leg_width_mm,
        tap_height_mm=sizes.tap_height_mm,
        crossing_mm=feed_geometry(sizes).loop.crossing_band_m * 1e3,
        cell_mm=(0.4 if wire else 0.22) * width,
        edge_mm=feed.job.wavelength_mm / SOLID_DENSITY,
    )
