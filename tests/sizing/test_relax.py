"""The nearest job that works: what is changed first, and how near the stock comes to the job's own."""

from __future__ import annotations

import pytest

from fabgen.errors import NoSolutionError
from fabgen.job import Job
from fabgen.progress import Progress, Silent
from fabgen.sizing.relax import nearest_that_works
from tests.samples import sample_job


def wire_job(wire_mm: float) -> Job:
    data = sample_job("wire", "turned").model_dump()
    data["target"]["frequency_mhz"] = 9000.0
    data["loop"]["wire_mm"] = wire_mm
    return Job.model_validate(data)


@pytest.mark.parametrize(("limit_mm", "named_mm"), [(1.0, 1.0), (1.45, 1.4), (2.55, 2.5), (2.95, 2.8)])
def test_stock_comes_near_to_the_job_s_own(limit_mm: float, named_mm: float) -> None:
    # Between 3 and 1 mm the geometric means are 1.7; 1.3 or 2.3; ... : three halvings come within an eighth of the
    # range.
    tried = []

    def find(job: Job, tell: Progress) -> None:
        tried.append(job.loop.wire_mm)
        if (job.loop.wire_mm or 0) > limit_mm:
            raise NoSolutionError("too thick")

    text = nearest_that_works(wire_job(3.0), Silent(), find)
    found = float(text.removeprefix("The nearest job that works: use wire of ").removesuffix(" mm"))
    assert found in tried
    assert found <= limit_mm
    assert found == pytest.approx(named_mm, abs=0.25)
    assert len(tried) <= 4


def test_other_changes_are_named_as_they_are() -> None:
    def find(job: Job, tell: Progress) -> None:
        if job.can.choke:
            raise NoSolutionError("no room")

    data = wire_job(1.0).model_dump()
    data["can"]["choke"] = True
    text = nearest_that_works(Job.model_validate(data), Silent(), find)
    assert text == "The nearest job that works: set can.choke = false"


def test_a_change_that_changes_nothing_is_not_tried() -> None:
    told: list[str] = []

    class Listener(Silent):
        def step(self, text: str) -> None:
            told.append(text)

    def find(job: Job, tell: Progress) -> None:
        raise NoSolutionError("no room")

    assert nearest_that_works(wire_job(1.0), Listener(), find).startswith("No nearby job")
    assert not [text for text in told if "fix no size" in text or "turned" in text]
