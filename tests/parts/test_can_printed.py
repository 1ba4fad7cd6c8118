"""The printed can, choke ring and radome cap, measured on their solids and meshes.

Limits of printing: 45 degrees and bridges from the issue's own list of what shops ask for (common practice, shop
guides agree); wall 1.2 mm likewise.
"""

from __future__ import annotations

import itertools
import math
from functools import cache

import pytest

from fabgen.errors import GeometryError
from fabgen.parts.build import build_parts
from fabgen.parts.can_printed import can_printed
from fabgen.parts.choke_printed import choke_printed
from fabgen.parts.radome_cap import radome_cap
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed
from fabgen.stock import tables
from fabgen.writers.mesh import CHORD_MM
from tests.parts.feeds import small_feed, template_feed, with_bed, with_cable
from tests.parts.printing import overhangs_mm, trimesh_of, wall_thicknesses_mm
from tests.samples import sample_feed

LARGE = (500.0, 500.0, 500.0)
USUAL = (220.0, 220.0, 250.0)
CASES = (
    "whole", "whole with choke", "sectors", "sectors with choke", "rings", "rings and sectors", "small",
    "hydrogen-brass", "hydrogen-brass on a low bed", "c-band-5760",
)  # fmt: skip
LEDGE_MM = CHORD_MM
"""The mesh's own error: a 45 degree face may be that much off where it ends."""


@cache
def case(name: str) -> Feed:
    """One feed per way of cutting."""
    plain, choke = (sample_feed("wire", "printed", choke=c, radome=True) for c in (False, True))
    feeds = {
        "whole": with_bed(plain, LARGE),
        "whole with choke": with_bed(choke, LARGE),
        "sectors": with_bed(plain, USUAL),
        "sectors with choke": with_bed(choke, USUAL),
        "rings": with_bed(plain, (300.0, 300.0, 40.0)),
        "rings and sectors": with_bed(plain, (220.0, 220.0, 60.0)),
        "small": small_feed(choke=True, radome=True),
        "hydrogen-brass": template_feed("hydrogen-brass"),
        "c-band-5760": template_feed("c-band-5760"),
        "hydrogen-brass on a low bed": with_bed(template_feed("hydrogen-brass"), (220.0, 220.0, 45.0)),
    }
    return feeds[name]


@cache
def printed_of(name: str) -> tuple[Part, ...]:
    """The printed parts of a case; their solids are kept for all tests of the case."""
    return tuple(p for p in build_parts(case(name)) if p.process[0] == "print")


def analytic_can_mm3(feed: Feed) -> float:
    """Floor disc + wall ring + flange ring - holes, without the notch, bead and ledge."""
    sizes, lining = feed.sizes, tables.lining(feed.job.can.lining)
    inner = sizes.can_bore_mm / 2 + lining.thickness_mm + lining.adhesive_mm
    outer = inner + sizes.wall_mm
    height = sizes.can_depth_mm + lining.thickness_mm + lining.adhesive_mm
    return math.pi * (inner**2 * sizes.floor_mm + (outer**2 - inner**2) * (height + sizes.floor_mm))


def test_plain_can_has_its_closed_form_volume() -> None:
    feed = with_bed(
        sample_feed("sheet", "printed", drain_holes=False, flange={"pattern": "none"}), LARGE
    )
    (part,) = can_printed(feed)
    solid = part.solid()
    connector, coax = tables.connector("sma-4"), tables.coax("rg402")
    assert coax.outer_mm < connector.panel_bore_mm
    # Three of the four screws are clear of the bar; the feet have two holes.
    foot = next(p for p in build_parts(feed) if p.key == "screw-foot").places
    holes = [connector.panel_bore_mm] + 3 * [connector.hole_mm]
    screw = tables.screw(next(k for k in ("M4", "M3", "M2.5", "M2") if k in _foot_name(feed)))
    holes += len(foot) * [screw.clearance_medium_mm]
    # Printed holes are drawn 0.2 mm larger (shop guides, common practice).
    taken = sum(math.pi / 4 * (d + 0.2) ** 2 for d in holes) * feed.sizes.floor_mm
    expected = analytic_can_mm3(feed) - taken
    assert solid.Volume() == pytest.approx(expected, rel=1e-6)


def _foot_name(feed: Feed) -> str:
    return next(p.name for p in build_parts(feed) if p.key == "screw-foot")


@pytest.mark.parametrize("pattern", ["circle", "square"])
@pytest.mark.parametrize("choke", [False, True])
def test_mass_follows_from_the_closed_form(pattern: str, choke: bool) -> None:
    flange = {"pattern": pattern, "count": 4}
    feed = with_bed(sample_feed("wire", "printed", choke=choke, radome=True, flange=flange), LARGE)
    density = tables.plastic("petg").density_kg_per_m3
    for part in (*can_printed(feed), *choke_printed(feed), *radome_cap(feed)):
        if part.process != ("print",):
            continue
        assert part.mass_kg == pytest.approx(part.solid().Volume() * 1e-9 * density, rel=1e-6), part.key


