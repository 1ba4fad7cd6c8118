"""The radome cap: a thin printed disc with a skirt that goes over the can's rim.

Section, right half; printed disc down::

      ----------------------.   z = can_depth + cover
      ----------------------|
                   can   | ||   skirt, clearance to the wall
                   wall  |<||   groove over the bead of a printed can
                         | |'   z = can_depth - skirt

For a can with flats the skirt has the same flats. Around a wall of sheet the skirt is wider by the wall, so that it
goes over the lapped seam; the cap is bedded in silicone there. Larger than the bed the cap comes in sectors with
strips to bond over the joints.

Depends on: errors, stock, parts (contour, kernel, print_rules, printed, pieces, split, floor_plan, can_printed,
records), sizing.records.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from fabgen.parts import kernel
from fabgen.parts.can_printed import BEAD_BELOW_RIM_MM, BEAD_MM, SKIRT_MM
from fabgen.parts.contour import Circle, Outline, area_mm2, polygon
from fabgen.parts.floor_plan import DRAIN_HOLE_MM, lining_mm
from fabgen.parts.pieces import Joint
from fabgen.parts.print_rules import PrintRules, print_rules
from fabgen.parts.printed import Printed, printed_parts
from fabgen.parts.records import Part, Place
from fabgen.parts.shell import BEAD_SLOPE, revolved_volume_mm3
from fabgen.parts.split import Envelope, plan_split
from fabgen.sizing.records import Feed
from fabgen.stock import tables

COVER_MM = 1.2
"""Thickness of the disc where the wavelength allows it: six layers of 0.2 mm. Common practice, no source."""
NO_CAP = "leave can.radome out and close the can with a bought sheet of plastic"
STRIP_MM = 12.0
"""Width of a strip over a joint of the disc. Common practice, no source."""


def cover_mm(feed: Feed) -> float:
    """Thickness of the disc: COVER_MM, or thinner where that is no longer thin against the wavelength."""
    share = tables.limit("radome_max_wavelengths", feed.job.overrides).value
    least = tables.limit("print_wall_thin_mm", feed.job.overrides).value
    return max(least, min(COVER_MM, math.floor(10 * share * feed.job.wavelength_mm) / 10))


@dataclass(frozen=True)
class Cap:
    """The cap's lines: outside and inside of the skirt, heights, drain holes, whether a bead holds it."""

    outer: Outline
    inner: Outline
    inner_radius_mm: float
    skirt_mm: float
    cover_mm: float
    rim_mm: float
    drains: tuple[Circle, ...]
    bead: bool

    def solid(self) -> kernel.Shape:
        """The cap in the feed's frame."""
        low, rim, cover = self.rim_mm - SKIRT_MM, self.rim_mm, self.cover_mm
        cup = kernel.prism(self.outer, (), low, rim + cover - low)
        tools = [kernel.prism(self.inner, (), low - 1.0, rim - low + 1.0)]
        tools += [kernel.prism(hole, (), rim - 1.0, cover + 2.0) for hole in self.drains]
        if self.bead:
            tools.append(_groove(self.inner_radius_mm, rim - BEAD_BELOW_RIM_MM))
        return kernel.cut(cup, *tools, what="radome cap")

    def volume_mm3(self) -> float:
        """Its volume in closed form."""
        volume = area_mm2(self.outer) * (self.cover_mm + SKIRT_MM) - area_mm2(self.inner) * SKIRT_MM
        volume -= sum(area_mm2(h) for h in self.drains) * self.cover_mm
        if self.bead:
            r, rise = self.inner_radius_mm, BEAD_SLOPE * BEAD_MM
            volume -= revolved_volume_mm3(((r, -rise), (r + BEAD_MM, 0.0), (r, rise)))
        return volume


def cap_of(feed: Feed) -> Cap:
    """The cap's lines for this can."""
    rules = print_rules(feed)
    inner, skirt = _inner_radius(feed, rules), rules.wall_over(rules.wall_min_mm + BEAD_MM)
    return Cap(
        outer=_section(feed, inner + skirt),
        inner=_section(feed, inner),
        inner_radius_mm=inner,
        skirt_mm=skirt,
        cover_mm=cover_mm(feed),
        rim_mm=feed.sizes.can_depth_mm,
        drains=_drains(feed),
        bead=feed.job.can.make == "printed",
    )


