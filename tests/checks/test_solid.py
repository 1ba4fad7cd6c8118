"""Drawn equals simulated: surfaces inside the metal, and the true solid computes to the same feed."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from fabgen.checks.solid import compare_solid, containment, solid_findings
from fabgen.errors import NotCoveredError
from fabgen.parts.build import build_parts
from fabgen.writers.step import write_step
from tests.samples import sample_feed


@pytest.mark.slow
@pytest.mark.parametrize(("form", "make"), [("wire", "rolled"), ("sheet", "printed")])
def test_simulated_surfaces_lie_in_the_drawn_metal(form: str, make: str) -> None:
    feed = sample_feed(form, make)
    groups = containment(feed, build_parts(feed))
    assert [g.name for g in groups] == ["loop and bars", "floor", "wall"]
    assert all(g.passed for g in groups)
    off = replace(feed, sizes=replace(feed.sizes, loop_height_mm=feed.sizes.loop_height_mm + 3.0))
    assert not containment(off, build_parts(feed))[0].passed


@pytest.mark.slow
@pytest.mark.thorough
@pytest.mark.parametrize("form", ["wire", "sheet"])
def test_the_drawn_solid_computes_to_the_strip_model(form: str, tmp_path: Path) -> None:
    # the reference is our own solver on the closed surface of the drawn loop, in place of strips
    feed = sample_feed(form, "rolled")
    loop = next(p for p in build_parts(feed) if p.key.startswith("loop"))
    write_step(loop, tmp_path / "loop.step")
    found = compare_solid(feed, tmp_path / "loop.step")
    assert abs(found.model_ohm - found.solid_ohm) < 4.0
    assert abs(found.resonance_shift_mhz) < 0.01 * feed.job.target.frequency_mhz
    # R alone, as after trimming the capacitor: no worse than 25 dB apart from the model's
    assert abs((found.solid_ohm.real - found.model_ohm.real) / (found.solid_ohm.real + 50)) < 0.056


def test_cans_with_flats_are_refused(tmp_path: Path) -> None:
    with pytest.raises(NotCoveredError, match="round cans without choke"):
        compare_solid(sample_feed("wire", "folded"), tmp_path / "loop.step")


@pytest.mark.slow
def test_each_surface_is_measured_against_its_own_part() -> None:
    feed = sample_feed("wire", "turned", choke=True)
    parts = build_parts(feed)
    groups = {g.name: g for g in containment(feed, parts)}
    assert all(g.passed for g in groups.values())
    assert set(groups) == {"loop and bars", "floor", "wall", "choke wall"}
    assert feed.sizes.choke is not None
    # 3 mm on the bore are 1.5 mm on the radius: into the metal or, for a smaller bore, out of it.
    small = replace(feed.sizes.choke, bore_mm=feed.sizes.choke.bore_mm - 3.0)
    off = {g.name: g for g in containment(replace(feed, sizes=replace(feed.sizes, choke=small)), parts)}
    assert off["choke wall"].gap_mm == pytest.approx(1.5, abs=1e-6)
    assert off["wall"].gap_mm == groups["wall"].gap_mm


@pytest.mark.slow
def test_a_can_that_is_not_compared_is_still_measured(tmp_path: Path) -> None:
    feed = sample_feed("wire", "folded")
    (note,) = solid_findings(feed, build_parts(feed), tmp_path / "loop.step")
    assert (note.code, note.severity, note.value) == ("CONS-302", "note", "not computed")
    off = replace(feed, sizes=replace(feed.sizes, can_bore_mm=feed.sizes.can_bore_mm - 3.0))
    codes = [(f.code, f.part) for f in solid_findings(off, build_parts(feed), tmp_path / "loop.step")]
    assert ("CONS-301", "wall") in codes
