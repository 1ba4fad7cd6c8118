"""The list of flat roofs that the bridge check holds against its limit is whole: measured on the meshes."""

from __future__ import annotations

from typing import Any

import pytest

from fabgen.checks.printed import roofs
from fabgen.checks.registry import Context
from fabgen.parts.build import build_parts
from tests.parts.printing import overhangs_mm
from tests.samples import sample_feed

FEEDS: list[tuple[str, str, bool, float, dict[str, Any]]] = [
    ("wire", "printed", False, 1420.406, {}),
    ("sheet", "printed", True, 1420.406, {}),
    ("wire", "printed", True, 3400.1, {}),
    ("wire", "tube", False, 2304.1, {"radome": True}),
    ("sheet", "printed", False, 2304.1, {"radome": True, "flange": {"pattern": "none"}}),
]


@pytest.mark.slow
@pytest.mark.parametrize(("form", "make", "choke", "frequency_mhz", "can"), FEEDS)
def test_no_mesh_has_a_wider_roof_than_the_list(
    form: str, make: str, choke: bool, frequency_mhz: float, can: dict[str, Any]
) -> None:
    feed = sample_feed(form, make, frequency_mhz, choke, **can)
    parts = build_parts(feed)
    listed = {roof.part: roof.span_mm for roof in roofs(Context(feed, tuple(parts)))}
    # alike pieces of one body are the same by turning
    bodies = {part.key.rsplit("-", 1)[0] if part.key[-1].isdigit() else part.key: part for part in parts}
    printed = {name: part for name, part in bodies.items() if "print" in part.process}
    assert printed
    for name, part in printed.items():
        solid = part.print_solid or part.solid
        assert solid is not None
        shape = solid()
        shape = shape.translate((0.0, 0.0, -shape.BoundingBox().zmin))
        widest = max((patch.bridge_mm for patch in overhangs_mm(shape)), default=0.0)
        # a listed roof is there, and it is the widest
        assert widest == pytest.approx(listed.get(name, 0.0), abs=0.05), name