def test_bore_after_lining_is_the_simulated_one() -> None:
    for lining, thickness in (("copper-foil-35", 0.035 + 0.03), ("silver-paint", 0.025), ("copper-plating", 0.02)):
        feed = with_bed(sample_feed("wire", "printed", lining=lining), LARGE)
        solid = can_printed(feed)[0].solid()
        radii = {round(f.geomType() == "CYLINDER" and _radius(f), 6) for f in solid.Faces()}
        assert any(r == pytest.approx(feed.sizes.can_bore_mm / 2 + thickness, abs=1e-6) for r in radii)
        floor = [f.Center().z for f in solid.Faces() if f.geomType() == "PLANE" and f.normalAt().z > 0.5]
        assert any(z == pytest.approx(-thickness, abs=1e-6) for z in floor)
        assert max(floor) == pytest.approx(feed.sizes.can_depth_mm, abs=1e-6)


def _radius(face: object) -> float:
    return float(face._geomAdaptor().Cylinder().Radius())  # type: ignore[attr-defined]


@pytest.mark.parametrize("name", CASES)
def test_each_piece_is_one_closed_body_on_the_bed(name: str) -> None:
    bed = case(name).job.limits.bed_mm
    for part in printed_of(name):
        solid = part.print_solid()
        box = solid.BoundingBox(1e-6)
        assert abs(box.zmin) < 1e-4, part.key
        assert box.xlen <= bed[0]
        assert box.ylen <= bed[1]
        assert box.zlen <= bed[2]
        mesh = trimesh_of(solid)
        assert mesh.is_watertight
        assert mesh.is_winding_consistent
        assert mesh.body_count == 1
        assert mesh.volume == pytest.approx(solid.Volume(), rel=2e-3)
        assert solid.isValid()


@pytest.mark.parametrize("name", CASES)
def test_prints_without_support(name: str) -> None:
    for part in printed_of(name):
        for overhang in overhangs_mm(part.print_solid()):
            assert overhang.bridge_mm < 8.0, (part.key, overhang)
            assert overhang.ledge_mm <= LEDGE_MM, (part.key, overhang)


@pytest.mark.parametrize("name", CASES)
def test_no_wall_is_under_the_minimum(name: str) -> None:
    for part in printed_of(name):
        # A cap at 5.8 GHz is thinner for the field's sake and not below two lines.
        least = 0.8 if part.key.startswith("radome") else 1.2
        assert wall_thicknesses_mm(part.print_solid(), 300).min() > least - 0.01, part.key


@pytest.mark.parametrize("name", ["sectors", "rings", "rings and sectors"])
def test_pieces_fit_together(name: str) -> None:
    pieces = [p for p in printed_of(name) if p.key.startswith("can-")]
    assert len(pieces) > 1
    solids = [p.solid() for p in pieces]
    boxes = [s.BoundingBox() for s in solids]
    for i, j in itertools.combinations(range(len(solids)), 2):
        apart = boxes[i].zmax < boxes[j].zmin or boxes[j].zmax < boxes[i].zmin
        if not apart:
            assert solids[i].intersect(solids[j]).Volume() < 1e-3


def test_tongue_has_the_stated_clearance_in_its_groove() -> None:
    # Sliding clearance 0.25 mm a side (guides, 0.2 to 0.3 mm; read in a secondary page that quotes the source).
    # Pieces meet at the cut; moved along the cut the 45 degree faces touch after 0.25 * sqrt(2) mm.
    first, second = (p.solid() for p in printed_of("sectors")[:2])
    angle = next(
        a for a in range(0, 360)
        if _at_cut(first, second, math.radians(a))
    )
    way = (math.cos(math.radians(angle)), math.sin(math.radians(angle)), 0.0)
    for shift, meets in ((0.25 * math.sqrt(2) - 0.02, False), (0.25 * math.sqrt(2) + 0.1, True)):
        moved = second.translate(tuple(shift * w for w in way))
        assert (first.intersect(moved).Volume() > 1e-3) is meets


def _at_cut(first: object, second: object, angle: float) -> bool:
    """Whether the two pieces meet near this angle, seen at the middle of the floor."""
    at = (60 * math.cos(angle), 60 * math.sin(angle))
    step = math.radians(1.0)
    sides = [
        s.isInside((60 * math.cos(a), 60 * math.sin(a), -1.0))  # type: ignore[attr-defined]
        for s, a in ((first, angle - step), (second, angle + step), (first, angle + step), (second, angle - step))
    ]
    return bool(at) and sides == [True, True, False, False]


def test_pieces_are_the_whole_but_for_the_clearance_in_the_joints() -> None:
    # Ears and bells add to the plain body, gaps take from it: both are small against it.
    whole = next(p for p in printed_of("whole") if p.key == "can").solid().Volume()
    for name in ("sectors", "rings"):
        pieces = sum(p.solid().Volume() for p in printed_of(name) if p.key.startswith("can-"))
        assert whole < pieces < 1.15 * whole


