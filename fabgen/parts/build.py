"""All parts of a feed, in the order in which they go together.

Depends on: errors, parts, sizing.records. Importing this module does not import the CAD kernel; calling a
part's ``solid`` does.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from fabgen.errors import GeometryError, NotCoveredError
from fabgen.parts.bend_strip import bend_strip
from fabgen.parts.can_folded import can_folded
from fabgen.parts.can_printed import can_printed
from fabgen.parts.can_rolled import can_rolled
from fabgen.parts.can_tube import can_tube
from fabgen.parts.can_turned import can_turned
from fabgen.parts.capacitor import capacitor_parts, coax_bond, coax_stub
from fabgen.parts.choke_printed import choke_printed
from fabgen.parts.connector import connector, spacer
from fabgen.parts.fastening import connector_fasteners, foot_fasteners
from fabgen.parts.foil import foil_patterns
from fabgen.parts.jig import bending_jig
from fabgen.parts.kernel import placed
from fabgen.parts.loop_sheet import loop_sheet
from fabgen.parts.loop_wire import loop_wire
from fabgen.parts.radome_cap import radome_cap
from fabgen.parts.records import Part, Place
from fabgen.sizing.records import Feed

if TYPE_CHECKING:
    import cadquery


@dataclass(frozen=True)
class Placement:
    """One copy of a part in the assembly; ``number`` counts the copies from 1."""

    part: Part
    place: Place
    number: int

    def solid(self) -> cadquery.Shape:
        """The copy's solid in the feed's frame."""
        if self.part.solid is None:
            raise GeometryError(f"{self.part.name} has no solid to place")
        return placed(self.part.solid(), self.place)


def build_parts(feed: Feed) -> tuple[Part, ...]:
    """Every part of the feed, can first, in assembly order, then the workshop aids; keys are unique.

    Raises GeometryError where sizes do not fit together, NotCoveredError for what is not built.
    """
    parts: list[Part | None] = [*_can(feed), *foil_patterns(feed), *_loop(feed), *foot_fasteners(feed)]
    parts += [spacer(feed), connector(feed), *connector_fasteners(feed)]
    parts += [coax_stub(feed), coax_bond(feed), *capacitor_parts(feed), *radome_cap(feed)]
    parts += [*bend_strip(feed), *bending_jig(feed)]
    made = tuple(part for part in parts if part is not None)
    keys = [part.key for part in made]
    if len(set(keys)) < len(keys):
        raise GeometryError(f"two parts have the same key: {', '.join(sorted(k for k in keys if keys.count(k) > 1))}")
    return made


def assembly(parts: Sequence[Part]) -> Iterator[Placement]:
    """All copies of all parts that have a solid, in order."""
    for part in parts:
        if part.solid is not None:
            for number, place in enumerate(part.places, start=1):
                yield Placement(part, place, number)


def _can(feed: Feed) -> tuple[Part, ...]:
    choke = feed.sizes.choke
    if choke is not None and choke.floor_z_mm < 0:
        raise NotCoveredError(
            f"can.choke.floor_z_mm = {choke.floor_z_mm:g} puts the choke's floor below the can's; give 0 or more"
        )
    makers = {
        "rolled": can_rolled,
        "folded": can_folded,
        "printed": _printed,
        "tube": can_tube,
        "turned": can_turned,
    }
    return makers[feed.job.can.make](feed)


def _printed(feed: Feed) -> tuple[Part, ...]:
    return (*can_printed(feed), *choke_printed(feed))


def _loop(feed: Feed) -> tuple[Part, ...]:
    return (loop_sheet(feed) if feed.sizes.conductor == "strip" else loop_wire(feed),)
