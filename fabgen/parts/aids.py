"""Workshop aids that are made with the feed but are no part of it: test strips, bending jigs, foil patterns.

Depends on: parts (bend_strip, foil, jig, records), sizing.records.
"""

from __future__ import annotations

from fabgen.parts.bend_strip import bend_strip
from fabgen.parts.foil import foil_patterns
from fabgen.parts.jig import bending_jig
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed


def aid_parts(feed: Feed) -> tuple[Part, ...]:
    """All aids for this feed. None has a solid in the feed's frame."""
    return (*bend_strip(feed), *bending_jig(feed), *foil_patterns(feed))
