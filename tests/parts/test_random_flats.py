"""Random jobs: every flat part either passes the linter or is refused with a message for people."""

from __future__ import annotations

import dataclasses
import math
import random

import pytest
from pydantic import ValidationError

from fabgen.errors import FabgenError
from fabgen.parts.bend_strip import bend_strip
from fabgen.parts.can_sheet import sheet_can
from fabgen.parts.loop_sheet import loop_sheet
from fabgen.parts.loop_wire import loop_wire
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed
from fabgen.writers.dxf import dxf_text
from fabgen.writers.dxf_lint import lint_dxf
from tests.samples import sample_feed


def random_feed(dice: random.Random) -> Feed:
    """Stock, make and frequency at random; loop sizes by ratio to the wavelength, reliefs of any depth; sheets so
    short that some walls come in halves."""
    form = dice.choice(["wire", "sheet"])
    feed = sample_feed(
        form,
        dice.choice(["rolled", "folded"]),
        frequency_mhz=math.exp(dice.uniform(math.log(300), math.log(12000))),
        choke=dice.random() < 0.5,
        flats=dice.choice([6, 8, 12]),
        metal=dice.choice(["en-aw-5754", "cuzn37", "cu-etp", "en-aw-6082"]),
        wall_mm=dice.choice([0.5, 0.8, 1, 1.5, 2, 3]),
        floor_mm=dice.choice([0.8, 1, 1.5, 2, 3]),
        flange={"pattern": dice.choice(["circle", "square", "none"]), "count": 4},
    )
    sheet = dice.choice([(1000.0, 2000.0), (500.0, 1000.0), (250.0, 500.0)])
    limits = feed.job.limits.model_copy(update={"sheet_mm": sheet})
    feed = dataclasses.replace(feed, job=feed.job.model_copy(update={"limits": limits}))
    if form == "wire":
        return feed
    t = dice.choice([0.3, 0.5, 0.8, 1, 1.5, 2, 3])
    job = feed.job.model_copy(update={"loop": feed.job.loop.model_copy(update={"sheet_mm": t})})
    r, wavelength = t * dice.uniform(0.5, 2), job.wavelength_mm
    width = max(0.034 * wavelength, 2 * t)
    pitch, radius = width + 0.038 * wavelength, feed.sizes.loop_diameter_mm / 2
    tabs = dice.choice(["inward", "outward"])
    stand = dice.uniform(-2, 3) * t + r + t / 2
    near, far = pitch / 2 - width / 2, pitch / 2 + width / 2
    if tabs == "inward":
        leg = math.sqrt(max(0.0, (radius - width / 2) ** 2 - far**2)) - stand
    else:
        leg = math.sqrt((radius + width / 2) ** 2 - near**2) + stand
    sizes = dataclasses.replace(
        feed.sizes, sheet_mm=t, leg_bend_radius_mm=r, strip_width_mm=width, leg_width_mm=width, leg_pitch_mm=pitch,
        tabs=tabs, leg_x_mm=leg,
    )  # fmt: skip
    return dataclasses.replace(feed, job=job, sizes=sizes)


def flats_of(feed: Feed) -> list[Part]:
    made: list[Part] = []
    loop = loop_wire if feed.sizes.conductor == "wire" else loop_sheet
    for build in (sheet_can, lambda f: (loop(f),), bend_strip):
        try:
            made += [part for part in build(feed) if part.flat is not None]
        except FabgenError as error:
            assert len(str(error)) > 30
    return made


@pytest.mark.parametrize(
    "block",
    [pytest.param(b, marks=() if b == 0 else (pytest.mark.slow, pytest.mark.thorough)) for b in range(16)],
)
def test_random_parts_are_sound_or_refused(block: int) -> None:
    written = 0
    for seed in range(12 * block, 12 * block + 12):
        try:
            feed = random_feed(random.Random(seed))
        except (ValidationError, FabgenError):
            continue
        for part in flats_of(feed):
            assert part.flat is not None
            assert lint_dxf(dxf_text(part.flat, folds=True), part.flat) == (), f"seed {seed}, {part.key}"
            written += 1
    assert written > 20
