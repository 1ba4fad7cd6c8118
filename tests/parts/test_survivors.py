"""What mutation testing found no test to hold in the parts."""

from __future__ import annotations

import dataclasses
import itertools
import math

import pytest

from fabgen.parts.bend_table import fold_edges_mm
from fabgen.parts.build import build_parts
from fabgen.parts.can_printed import _keep_clear, body_of, choke_screw_points
from fabgen.parts.can_tube import LIP_MM
from fabgen.parts.contour import Circle, FoldLine, area_mm2, bounds_mm, polygon
from fabgen.parts.floor_plan import _rounded_square
from fabgen.parts.jig import bending_jig, leg_outlines
from fabgen.parts.print_rules import PrintRules, print_rules
from fabgen.parts.radome_cap import cover_mm
from fabgen.parts.records import FlatPattern
from fabgen.parts.screws import STEEL_DENSITY
from fabgen.parts.shell import profile
from fabgen.parts.split import Envelope, plan_split
from fabgen.sizing.records import Feed
from fabgen.stock import tables
from tests.parts.feeds import with_cable
from tests.samples import sample_feed


def with_choke_floor(feed: Feed, floor_z_mm: float) -> Feed:
    assert feed.sizes.choke is not None
    choke = dataclasses.replace(feed.sizes.choke, floor_z_mm=floor_z_mm)
    return dataclasses.replace(feed, sizes=dataclasses.replace(feed.sizes, choke=choke))


def test_an_edge_close_to_its_fold_is_measured() -> None:
    # a strip of 10 x 20 with a fold 0.4 mm from one long edge: read off the drawing
    flat = FlatPattern(polygon([(0, 0), (20, 0), (20, 10), (0, 10)]))
    fold = FoldLine(1, (0.0, 9.6), (20.0, 9.6), 90.0, 0.5, 0.4, 1.0, 1.0, 1)
    assert fold_edges_mm(flat, fold) == pytest.approx((0.4, 9.6))
    back = dataclasses.replace(fold, start=(0.0, 0.3), end=(20.0, 0.3))
    assert fold_edges_mm(flat, back) == pytest.approx((9.7, 0.3))


@pytest.mark.parametrize("level_choke", [False, True])
def test_a_tube_without_flange_has_its_rim_of_solder(level_choke: bool) -> None:
    feed = sample_feed("wire", "tube", choke=level_choke, flange={"pattern": "none"})
    feed = with_choke_floor(feed, 0.0) if level_choke else feed
    floor = next(part for part in build_parts(feed) if part.key == "floor")
    bore = feed.sizes.choke.bore_mm if feed.sizes.choke is not None else feed.sizes.can_bore_mm
    assert floor.flat is not None
    assert isinstance(floor.flat.outline, Circle)
    # the outer tube stands on the floor, with a rim for the fillet of solder
    rim = bore + 2 * feed.sizes.wall_mm + 2 * LIP_MM
    assert floor.flat.outline.diameter_mm == pytest.approx(rim)
    assert rim in [value for _, value in floor.sizes]


def test_the_choke_of_a_tube_can_slides_over_the_tube() -> None:
    feed = with_choke_floor(sample_feed("wire", "tube", choke=True), 25.0)
    ring = next(part for part in build_parts(feed) if part.key == "choke-floor")
    sizes = feed.sizes
    assert ring.flat is not None
    assert sizes.choke is not None
    assert isinstance(ring.flat.outline, Circle)
    hole = max(h.diameter_mm for h in ring.flat.holes if isinstance(h, Circle))
    assert hole == pytest.approx(sizes.can_bore_mm + 2 * sizes.wall_mm)
    assert ring.flat.outline.diameter_mm == pytest.approx(sizes.choke.bore_mm + 2 * sizes.wall_mm + 2 * LIP_MM)


def test_cuts_of_a_printed_can_keep_clear_of_screws_and_inserts() -> None:
    feed = sample_feed("wire", "printed", choke=True, flange={"pattern": "circle", "count": 6})
    body, rules = body_of(feed), print_rules(feed)
    circles = {(c.x_mm, c.y_mm): c.diameter_mm for c in _keep_clear(feed, body, rules)}
    assert body.flange is not None
    assert body.ledge is not None
    # ISO 4762 (from memory): an M4 socket head is 7 mm wide; an ear of the joint reaches 4 mm to each side of its cut
    for hole in body.flange.holes:
        assert 7.0 + 2 * 4.0 <= circles[hole.x_mm, hole.y_mm] <= 7.0 + 2 * 4.0 + 3.0
    # the ledge is as wide as an insert with its plastic on both sides
    for point in choke_screw_points(feed, body):
        assert circles[point] == pytest.approx(body.ledge.width_mm)


def test_bounds_of_a_circle_off_the_origin() -> None:
    assert bounds_mm(Circle(1.0, 2.0, 6.0)) == (-2.0, -1.0, 4.0, 5.0)


def test_a_rounded_square_has_its_area_and_corners() -> None:
    # w^2 - (4 - pi) r^2; the middle of each corner's arc lies r from the corner's centre on the diagonal
    square = _rounded_square(100.0, 10.0)
    assert area_mm2(square) == pytest.approx(100**2 - (4 - math.pi) * 10**2)
    assert bounds_mm(square) == pytest.approx((-50, -50, 50, 50))


