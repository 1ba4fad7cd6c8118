"""All parts together: order, keys, places, no two solids in one place, and what importing costs."""

from __future__ import annotations

import dataclasses
import itertools
import math
import subprocess
import sys

import pytest

from fabgen.errors import GeometryError
from fabgen.parts import kernel
from fabgen.parts.build import assembly, build_parts
from fabgen.parts.capacitor import crossing_of
from fabgen.sizing.records import Feed
from fabgen.stock import tables
from tests.parts.feeds import with_cable
from tests.samples import sample_feed


def overlaps(feed: Feed) -> list[tuple[str, str, float]]:
    """Pairs of placed solids with more than a thousandth of a cubic millimetre in common."""
    copies = [(f"{c.part.key} {c.number}", c.solid()) for c in assembly(build_parts(feed))]
    boxes = [solid.BoundingBox() for _, solid in copies]
    found = []
    for i, j in itertools.combinations(range(len(copies)), 2):
        a, b = boxes[i], boxes[j]
        if a.xmin > b.xmax or b.xmin > a.xmax or a.ymin > b.ymax or b.ymin > a.ymax:
            continue
        if a.zmin > b.zmax or b.zmin > a.zmax:
            continue
        volume = copies[i][1].intersect(copies[j][1]).Volume()
        if volume > 1e-3:
            found.append((copies[i][0], copies[j][0], volume))
    return found


@pytest.mark.parametrize(
    ("form", "make", "choke", "connector", "pattern"),
    [
        ("wire", "printed", False, "sma-4", "circle"),
        ("sheet", "printed", True, "sma-4", "square"),
        ("sheet", "turned", True, "n-4", "circle"),
        ("wire", "turned", False, "sma-2", "none"),
        ("wire", "tube", True, "bnc-4", "circle"),
        ("sheet", "tube", False, "sma-2", "square"),
    ],
)
def test_no_two_parts_are_in_one_place(form: str, make: str, choke: bool, connector: str, pattern: str) -> None:
    flange = {"pattern": pattern, "count": 4}
    feed = with_cable(sample_feed(form, make, choke=choke, radome=True, flange=flange), connector=connector)
    assert overlaps(feed) == []


@pytest.mark.parametrize("form", ["wire", "sheet"])
@pytest.mark.parametrize("make", ["printed", "tube", "turned", "rolled", "folded"])
def test_parts_have_unique_ascii_keys_and_say_all(form: str, make: str) -> None:
    parts = build_parts(sample_feed(form, make, choke=True, radome=True))
    keys = [p.key for p in parts]
    assert len(set(keys)) == len(keys)
    assert keys.index("loop") < keys.index("connector") < keys.index("coax-stub")
    for part in parts:
        assert part.key.isascii()
        assert part.name.isascii()
        assert part.mass_kg > 0, part.key
        assert part.sizes, part.key
        assert part.quantity == len(part.places) or part.solid is None, part.key
        assert part.material_name


