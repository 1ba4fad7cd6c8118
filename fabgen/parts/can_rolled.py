"""The can of rolled sheet: floor with flange, rolled wall with a lap seam in the E-plane, and the choke if any.

Section through the axis, H-plane::

            |<------ can_bore ------>|          z = can_depth (rim)
            |                        |
            | wall                   |          wall_mm thick
            |                        |
        .---'                        '---.      tabs of the wall, folded out and screwed or riveted
     .--o--------------------------------o--.   z = 0
     '--------------------------------------'   floor_mm thick
     |<------------ flange --------------->|

The seam is at phi = 90 degrees: no current of the dominant mode flows round the wall there. The joint of wall and
floor carries current all round; a metal that solders is soldered all round, another gets tabs at a tenth of a
wavelength. The wall of a choke stands on a ring in the same way.

Depends on: errors, parts (wall_plan, wall_strip, wall_part, floor_sheet, choke_ring), sizing.records.
"""

from __future__ import annotations

from fabgen.errors import GeometryError
from fabgen.parts.can_sheet import sheet_can
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed


def can_rolled(feed: Feed) -> tuple[Part, ...]:
    """Floor, wall, and with a choke its ring and wall, with their screws."""
    if feed.sizes.can_flats:
        raise GeometryError("a rolled can is round; sizes with flats belong to can.make = 'folded'")
    return sheet_can(feed)
