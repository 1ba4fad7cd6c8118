"""Feeds for the tests of solids: the shared samples with other beds, cables and sizes."""

from __future__ import annotations

import dataclasses
import math
from typing import Any

from fabgen.sizing.records import Feed, Sizes
from tests.samples import sample_feed, sample_sizes


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