def test_a_spacer_weighs_its_metal() -> None:
    feed = with_cable(sample_feed("wire", "tube"), connector="n-4")
    spacer = next((part for part in build_parts(feed) if part.key == "connector-spacer"), None)
    assert spacer is not None
    assert spacer.solid is not None
    # EN AW-5754: 2,670 kg/m3 (EN 573 data sheets; from memory)
    assert spacer.mass_kg == pytest.approx(spacer.solid().Volume() * 1e-9 * 2670, rel=5e-3)


def test_a_printed_choke_states_the_bores_that_are_printed() -> None:
    feed = sample_feed("wire", "printed", choke=True)
    parts = [part for part in build_parts(feed) if part.key.startswith("choke")]
    sizes = dict(parts[0].sizes)
    lining = tables.lining(feed.job.can.lining).thickness_mm
    assert feed.sizes.choke is not None
    assert sizes["bore_before_lining_mm"] == pytest.approx(feed.sizes.choke.bore_mm + 2 * lining, abs=0.3)
    outside = feed.sizes.can_bore_mm + 2 * lining + 2 * feed.sizes.wall_mm
    assert 0.0 < sizes["hub_bore_mm"] - outside < 2.0


@pytest.mark.parametrize("frequency_mhz", [408.0, 1420.406, 3400.0, 5800.0, 7000.0])
def test_a_cap_stays_thin_against_the_wavelength(frequency_mhz: float) -> None:
    feed = sample_feed("wire", "printed", frequency_mhz)
    share = tables.limit("radome_max_wavelengths").value
    least = tables.limit("print_wall_thin_mm").value
    cover = cover_mm(feed)
    assert least <= cover <= max(least, share * feed.job.wavelength_mm)
    # six layers of 0.2 mm where there is room for them, else the next tenth below the limit
    assert cover in {1.2, least} or cover > share * feed.job.wavelength_mm - 0.1 - 1e-9


def test_a_cap_slips_over_the_can() -> None:
    feed = sample_feed("wire", "tube", radome=True)
    cap = next(part for part in build_parts(feed) if part.key.startswith("radome"))
    sizes = dict(cap.sizes)
    outside = feed.sizes.can_bore_mm + 2 * feed.sizes.wall_mm
    assert 0.0 < sizes["skirt_bore_mm"] - outside < 3.0


def test_the_wire_lies_between_fence_and_block() -> None:
    feed = sample_feed("wire", "rolled")
    path = next(part for part in build_parts(feed) if part.key == "loop").wire
    assert path is not None
    leg = path.bends[0]
    block, fence, stop = (bounds_mm(outline) for outline in leg_outlines(path, leg, 95.0))
    # the channel between them takes the wire with less than half a millimetre to spare
    assert path.diameter_mm < block[1] - fence[3] < path.diameter_mm + 0.5
    assert fence[3] < 0 < block[1]
    # the fence ends before the bend begins, so that the hand that bends has room
    assert fence[2] < 0
    # the stop closes the end of the channel, where the wire's straight piece ends
    assert stop[2] == pytest.approx(fence[0])
    assert 0 <= -(leg.start_mm + path.beyond_mm) - stop[2] < 0.5
    assert stop[1] <= fence[1]
    assert stop[3] >= block[1]


def test_a_bending_form_shows_where_the_loop_begins_and_ends() -> None:
    # one mark at each side of the gap, which lies on +x: the form is its own mirror image in y
    form = next(part for part in bending_jig(sample_feed("wire", "rolled")) if part.key == "jig-loop")
    assert form.print_solid is not None
    solid = form.print_solid()
    box = solid.BoundingBox(1e-3)
    assert solid.Center().y == pytest.approx((box.ymin + box.ymax) / 2, abs=1e-5)


def test_screws_are_of_stainless_steel() -> None:
    # A2 and A4: 7.9 to 8.0 g/cm3 (EN 10088-1; from memory)
    assert 7850 <= STEEL_DENSITY <= 8000


@pytest.mark.parametrize("low_mm", [30.0, 45.0, 60.0])
def test_every_ring_fits_the_bed_where_a_band_moves_its_joint(low_mm: float) -> None:
    band, bed_mm = (low_mm, low_mm + 40.0), 90.0
    envelope = Envelope("body", 60.0, 60.0, 0.0, 150.0, (), bands=(band,))
    rules = PrintRules(0.4, 1.2, 0.2, 0.25, 2.0, 1.6, (200.0, 200.0, bed_mm), 0.3)
    levels = plan_split(envelope, rules).levels_mm
    assert levels
    assert all(not band[0] < level < band[1] for level in levels)
    assert all(0 < high - low <= bed_mm for low, high in itertools.pairwise((0.0, *levels, 150.0)))


def test_only_a_can_with_a_cap_has_the_bead_that_holds_it() -> None:
    for radome in (False, True):
        body = body_of(sample_feed("wire", "printed", radome=radome, flange={"pattern": "none"}))
        below = [r for r, z in profile(body) if z > body.flange_top_mm + 1.0]
        assert (max(below) > body.outer_radius_mm) == radome
        if radome:
            assert max(below) == pytest.approx(body.outer_radius_mm + body.bead_mm)