def radome_cap(feed: Feed) -> tuple[Part, ...]:
    """The cap as parts; nothing when the job asks for none.

    Raises GeometryError when it cannot sensibly be cut into pieces for the bed.
    """
    if not feed.job.can.radome:
        return ()
    cap = cap_of(feed)
    printed = Printed(
        key="radome",
        name="radome cap",
        plastic=feed.job.can.plastic,
        sizes=(
            ("cover_mm", cap.cover_mm),
            ("skirt_bore_mm", 2 * cap.inner_radius_mm),
            ("skirt_wall_mm", cap.skirt_mm),
            ("skirt_mm", SKIRT_MM),
        ),
        tolerance="skirt bore +0.2/0 mm",
        finish="as printed, not painted with anything that conducts",
        notes=(
            "print disc down, without support",
            "snaps over the bead" if cap.bead else "bed the skirt in neutral-cure silicone",
        ),
        volume_mm3=cap.volume_mm3(),
        joint=_joint(feed, cap),
        whole=cap.solid,
        upside_down=True,
        tied_by="the strips",
    )
    return (*printed_parts(printed), *_strips(printed, feed.sizes.can_bore_mm / 2 - 1.0))


def _joint(feed: Feed, cap: Cap) -> Joint:
    rules, flats = print_rules(feed), feed.sizes.can_flats
    edge = cap.inner_radius_mm + cap.skirt_mm
    corner = edge / math.cos(math.pi / flats) if flats else edge
    low, top = cap.rim_mm - SKIRT_MM, cap.rim_mm + cap.cover_mm
    margin = 2 * rules.wall_min_mm + STRIP_MM
    clear = tuple(Circle(h.x_mm, h.y_mm, h.diameter_mm + margin) for h in cap.drains)
    envelope = Envelope("radome cap", edge, corner, low, top, clear, instead=NO_CAP)
    # No ears, hence an ear top at the bottom; the disc is too thin for a tongue.
    return Joint(envelope, plan_split(envelope, rules), rules, cap.skirt_mm, cap.cover_mm, low)


def _inner_radius(feed: Feed, rules: PrintRules) -> float:
    sizes = feed.sizes
    wall = sizes.can_bore_mm / 2 + lining_mm(feed) + sizes.wall_mm
    seam = sizes.wall_mm if feed.job.can.make in {"rolled", "folded"} else 0.0
    return wall + seam + rules.clearance_mm


def _section(feed: Feed, radius_mm: float) -> Outline:
    """A circle, or the can's polygon with one flat's middle on +x (``radius_mm`` to the flats)."""
    flats = feed.sizes.can_flats
    if flats == 0:
        return Circle(0.0, 0.0, 2 * radius_mm)
    return polygon(kernel.circle_points(flats, radius_mm / math.cos(math.pi / flats), 180.0 / flats))


def _drains(feed: Feed) -> tuple[Circle, ...]:
    """The cap is the lowest point of a feed that looks down at its dish: it drains at its edge."""
    if not feed.job.can.drain_holes:
        return ()
    at = kernel.circle_points(4, feed.sizes.can_bore_mm / 2 - 1.5 * DRAIN_HOLE_MM, 45.0)
    return tuple(Circle(x, y, DRAIN_HOLE_MM) for x, y in at)


def _groove(radius_mm: float, z_mm: float) -> kernel.Shape:
    rise = BEAD_SLOPE * (BEAD_MM + 1.0)
    return kernel.revolved(
        ((radius_mm - 1.0, z_mm - rise), (radius_mm + BEAD_MM, z_mm), (radius_mm - 1.0, z_mm + rise))
    )


def _strips(printed: Printed, reach_mm: float) -> tuple[Part, ...]:
    """One strip per joint of the disc, bonded inside."""
    angles = printed.joint.split.cut_angles_deg()
    if not angles:
        return ()
    plastic = tables.plastic(printed.plastic)
    start, end = STRIP_MM, reach_mm
    thick = printed.joint.rules.wall(2)
    rim = printed.joint.envelope.top_mm - printed.joint.floor_mm
    solid = kernel.once(
        lambda: kernel.box((start, -STRIP_MM / 2, rim - thick), (end, STRIP_MM / 2, rim))
    )
    strip = Part(
        key="radome-strip",
        name="radome joint strip",
        process=("print",),
        material=plastic.key,
        material_name=plastic.name,
        temper="",
        colour=plastic.colour,
        quantity=len(angles),
        sizes=(("length_mm", end - start), ("width_mm", STRIP_MM), ("thickness_mm", thick)),
        tolerance="+-0.5 mm",
        finish="as printed",
        solid=solid,
        print_solid=kernel.once(lambda: kernel.on_bed(solid())),
        places=tuple(Place(turn_deg=a) for a in angles),
        mass_kg=(end - start) * STRIP_MM * thick * 1e-9 * plastic.density_kg_per_m3,
        notes=("bond inside the cap over a joint",),
    )
    return (strip,)
