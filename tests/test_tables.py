"""Record, tables and the Touchstone file of a pack, read back with other readers."""

from __future__ import annotations

import csv
import io
import json
from dataclasses import asdict, replace

import numpy as np
import pytest

from fabgen.checks.records import Finding
from fabgen.errors import GeometryError, NumericalError
from fabgen.parts.contour import FoldLine, polygon
from fabgen.parts.records import FlatPattern, Part, WireBend, WirePath
from fabgen.sizing.records import Response
from fabgen.writers.csv import bend_table_csv, csv_text, findings_csv, parts_csv, pattern_csv, wire_schedule_csv
from fabgen.writers.record import record_data, record_text
from fabgen.writers.touchstone import touchstone_text
from tests.samples import sample_feed

SIZE_KEYS = {
    "can_bore_mm", "can_depth_mm", "wall_mm", "floor_mm", "choke", "can_flats", "loop_diameter_mm", "loop_height_mm",
    "conductor", "wire_mm", "strip_width_mm", "sheet_mm", "leg_x_mm", "leg_pitch_mm", "leg_width_mm",
    "leg_bend_radius_mm", "tap_height_mm", "series_capacitor_pf",
}  # fmt: skip
PREDICTED_KEYS = {
    "impedance_ohm", "return_loss_db", "bandwidth_mhz", "aperture_efficiency", "spillover", "edge_taper_db",
    "half_power_beamwidth_e_deg", "half_power_beamwidth_h_deg", "directivity_dbi", "phase_centre_mm", "ohmic_loss_db",
    "gain_dbi", "bandwidth_return_loss_db",
}  # fmt: skip


def a_part(**changes: object) -> Part:
    fold = FoldLine(1, (0.0, 5.0), (20.0, 5.0), -90.0, 1.5, 0.4, 3.3, 2.6, 2)
    first = replace(fold, number=2, order=1, angle_deg=90.0)
    part = Part(
        key="loop", name="loop", process=("laser", "fold"), material="cuzn37", material_name="brass CuZn37",
        temper="R350", colour=(0.8, 0.7, 0.3), quantity=1, sizes=(("strip_width_mm", 7.2),), tolerance="ISO 2768-m",
        finish="deburred", flat=FlatPattern(polygon([(0, 0), (20, 0), (20, 10), (0, 10)]), folds=(fold, first),
                                            thickness_mm=1.5),
        thickness_mm=1.5, mass_kg=0.01234,
    )  # fmt: skip
    return replace(part, **changes)  # type: ignore[arg-type]


def rows_of(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text)))


@pytest.mark.parametrize("form", ["wire", "sheet"])
def test_record_has_every_promised_key(form: str) -> None:
    feed = sample_feed(form, choke=True)
    record = json.loads(record_text(record_data(feed, [a_part()], [], {"b.txt": "1", "a.txt": "2"}, ["X-1"])))
    assert {"fabgen_version", "job", "frequency_mhz", "sizes", "predicted", "files"} <= set(record)
    assert set(record["sizes"]) >= SIZE_KEYS
    assert set(record["sizes"]["choke"]) == {"bore_mm", "depth_mm", "floor_z_mm"}
    assert set(record["predicted"]) >= PREDICTED_KEYS
    assert record["sizes"]["conductor"] == ("wire" if form == "wire" else "strip")
    assert record["predicted"]["impedance_ohm"] == [50.3, 105.7]
    assert record["predicted"]["gain_dbi"][1] == {
        "frequency_mhz": 1420.41, "gain_dbi": 9.0, "relative_db": 0.0, "reflection_db": -32.0,
    }  # fmt: skip
    assert record["job"]["loop"]["form"] == form
    assert list(record["files"]) == ["a.txt", "b.txt"]
    assert record["despite"] == ["X-1"]
    assert record["frequency_mhz"] == 1420.406


def test_record_sizes_are_the_feeds() -> None:
    feed = sample_feed("sheet")
    record = record_data(feed)
    for name, value in asdict(feed.sizes).items():
        assert record["sizes"][name] == value
    assert record["sizes"]["choke"] is None


