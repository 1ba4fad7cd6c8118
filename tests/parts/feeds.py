"""Feeds for the tests of solids: the shared samples with other beds, cables and sizes."""

from __future__ import annotations

import dataclasses
import math
from pathlib import Path
from typing import Any

from fabgen.job_reader import read_job
from fabgen.sizing.records import Feed, Sizes
from tests.samples import sample_capacitor, sample_feed, sample_sizes

TEMPLATES = Path(__file__).parents[2] / "templates"
TEMPLATE_SIZES = {
    "hydrogen-brass": Sizes(
        can_bore_mm=217.1, can_depth_mm=53.4, wall_mm=2.4, floor_mm=3.2, choke=None, can_flats=0,
        loop_diameter_mm=67.2, loop_height_mm=31.7, conductor="strip", wire_mm=None, strip_width_mm=7.2, sheet_mm=1.5,
        leg_x_mm=23.767, leg_pitch_mm=16.7, leg_width_mm=7.2, leg_bend_radius_mm=1.5, tap_height_mm=12.5,
        crossing_width_mm=3.8, series_capacitor_pf=1.37, tabs="inward",
    ),
    "c-band-5760": Sizes(
        can_bore_mm=58.3, can_depth_mm=18.75, wall_mm=2.4, floor_mm=3.2, choke=None, can_flats=0,
        loop_diameter_mm=17.4, loop_height_mm=10.4, conductor="wire", wire_mm=1.0, strip_width_mm=None, sheet_mm=None,
        leg_x_mm=8.57496355677387, leg_pitch_mm=4.2, leg_width_mm=1.0, leg_bend_radius_mm=1.5, tap_height_mm=3.3,
        crossing_width_mm=1.55, series_capacitor_pf=0.236, tabs=None,
    ),
}  # fmt: skip
"""Sizes of the two printed templates as an earlier run sized them: for their geometry only, no test reads them as
results."""


def template_feed(name: str) -> Feed:
    """A printed template's own job with sizes near its own, and the sample's capacitor."""
    job, sizes = read_job(TEMPLATES / f"{name}.toml"), TEMPLATE_SIZES[name]
    feed = sample_feed("wire", "printed")
    capacitor = sample_capacitor(job, sizes)
    return dataclasses.replace(feed, job=job, sizes=sizes, capacitor=capacitor)


def with_bed(feed: Feed, bed_mm: tuple[float, float, float]) -> Feed:
    """The same feed for another printer."""
    limits = feed.job.limits.model_copy(update={"bed_mm": bed_mm})
    return dataclasses.replace(feed, job=feed.job.model_copy(update={"limits": limits}))


def with_cable(feed: Feed, **cable: str) -> Feed:
    """The same feed with another coax or connector."""
    changed = feed.job.cable.model_copy(update=cable)
    return dataclasses.replace(feed, job=feed.job.model_copy(update={"cable": changed}))


def small_feed(choke: bool = False, **can: Any) -> Feed:
    """5.8 GHz in 1.5 mm wire with thin coax, printed."""
    feed = sample_feed("wire", "printed", frequency_mhz=5800.0, choke=choke, **can)
    loop = feed.job.loop.model_copy(update={"wire_mm": 1.5})
    job = feed.job.model_copy(
        update={"loop": loop, "cable": feed.job.cable.model_copy(update={"coax": "semi-rigid-047"})}
    )
    capacitor = dataclasses.replace(
        feed.capacitor, inner_mm=0.29, outer_mm=0.94, overlap_mm=2.0, overlap_max_mm=3.0, tube_wall_mm=0.25
    )
    return dataclasses.replace(feed, job=job, sizes=_small_sizes(sample_sizes(job)), capacitor=capacitor)


def _small_sizes(sizes: Sizes) -> Sizes:
    radius, bend, pitch = sizes.loop_diameter_mm / 2, 1.5, 6.0
    phi = math.asin((pitch / 2) / math.hypot(radius, bend)) + math.atan2(bend, radius)
    leg_x = radius * math.cos(phi) + bend * math.sin(phi)
    return dataclasses.replace(
        sizes, leg_pitch_mm=pitch, leg_bend_radius_mm=bend, leg_x_mm=round(leg_x, 2), leg_width_mm=1.5, wire_mm=1.5
    )
