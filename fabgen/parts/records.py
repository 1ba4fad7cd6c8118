"""What a part is: flat pattern, wire path and solid are views of the same sizes.

Depends on: parts.contour, stock records.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Literal

from fabgen.parts.contour import FoldLine, Outline

if TYPE_CHECKING:
    import cadquery

Process = Literal["laser", "fold", "roll", "turn", "drill", "print", "wire", "foil", "buy"]


@dataclass(frozen=True)
class FlatPattern:
    """One part as it lies on the sheet, seen from the face named ``face``."""

    outline: Outline
    holes: tuple[Outline, ...] = ()
    folds: tuple[FoldLine, ...] = ()
    thickness_mm: float = 1.0
    face: str = "top"


@dataclass(frozen=True)
class WireBend:
    """One bend of a wire, in order along the straight piece. ``plane_deg``: turn of the wire about its own axis
    before this bend, relative to the bend before. ``neutral_shift_mm``: how far inside the axis the neutral line
    lies, whose arc the marks measure."""

    number: int
    start_mm: float
    end_mm: float
    angle_deg: float
    radius_mm: float
    mandrel_mm: float
    plane_deg: float
    order: int
    name: str
    neutral_shift_mm: float = 0.0


@dataclass(frozen=True)
class WirePath:
    """A bent wire: length between the ends of the schedule, bends in order along the wire, work on the ends.

    ``beyond_mm``: wire left beyond each end of the schedule, for threads; the piece cut is longer by twice that.
    """

    diameter_mm: float
    cut_length_mm: float
    bends: tuple[WireBend, ...]
    end_preparation: str
    beyond_mm: float = 0.0

    @property
    def piece_length_mm(self) -> float:
        """Length of the piece to cut from stock, with what is left beyond both ends of the schedule."""
        return self.cut_length_mm + 2 * self.beyond_mm

    def work(self) -> tuple[tuple[WireBend, float], ...]:
        """The bends in order of work, each with the turn in degrees, over -180 to 180, from the one bent before it.

        The first one's is from the plane of the schedule. The turns differ from ``plane_deg`` where the order of work
        is not that along the wire.
        """
        planes, plane = {}, 0.0
        for bend in self.bends:
            plane += bend.plane_deg
            planes[bend.number] = plane
        out: list[tuple[WireBend, float]] = []
        for bend in sorted(self.bends, key=lambda b: (b.order, b.number)):
            before = planes[out[-1][0].number] if out else 0.0
            out.append((bend, 180.0 - (180.0 - (planes[bend.number] - before)) % 360.0))
        return tuple(out)


@dataclass(frozen=True)
class Place:
    """Where a part sits in the feed's frame: rotation about z (degrees), then shift. Solids that are already in
    the feed's frame use the default."""

    x_mm: float = 0.0
    y_mm: float = 0.0
    z_mm: float = 0.0
    turn_deg: float = 0.0


@dataclass(frozen=True)
class Part:
    """One part of the feed.

    ``key`` is ASCII and names the files; ``solid`` builds the B-rep in the feed's frame when called (imports the
    CAD kernel); ``print_solid`` builds it in print position, z = 0 on the bed. ``sizes`` are the sizes that make
    the part, by name, for the page and the consistency check.
    """

    key: str
    name: str
    process: tuple[Process, ...]
    material: str
    material_name: str
    temper: str
    colour: tuple[float, float, float]
    quantity: int
    sizes: tuple[tuple[str, float], ...]
    tolerance: str
    finish: str
    flat: FlatPattern | None = None
    wire: WirePath | None = None
    thickness_mm: float | None = None
    solid: Callable[[], cadquery.Shape] | None = field(default=None, compare=False)
    print_solid: Callable[[], cadquery.Shape] | None = field(default=None, compare=False)
    places: tuple[Place, ...] = (Place(),)
    mass_kg: float = 0.0
    notes: tuple[str, ...] = ()
