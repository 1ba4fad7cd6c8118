"""The kernel's measure of how far simulated surfaces lie outside the drawn solids."""

from __future__ import annotations

import math

import numpy as np
import pytest

from fabgen.errors import GeometryError
from fabgen.parts.build import build_parts
from fabgen.parts.containment import gaps_mm, mid_surface_gap
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed
from tests.samples import sample_feed


def parts_of(feed: Feed, *starts: str) -> list[Part]:
    return [p for p in build_parts(feed) if p.key.startswith(starts)]


def loop_points(feed: Feed, count: int = 200) -> np.ndarray:
    sizes = feed.sizes
    radius = sizes.loop_diameter_mm / 2
    angles = np.linspace(math.radians(40), math.radians(320), count)
    return np.column_stack(
        (radius * np.cos(angles), radius * np.sin(angles), np.full(count, sizes.loop_height_mm))
    )


@pytest.mark.parametrize("form", ["wire", "sheet"])
def test_drawn_loop_holds_the_simulated_loop(form: str) -> None:
    feed = sample_feed(form, "turned")
    assert mid_surface_gap(loop_points(feed), parts_of(feed, "loop")) == 0.0


def test_drawn_can_holds_the_simulated_wall_and_floor() -> None:
    feed = sample_feed("wire", "turned")
    sizes = feed.sizes
    angles = np.linspace(0, 2 * np.pi, 90)
    # Clear of the floor's openings on +x and of the drains.
    radius = sizes.can_bore_mm / 2
    heights = np.linspace(0, sizes.can_depth_mm, 90)
    wall = np.column_stack((radius * np.cos(angles), radius * np.sin(angles), heights))
    assert mid_surface_gap(wall, parts_of(feed, "can")) == pytest.approx(0.0, abs=1e-6)


def test_printed_bore_stands_back_by_the_lining() -> None:
    feed = sample_feed("wire", "printed")
    radius = feed.sizes.can_bore_mm / 2
    angles = np.radians([10.0, 100.0, 200.0, 300.0])
    wall = np.column_stack((radius * np.cos(angles), radius * np.sin(angles), np.full(4, 30.0)))
    # 35 um of copper and 30 um of adhesive: IPC-4562 and maker data sheets (SK-50).
    assert gaps_mm(wall, parts_of(feed, "can")) == pytest.approx([0.065] * 4, abs=1e-6)


def test_a_mutated_size_is_seen_at_its_full_amount() -> None:
    feed = sample_feed("wire", "turned")
    lifted = loop_points(feed) + np.array([0.0, 0.0, 3.0])
    # Lifted by 3 mm, the axis lies 1 mm above a wire of 2 mm radius.
    assert mid_surface_gap(lifted, parts_of(feed, "loop")) == pytest.approx(1.0, abs=1e-6)


def test_nothing_to_compare_is_refused() -> None:
    feed = sample_feed("wire", "turned")
    with pytest.raises(GeometryError, match="at least one point"):
        mid_surface_gap(np.zeros((0, 3)), parts_of(feed, "loop"))
    with pytest.raises(GeometryError, match="at least one point"):
        mid_surface_gap(np.zeros((1, 3)), [])