def test_importing_the_parts_does_not_import_the_kernel() -> None:
    code = (
        "import sys, fabgen.parts.build, fabgen.parts.containment, fabgen.writers.step, fabgen.writers.stl\n"
        "from tests.samples import sample_feed\n"
        "fabgen.parts.build.build_parts(sample_feed('wire', 'printed', choke=True, radome=True))\n"
        "heavy = [m for m in ('cadquery', 'OCP', 'vtkmodules', 'netgen', 'matplotlib') if m in sys.modules]\n"
        "sys.exit(', '.join(heavy) or 0)\n"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr


@pytest.mark.parametrize("form", ["wire", "sheet"])
def test_bought_parts_have_the_volume_of_their_dimensions(form: str) -> None:
    parts = {p.key: p for p in build_parts(with_cable(sample_feed(form, "turned"), connector="n-4"))}

    def volume(key: str) -> float:
        return float(parts[key].solid().Volume())

    def size(key: str) -> dict[str, float]:
        return dict(parts[key].sizes)

    # ISO 4762 M3: head 5.5 x 3; ISO 4032 M3: 5.5 across flats, 2.4 high; from memory.
    length = size("screw-connector")["length_mm"]
    assert volume("screw-connector") == pytest.approx(math.pi / 4 * (5.5**2 * 3.0 + 9.0 * length), rel=1e-6)
    assert volume("nut-connector") == pytest.approx(2.4 * (math.sqrt(3) / 2 * 5.5**2 - math.pi / 4 * 9.0), rel=1e-6)
    row = tables.connector("n-4")
    flange = (row.flange_width_mm**2 - 4 * math.pi / 4 * row.hole_mm**2) * row.flange_thickness_mm
    body = math.pi / 4 * row.body_mm**2 * row.body_length_mm
    assert volume("connector") == pytest.approx(flange + body, rel=1e-6)
    for key in ("capacitor-tube", "capacitor-liner"):
        tube = size(key)
        ring = math.pi / 4 * (tube["outer_mm"] ** 2 - tube["bore_mm"] ** 2)
        assert volume(key) == pytest.approx(ring * tube["length_mm"], rel=1e-3)  # the page's length has 0.01 mm
    stub, coax = size("coax-stub"), tables.coax("rg402")
    cable = coax.outer_mm**2 * stub["jacket_mm"] + coax.inner_mm**2 * stub["bared_mm"]
    assert volume("coax-stub") == pytest.approx(math.pi / 4 * cable, rel=1e-3)
    assert parts["coax-stub"].mass_kg == pytest.approx(volume("coax-stub") * 5500e-9, rel=1e-6)


def test_connector_screws_are_a_standard_length_and_reach_their_nuts() -> None:
    feed = sample_feed("wire", "turned")
    parts = {p.key: p for p in build_parts(feed)}
    row = tables.connector("sma-4")
    nut = tables.screw("M2.5").nut_height_mm
    grip = feed.sizes.floor_mm + row.flange_thickness_mm + nut
    length = dict(parts["screw-connector"].sizes)["length_mm"]
    assert grip < length < grip + 4.0
    tip = min(c.solid().BoundingBox(1e-6).zmin for c in assembly([parts["screw-connector"]]))
    assert tip == pytest.approx(-length, abs=1e-4)


def test_connector_holes_are_at_the_standard_pitch() -> None:
    # Hole pitch 8.64 mm (0.340 in): MIL-STD-348 / MIL-PRF-39012 drawings, CN-05, partly read, rest from memory.
    from fabgen.parts.floor_plan import connector_hole_points

    points = connector_hole_points(sample_feed("wire", "turned"))
    sides = sorted(((a[0] - b[0]) ** 2 + (a[1] - b[1]) ** 2) ** 0.5 for a, b in itertools.combinations(points, 2))
    assert sides[:4] == pytest.approx([8.64] * 4)


@pytest.mark.parametrize("form", ["wire", "sheet"])
def test_coax_touches_its_bar_and_core_slides_in_the_tube(form: str) -> None:
    feed = sample_feed(form, "turned")
    parts = {p.key: p for p in build_parts(feed)}
    stub, tube, liner, loop = (
        parts[k].solid() for k in ("coax-stub", "capacitor-tube", "capacitor-liner", "loop")
    )
    for a, b in ((stub, tube), (stub, liner), (liner, tube)):
        assert a.intersect(b).Volume() < 1e-3
    assert stub.distance(liner) == pytest.approx(0.0, abs=1e-6)
    assert tube.distance(liner) == pytest.approx(0.0, abs=1e-6)
    # Both lie against their bars; what is left is a fillet of solder.
    assert stub.distance(loop) < 0.01
    assert stub.intersect(loop).Volume() < 1e-3
    assert tube.distance(loop) < 0.06
    assert tube.intersect(loop).Volume() < 1e-3
    # Seen along the crossing, which is turned about the coax so that the sleeve meets its bar.
    run = crossing_of(feed)
    assert run.slant_deg < 5.0
    box, core = (
        kernel.turned(s, run.slant_deg, through=(run.x_mm, run.coax_y_mm, 0.0)).BoundingBox(1e-6) for s in (tube, stub)
    )
    overlap = box.ymax - core.ymin
    assert overlap == pytest.approx(feed.capacitor.overlap_mm, abs=1e-3)
    assert box.ylen >= feed.capacitor.overlap_max_mm


@pytest.mark.parametrize("connector", ["sma-4", "sma-2", "n-4", "bnc-4"])
@pytest.mark.parametrize("form", ["wire", "sheet"])
def test_the_jackets_bond_to_its_bar_is_drawn_as_made(form: str, connector: str) -> None:
    """Solder fills 0.3 mm by itself (common practice); a wider gap has its strip of copper, drawn and listed."""
    feed = with_cable(sample_feed(form, "turned"), connector=connector)
    parts = {p.key: p for p in build_parts(feed)}
    stub, loop = parts["coax-stub"], parts["loop"].solid()
    gap = dict(stub.sizes)["gap_to_bar_mm"]
    assert stub.solid().distance(loop) == pytest.approx(gap, abs=0.02)
    assert ("coax-bond" in parts) == (gap > 0.3) == (form == "sheet" and connector in {"n-4", "bnc-4"})
    if "coax-bond" in parts:
        strip = parts["coax-bond"].solid()
        assert "bond strip" in stub.finish
        assert strip.distance(stub.solid()) == pytest.approx(0.0, abs=1e-6)
        assert strip.distance(loop) < 0.1
        assert strip.intersect(stub.solid()).Volume() < 1e-3
        assert strip.intersect(loop).Volume() < 1e-3
        above = dict(stub.sizes)["jacket_mm"] - feed.sizes.floor_mm
        assert dict(parts["coax-bond"].sizes)["length_mm"] == pytest.approx(above, abs=0.011)


def test_plate_capacitor_has_its_overlap_and_film() -> None:
    feed = sample_feed("wire", "turned")
    plates = dataclasses.replace(feed.capacitor, form="plates", plate_width_mm=8.0, film_mm=0.5, overlap_mm=5.0)
    parts = {p.key: p for p in build_parts(dataclasses.replace(feed, capacitor=plates))}
    a, b = (parts[k].solid().BoundingBox(1e-6) for k in ("capacitor-plate-coax", "capacitor-plate-bar"))
    assert min(a.ymax, b.ymax) - max(a.ymin, b.ymin) == pytest.approx(5.0, abs=1e-3)
    assert a.xmin - b.xmax == pytest.approx(0.5, abs=1e-3)
    assert min(a.zlen, b.zlen) == pytest.approx(8.0, abs=1e-3)


def test_bars_too_close_for_the_coax_are_refused_with_a_cure() -> None:
    feed = sample_feed("wire", "turned")
    close = dataclasses.replace(feed, sizes=dataclasses.replace(feed.sizes, leg_pitch_mm=4.4))
    with pytest.raises(GeometryError, match="choose a thinner coax or fix leg_pitch_mm"):
        crossing_of(close)


def test_square_flange_with_a_count_that_does_not_fit_is_refused() -> None:
    feed = sample_feed("wire", "turned", flange={"pattern": "square", "count": 6})
    with pytest.raises(GeometryError, match="count = 4, 8, 12 or 16"):
        build_parts(feed)


def test_bolt_circle_inside_the_can_is_refused() -> None:
    feed = sample_feed("wire", "turned", flange={"bolt_circle_mm": 100.0})
    with pytest.raises(GeometryError, match="bolt_circle_mm = 100"):
        build_parts(feed)