def test_record_without_choke_and_with_a_number_that_is_none() -> None:
    feed = sample_feed()
    feed = replace(feed, predicted=replace(feed.predicted, return_loss_db=float("inf"), spillover=np.float64(0.25)))
    record = json.loads(record_text(record_data(feed)))
    assert record["predicted"]["return_loss_db"] is None
    assert record["predicted"]["spillover"] == 0.25


def test_touchstone_is_read_back() -> None:
    feed = sample_feed()
    text = touchstone_text(feed)
    assert text.isascii()
    lines = [line for line in text.splitlines() if not line.startswith("!")]
    # Touchstone version 1: option line "# <unit> <parameter> <format> R <n>" (from memory)
    assert lines[0] == "# MHZ S RI R 50"
    values = np.array([[float(word) for word in line.split()] for line in lines[1:]])
    response = feed.predicted.response
    assert values[:, 0] == pytest.approx(np.array(response.frequency_mhz), abs=1e-6)
    assert values[:, 1] + 1j * values[:, 2] == pytest.approx(np.array(response.reflection), abs=1e-6)


def test_touchstone_needs_rising_frequencies() -> None:
    feed = sample_feed()
    twice = Response((1.0, 1.0), (0j, 0j), (0.0, 0.0))
    with pytest.raises(NumericalError, match="do not rise"):
        touchstone_text(replace(feed, predicted=replace(feed.predicted, response=twice)))


def test_pattern_has_both_planes() -> None:
    rows = rows_of(pattern_csv(sample_feed().predicted.patterns))
    assert {row["plane"] for row in rows} == {"E", "H"}
    on_axis = [row for row in rows if float(row["theta_deg"]) == 0]
    assert [float(row["co_dbi"]) for row in on_axis] == [9.0, 9.0]


def test_parts_list() -> None:
    row = rows_of(parts_csv([a_part()]))[0]
    assert (row["part"], row["quantity"], row["process"], row["thickness_mm"]) == ("loop", "1", "laser+fold", "1.5")
    assert row["mass_kg_each"] == "0.0123"
    assert row["sizes"] == "strip_width_mm 7.2"


def test_findings_keep_every_field() -> None:
    finding = Finding("X-101", "caution", "loop", "bend", "0.8 mm", "1.5 mm", "a standard", 'says "this", twice', "do")
    assert rows_of(findings_csv([finding])) == [asdict(finding)]


def test_bend_table_follows_the_order_of_bending() -> None:
    rows = rows_of(bend_table_csv([a_part()]))
    assert [(row["order"], row["fold"], row["direction"]) for row in rows] == [("1", "2", "up"), ("2", "1", "down")]
    assert rows[0]["k_factor"] == "0.4000"


def test_wire_schedule() -> None:
    bends = (
        WireBend(1, 40.0, 49.4, 90.0, 6.0, 7.5, 0.0, 2, "leg"),
        WireBend(2, 60.0, 200.0, 350.0, 33.6, 64.0, 90.0, 1, "loop"),
    )
    part = a_part(flat=None, wire=WirePath(4.0, 300.0, bends, "square"), process=("wire",))
    rows = rows_of(wire_schedule_csv(part))
    assert [row["name"] for row in rows] == ["loop", "leg"]
    assert rows[1]["mark_end_mm"] == "49.4"
    assert [row["turn_before_deg"] for row in rows] == ["90", "-90"]
    with pytest.raises(GeometryError, match="is not a wire"):
        wire_schedule_csv(a_part())


@pytest.mark.parametrize(("value", "cell"), [("=1+1", "'=1+1"), ("@x", "'@x"), ("-3.5", "-3.5"), ("a,b", '"a,b"')])
def test_no_cell_becomes_a_formula(value: str, cell: str) -> None:
    assert csv_text(["a"], [[value]]) == f"a\n{cell}\n"