def test_408_mhz_is_refused_with_the_make_that_works() -> None:
    feed = with_bed(sample_feed("wire", "printed", frequency_mhz=408.0), USUAL)
    with pytest.raises(GeometryError, match=r"220 x 220 x 250 mm; use can\.make = 'rolled'"):
        can_printed(feed)


def test_low_choke_is_one_piece_with_the_can() -> None:
    keys = {p.key for p in printed_of("small") if not p.key.startswith("jig")}
    assert keys == {"can", "radome"}


def test_choke_ring_stands_on_the_ledge() -> None:
    feed = case("whole with choke")
    can, choke = (next(p for p in printed_of("whole with choke") if p.key == k).solid() for k in ("can", "choke"))
    assert can.intersect(choke).Volume() < 1e-3
    assert can.distance(choke) == pytest.approx(0.0, abs=1e-6)
    lining = 0.065
    tops = [f.Center().z for f in choke.Faces() if f.geomType() == "PLANE" and f.normalAt().z > 0.5]
    floor_z, depth = feed.sizes.choke.floor_z_mm, feed.sizes.choke.depth_mm
    assert sorted({round(z, 4) for z in tops}) == [round(floor_z - lining, 4), round(floor_z + depth, 4)]


def test_cap_snaps_over_the_bead() -> None:
    feed = case("whole")
    can, cap = (next(p for p in printed_of("whole") if p.key == k).solid() for k in ("can", "radome"))
    assert can.intersect(cap).Volume() < 1e-3
    # Pulled off by 1 mm the bead is in the way.
    assert can.intersect(cap.translate((0, 0, 1.0))).Volume() > 1.0
    assert cap.BoundingBox(1e-6).zmax == pytest.approx(feed.sizes.can_depth_mm + 1.2, abs=1e-4)


@pytest.mark.parametrize("connector", ["sma-2", "n-4", "bnc-4"])
def test_other_connectors_keep_the_can_whole(connector: str) -> None:
    for form in ("wire", "sheet"):
        feed = with_cable(with_bed(sample_feed(form, "printed"), LARGE), connector=connector)
        assert can_printed(feed)[0].solid().isValid()


@pytest.mark.parametrize(
    ("name", "how"),
    [
        ("sectors", "no tongue: join on a flat plate"),
        ("sectors with choke", "flat plate, with the screwed choke ring over their joints"),
        ("rings", "spigot in bell and key in slot"),
        ("hydrogen-brass", "no tongue: join on a flat plate"),
    ],
)
def test_pieces_say_how_they_come_together(name: str, how: str) -> None:
    pieces = [p for p in printed_of(name) if p.key.startswith("can-")]
    assert all(how in "; ".join(p.notes) for p in pieces)


def test_a_thicker_floor_has_a_tongue_that_keeps_its_lips() -> None:
    # 4 mm: lips of the least wall, 1.2 mm, each side of a groove 0.25 mm wider than the tongue.
    feed = with_bed(sample_feed("wire", "printed", floor_mm=4.0), USUAL)
    pieces = [p for p in can_printed(feed) if p.process[0] == "print"]
    assert len(pieces) > 1
    assert not any("no tongue" in note for p in pieces for note in p.notes)
    for part in pieces:
        assert wall_thicknesses_mm(part.print_solid(), 300).min() > 1.2 - 0.01
        assert all(o.bridge_mm < 8.0 and o.ledge_mm <= LEDGE_MM for o in overhangs_mm(part.print_solid()))
    first, second = (p.solid() for p in pieces[:2])
    assert first.intersect(second).Volume() < 1e-3
    # Moved up, the tongue meets the groove's 45 degree face after 0.25 * sqrt(2) mm.
    for shift, meets in ((0.25 * math.sqrt(2) - 0.02, False), (0.25 * math.sqrt(2) + 0.1, True)):
        assert (first.intersect(second.translate((0.0, 0.0, shift))).Volume() > 1e-3) is meets


def test_spigot_and_key_have_the_stated_clearance() -> None:
    lower, upper = (p.solid() for p in printed_of("rings")[:2])
    for way in ((1.0, 0.0, 0.0), (0.0, 1.0, 0.0)):
        for shift, meets in ((0.25 - 0.02, False), (0.25 + 0.05, True)):
            moved = upper.translate(tuple(shift * w for w in way))
            assert (lower.intersect(moved).Volume() > 1e-3) is meets, (way, shift)


def test_cap_and_choke_ring_have_the_stated_clearance() -> None:
    parts = {p.key: p.solid() for p in printed_of("whole with choke") if p.key in {"can", "choke", "radome"}}
    for key in ("choke", "radome"):
        for shift, meets in ((0.25 - 0.02, False), (0.25 + 0.05, True)):
            moved = parts[key].translate((shift, 0.0, 0.0))
            assert (parts["can"].intersect(moved).Volume() > 1e-3) is meets, (key, shift)
