"""Random jobs over the whole range with the real field computation: each ends matched, or with a message that names
the limit and a nearest job that is really matched here. Never a crash."""

from __future__ import annotations

import math
import random
import re
from typing import Any

import pytest
from pydantic import ValidationError

from fabgen.errors import FabgenError, GeometryError, JobError, NoSolutionError
from fabgen.job import Job
from fabgen.sizing.match import HIGH_REACTANCE_OHM, LOW_REACTANCE_OHM, return_loss_db, tap_range_mm
from fabgen.sizing.relax import relaxed_jobs
from fabgen.sizing.size_feed import MatchedFeed, find_matched, size_feed
from fabgen.theory.waveguide import cutoff_bore_mm

SEEDS = range(40)
QUICK = (9, 11, 36)
NEAREST = "The nearest job that works: "


def spread(draw: random.Random, low: float, high: float, digits: int = 2) -> float:
    """Evenly drawn on a logarithmic scale."""
    return round(math.exp(draw.uniform(math.log(low), math.log(high))), digits)


def random_job(seed: int) -> dict[str, Any]:
    """300 MHz to 12 GHz, wire of 1 to 8 mm or sheet of 0.3 to 3 mm, every make of can, a choke or a fixed size now and
    then."""
    draw = random.Random(seed)
    frequency = spread(draw, 300, 12_000, 1)
    wavelength = 299_792.458 / frequency
    loop: dict[str, Any] = {"form": draw.choice(["wire", "sheet"])}
    if loop["form"] == "wire":
        loop["wire_mm"] = spread(draw, 1, 8)
    else:
        loop |= {"sheet_mm": spread(draw, 0.3, 3), "metal": "cuzn37"}
    make = draw.choice(["rolled", "folded", "turned", "printed", "tube"])
    fixed = {}
    if make == "tube":
        fixed["can_bore_mm"] = round(draw.uniform(0.7, 1.5) * wavelength, 1)
    if draw.random() < 0.3:
        name, low, high = draw.choice(
            [("loop_diameter_mm", 0.27, 0.36), ("loop_height_mm", 0.1, 0.22), ("tap_height_mm", 0.04, 0.09),
             ("leg_pitch_mm", 0.05, 0.12), ("can_depth_mm", 0.2, 0.6)]
        )  # fmt: skip
        fixed[name] = round(draw.uniform(low, high) * wavelength, 1)
    return {
        "target": {"frequency_mhz": frequency},
        "dish": {"diameter_m": 3.0, "focal_ratio": round(draw.uniform(0.3, 0.7), 3)},
        "loop": loop,
        "can": {"make": make, "choke": make != "tube" and draw.random() < 0.25},
        "cable": {"coax": draw.choice(["rg402", "rg405", "semi-rigid-047"])},
        "limits": {"resolution_mm": draw.choice([0.05, 0.1])},
        "wishes": {"selectivity": draw.choice(["sharp", "balanced", "broad"])},
        "fixed": fixed,
    }


def require_matched(found: MatchedFeed) -> None:
    job, sizes = found.setting.job, found.matched.sizes
    target = job.target.frequency_mhz
    assert return_loss_db(found.matched.reflection(target)) >= 20
    low, high = tap_range_mm(sizes)
    assert low - 1e-9 <= sizes.tap_height_mm <= high + 1e-9
    reactance = 1e6 / (2 * math.pi * target * sizes.series_capacitor_pf)
    assert 0.99 * LOW_REACTANCE_OHM <= reactance <= 1.01 * HIGH_REACTANCE_OHM
    assert sizes.can_bore_mm > cutoff_bore_mm("TE11", target)
    assert sizes.loop_diameter_mm < sizes.can_bore_mm
    assert sizes.loop_height_mm < sizes.can_depth_mm
    for name, value in job.fixed.model_dump().items():
        if value is not None:
            assert getattr(sizes, name) == value


def nearest_of_text(data: dict[str, Any], text: str) -> dict[str, Any]:
    """The job that the refusal of a job's own values names: other stock, or a size within the limits given."""
    best = re.search(r"loop\.(wire_mm|sheet_mm) .* best about ([\d.]+) mm", text)
    if best:
        return {**data, "loop": {**data["loop"], best[1]: float(best[2])}}
    given = re.search(r"fixed\.(\w+) (?:=|is) .*give at least ([\d.]+) mm", text)
    if given:
        return {**data, "fixed": {**data["fixed"], given[1]: float(given[2])}}
    raise AssertionError(f"names no nearest job: {text}")


def require_advice(job: Job) -> None:
    """The job is refused with a limit and with another job, which is matched here."""
    with pytest.raises(NoSolutionError) as refusal:
        size_feed(job)
    limit, _, change = str(refusal.value).partition(NEAREST)
    assert re.search(r"\d", limit), limit
    assert change, f"no nearest job: {limit}"
    require_matched(find_matched(changed(job, change)))


def changed(job: Job, change: str) -> Job:
    """The job after the change that the message names; a thickness may lie between the job's own and the usual one."""
    given = re.match(r"use (wire|sheet) of ([\d.]+) mm", change)
    if given is None:
        return dict(relaxed_jobs(job))[change]
    key = f"{given[1]}_mm"
    plain = next(other for text, other in relaxed_jobs(job) if text.startswith(f"use {given[1]} of"))
    usual, own, value = getattr(plain.loop, key), getattr(job.loop, key), float(given[2])
    assert min(usual, own) <= value <= max(usual, own)
    return plain.model_copy(update={"loop": plain.loop.model_copy(update={key: value})})


@pytest.mark.slow
@pytest.mark.parametrize(
    "seed", [pytest.param(s, marks=() if s in QUICK else pytest.mark.thorough) for s in SEEDS]
)
def test_random_job_is_matched_or_the_nearest_that_works_is_named(seed: int) -> None:
    data = random_job(seed)
    try:
        job = Job.model_validate(data)
        require_matched(find_matched(job))
    except (JobError, ValidationError) as error:
        require_matched_or_advice(Job.model_validate(nearest_of_text(data, str(error))))
    except (NoSolutionError, GeometryError):
        require_advice(job)


def require_matched_or_advice(job: Job) -> None:
    try:
        found = find_matched(job)
    except FabgenError:
        require_advice(job)
    else:
        require_matched(found)
