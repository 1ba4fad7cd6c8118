"""What ``size`` prints and plots of a sized feed, for those who build it."""

from __future__ import annotations

from dataclasses import replace

import pytest

from fabgen.drawing.model import Polyline
from fabgen.drawing.pages.performance import pattern_plot, reflection_plot
from fabgen.report import size_report
from fabgen.sizing.records import Feed
from tests.template_feeds import template_feed


def with_power(feed: Feed, power_w: float) -> Feed:
    wishes = feed.job.wishes.model_copy(update={"transmit_w": power_w})
    return replace(feed, job=feed.job.model_copy(update={"wishes": wishes}))


@pytest.mark.parametrize("name", ["hydrogen-wire", "c-band-5760"])
def test_the_capacitor_is_told_with_its_insulation_and_voltage(name: str) -> None:
    feed = template_feed(name)
    part = feed.capacitor
    lines = size_report(with_power(feed, 20.0)).splitlines()
    ptfe = next(line for line in lines if line.strip().startswith("PTFE"))
    assert (f"{part.outer_mm:.2f} mm" if part.form == "sleeve" else f"{part.film_mm:g} mm film") in ptfe
    assert any("voltage" in line and f"{part.peak_voltage_v:.0f} V" in line and "20 W" in line for line in lines)
    assert not any("voltage" in line for line in size_report(with_power(feed, 0.0)).splitlines())


def test_the_capacitor_has_the_digits_that_the_match_needs() -> None:
    # Below half a picofarad the sizing keeps thousandths: at 10 GHz a hundredth moves the resonance by 200 MHz.
    feed = template_feed("c-band-5760")
    feed = replace(feed, sizes=replace(feed.sizes, series_capacitor_pf=0.084))
    assert "value" in size_report(feed)
    assert "0.084 pF" in size_report(feed)


def test_the_yield_is_told_with_the_wish_that_it_counts() -> None:
    feed = template_feed("hydrogen-wire")
    wishes = feed.job.wishes.model_copy(update={"bandwidth_mhz": 7.5, "return_loss_db": 16.0})
    text = size_report(replace(feed, job=feed.job.model_copy(update={"wishes": wishes})))
    assert "yield of 16 dB over 7.5 MHz" in text


def test_no_dip_falls_between_two_curves_of_the_tolerance_band() -> None:
    # A shift far wider than the dip: where the dip may lie, the band is open down to the floor, so its lower edge
    # is seen in two pieces, left and right, besides the upper edge.
    feed = template_feed("hydrogen-wire")
    row = replace(feed.sensitivities[0], effect_mhz=0.1 * feed.job.target.frequency_mhz)
    plot = reflection_plot(replace(feed, sensitivities=(row,)))
    edges = [item for item in plot.items if isinstance(item, Polyline) and item.role == "curve3"]
    assert len(edges) == 3


def test_the_plane_between_shows_the_cross_polar_field_and_the_mirror_plane_none() -> None:
    feed = template_feed("hydrogen-wire")
    words = [item.text for item in pattern_plot(feed).items if hasattr(item, "text")]
    assert not any("H-plane, cross" in text for text in words)
    assert any("45" in text and "cross" in text for text in words)
    # Mirror symmetry in y = 0: the cross-polar field in the H-plane is nothing against the co-polar one.
    h_plane = next(cut for cut in feed.predicted.patterns if cut.phi_deg == 0.0)
    assert max(h_plane.cross_dbi) < max(h_plane.co_dbi) - 60
