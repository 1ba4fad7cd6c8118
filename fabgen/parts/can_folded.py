"""The can folded from sheet: a prism of 6, 8 or 12 equal flats on a floor with flange, and the choke if any.

Seen from the aperture, eight flats::

                ____/ seam: lap in the middle of the flat on the E-plane (phi = 90 degrees)
              /      \\
             |        |--- middle of a flat on +x
             |        |
              \\ ____ /
             |<------>|   can_bore across flats, inner faces

With six flats the E-plane meets a corner, and the seam lies beside that corner. Wall, joint and choke are those
of the rolled can.

Depends on: errors, parts (can_sheet), sizing.records.
"""

from __future__ import annotations

from fabgen.errors import GeometryError
from fabgen.parts.can_sheet import sheet_can
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed


def can_folded(feed: Feed) -> tuple[Part, ...]:
    """Floor, folded wall, and with a choke its ring and wall, with their screws."""
    if not feed.sizes.can_flats:
        raise GeometryError("a folded can has flats; round sizes belong to can.make = 'rolled'")
    return sheet_can(feed)
