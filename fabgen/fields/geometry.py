"""What the field computation knows of a feed, in metres, in the frame of the whole feed.

Origin in the centre of the floor's inner face, +z out of the aperture, gap of the loop on +x, the plane y = 0 is
a plane of symmetry. Time factor e^{+j omega t}. SI units.

Depends on: errors.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, fields

from fabgen.errors import GeometryError

SPEED_OF_LIGHT = 299_792_458.0
FREE_SPACE_IMPEDANCE = 376.730313412


@dataclass(frozen=True)
class ChokeGeometry:
    """Choke ring: inner radius of its wall, height of its floor, depth from that floor to its rim."""

    radius_m: float
    floor_z_m: float
    depth_m: float


@dataclass(frozen=True)
class CanGeometry:
    """The can's conducting surface. ``flats`` = 0: round; else the radius is to the middle of a flat."""

    radius_m: float
    depth_m: float
    flats: int = 0
    choke: ChokeGeometry | None = None


@dataclass(frozen=True)
class LoopGeometry:
    """Loop, bars and crossing as thin strips.

    ``form``             "wire": the strip stands on the cylinder of the loop; "sheet": flat ring
    ``radius_m``         centreline;  ``height_m`` above the floor
    ``band_m``           strip width of the ring (wire of radius a: 4 a)
    ``leg_band_m``       strip width of the bars;  ``leg_pitch_m`` bar centre to bar centre
    ``leg_x_m``          plane of the bars (sheet only; the wire's follows from tangency)
    ``bend_radius_m``    of the axis (wire) or of the mid-surface (sheet)
    ``tap_height_m``     axis of the crossing; ``crossing_band_m`` its strip width
    ``inward``           sheet: the tabs leave the ring's inner edge
    """

    form: str
    radius_m: float
    height_m: float
    band_m: float
    leg_band_m: float
    leg_pitch_m: float
    leg_x_m: float
    bend_radius_m: float
    tap_height_m: float
    crossing_band_m: float
    inward: bool = True


@dataclass(frozen=True)
class FeedGeometry:
    """Can and loop together."""

    can: CanGeometry
    loop: LoopGeometry


def require_finite(record: object, name: str) -> None:
    """Refuse a record with a size that is not a finite number above zero (``leg_x`` and heights may be zero)."""
    for item in fields(record):  # type: ignore[arg-type]
        value = getattr(record, item.name)
        if isinstance(value, float):
            if not math.isfinite(value):
                raise GeometryError(f"{name}.{item.name} is {value}; a finite number is needed")
            if value <= 0 and item.name not in ("leg_x_m", "floor_z_m"):
                raise GeometryError(f"{name}.{item.name} is {value:g} m; it must be above zero")


def check_geometry(feed: FeedGeometry) -> None:
    """Refuse surfaces that would cut each other or leave the can.

    Raises GeometryError with the two sizes that clash and the amount to change.
    """
    can, loop = feed.can, feed.loop
    require_finite(can, "can")
    require_finite(loop, "loop")
    if can.choke is not None:
        require_finite(can.choke, "choke")
        if can.choke.radius_m <= can.radius_m * 1.02:
            raise GeometryError(
                f"choke radius {can.choke.radius_m * 1e3:.2f} mm does not clear the can's "
                f"{can.radius_m * 1e3:.2f} mm; make it at least {can.radius_m * 1.02e3:.2f} mm"
            )
        if not 0.0 <= can.choke.floor_z_m < can.depth_m:
            raise GeometryError("the choke's floor must lie between the can's floor and its rim")
    outer = max(loop.radius_m + (loop.band_m / 2 if loop.form == "sheet" else 0.0), loop.leg_x_m)
    if outer >= can.radius_m:
        raise GeometryError(
            f"the loop reaches {outer * 1e3:.2f} mm from the axis but the can's inner face is at "
            f"{can.radius_m * 1e3:.2f} mm; make the loop smaller or the bore larger by "
            f"{2e3 * (outer - can.radius_m):.2f} mm in diameter"
        )
    half = loop.crossing_band_m / 2
    top = loop.height_m - loop.bend_radius_m
    if not half < loop.tap_height_m < top - half:
        raise GeometryError(
            f"tap height {loop.tap_height_m * 1e3:.2f} mm with a crossing {2e3 * half:.2f} mm wide does not fit on the "
            f"straight bar of {top * 1e3:.2f} mm; allowed {half * 1e3:.2f} to {(top - half) * 1e3:.2f} mm"
        )
    if loop.leg_pitch_m <= loop.leg_band_m:
        raise GeometryError(
            f"bars {loop.leg_band_m * 1e3:.2f} mm wide at a pitch of {loop.leg_pitch_m * 1e3:.2f} mm touch; "
            "make the pitch larger than the width"
        )
    if loop.leg_pitch_m / 2 + loop.leg_band_m / 2 >= 0.9 * loop.radius_m:
        raise GeometryError("the bars are as far apart as the loop is wide; make the pitch smaller")
