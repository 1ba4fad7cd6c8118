"""A choke whose floor is level with the can's: both walls of sheet stand on one floor."""

from __future__ import annotations

import dataclasses

import pytest

from fabgen.errors import GeometryError, NotCoveredError
from fabgen.parts.build import build_parts
from fabgen.parts.can_printed import can_printed, can_split, one_piece_bed_mm
from fabgen.parts.can_sheet import can_wall, choke_wall
from fabgen.parts.wall_strip import tab_holes
from fabgen.sizing.records import Feed
from fabgen.stock.joints import least_choke_floor_mm, nearest_choke_floor_mm
from tests.parts.feeds import with_bed
from tests.samples import sample_feed


def with_choke_floor(feed: Feed, floor_z_mm: float) -> Feed:
    assert feed.sizes.choke is not None
    choke = dataclasses.replace(feed.sizes.choke, floor_z_mm=floor_z_mm)
    return dataclasses.replace(feed, sizes=dataclasses.replace(feed.sizes, choke=choke))


@pytest.mark.parametrize("make", ["rolled", "folded"])
def test_both_walls_stand_on_one_floor(make: str) -> None:
    feed = with_choke_floor(sample_feed("wire", make, choke=True), 0.0)
    parts = {p.key: p for p in build_parts(feed)}
    assert "choke-ring" not in parts
    assert "screw-choke-ring" not in parts
    floor = parts["floor"]
    outer = choke_wall(feed)
    assert outer is not None
    wanted = {(round(h.x_mm, 6), round(h.y_mm, 6)) for wall in (can_wall(feed), outer) for h in tab_holes(wall)}
    assert floor.flat is not None
    found = {(round(h.x_mm, 6), round(h.y_mm, 6)) for h in floor.flat.holes if hasattr(h, "diameter_mm")}
    assert wanted <= found
    assert floor.solid is not None
    assert feed.sizes.choke is not None
    assert floor.solid().BoundingBox(1e-3).xlen > feed.sizes.choke.bore_mm
    assert floor.solid().isValid()


def test_a_ring_inside_the_tabs_is_refused_with_both_ways_out() -> None:
    feed = with_choke_floor(sample_feed("wire", "rolled", choke=True), 2.0)
    with pytest.raises(GeometryError, match=r"give 0, so that both walls stand on one floor, or \d"):
        build_parts(feed)


@pytest.mark.parametrize("make", ["rolled", "printed", "tube", "turned"])
def test_a_choke_floor_below_the_cans_is_not_covered(make: str) -> None:
    feed = with_choke_floor(sample_feed("wire", make, choke=True), -3.0)
    with pytest.raises(NotCoveredError, match="give 0 or more"):
        build_parts(feed)


@pytest.mark.parametrize("make", ["printed", "turned"])
def test_level_choke_is_one_piece_in_plastic_and_from_bar(make: str) -> None:
    feed = with_choke_floor(sample_feed("sheet", make, frequency_mhz=2000.0, choke=True), 0.0)
    keys = {p.key for p in build_parts(feed)}
    assert not {"choke", "choke-1"} & keys


def test_pieces_of_a_level_choke_name_no_ring_that_is_not_there_and_the_bed_that_takes_them_whole() -> None:
    feed = with_choke_floor(sample_feed("wire", "printed", choke=True), 0.0)
    side, height = one_piece_bed_mm(feed)
    pieces = can_printed(with_bed(feed, (side - 1.0, side - 1.0, height)))
    assert len(pieces) > 1
    assert not any("choke ring" in note for part in pieces for note in part.notes)
    assert can_split(with_bed(feed, (side, side, height))).sectors == 1


@pytest.mark.parametrize("make", ["rolled", "folded", "tube", "printed", "turned"])
def test_the_least_height_of_a_chokes_floor_is_what_the_parts_take(make: str) -> None:
    feed = sample_feed("wire", make, choke=True)
    sizes, choke = feed.sizes, feed.sizes.choke
    assert choke is not None
    given = (make, sizes.can_bore_mm, sizes.wall_mm, sizes.floor_mm)
    least = least_choke_floor_mm(*given)
    # By hand for a can of more than 120 mm: floor + wall + head of an M3 screw, 3 mm (ISO 4762, from memory).
    by_hand = {"tube": sizes.floor_mm, "rolled": sizes.floor_mm + sizes.wall_mm + 3.0}
    by_hand["folded"] = by_hand["rolled"]
    assert least == pytest.approx(by_hand.get(make, 0.0), abs=0.1)

    assert build_parts(with_choke_floor(feed, least))
    assert build_parts(with_choke_floor(feed, 0.0))
    if least:
        with pytest.raises(GeometryError, match=f"{least:g} or more"):
            build_parts(with_choke_floor(feed, least - 0.1))
        assert [nearest_choke_floor_mm(w, *given) for w in (0.3, least - 0.3, least + 2.0)] == [0.0, least, least + 2.0]
