"""Order notes: what each shop needs is in its note, costs come from the user's rates, the text is stable."""

from __future__ import annotations

import csv
import io
from dataclasses import replace

import pytest

from fabgen.job import Job
from fabgen.parts.build import build_parts
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed
from fabgen.writers.order import HEADER, PROCESSES, WIDTH, order_notes, print_hours
from tests.samples import sample_feed


def with_rates(feed: Feed, **rates: float) -> Feed:
    data = feed.job.model_dump()
    data["rates"].update(rates)
    return replace(feed, job=Job.model_validate(data))


def rows(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text)))


def flat_parts(feed: Feed) -> list[Part]:
    """Without parts whose box needs the CAD kernel."""
    return [part for part in build_parts(feed) if "print" not in part.process]


@pytest.mark.parametrize(("form", "make"), [("sheet", "rolled"), ("wire", "tube"), ("sheet", "folded")])
def test_every_process_has_a_text_and_a_table(form: str, make: str) -> None:
    feed = sample_feed(form, make)
    parts = flat_parts(feed)
    notes = order_notes(feed, parts)
    for process in {process for part in parts for process in part.process}:
        text, table = notes[f"{process}.txt"], notes[f"{process}.csv"]
        assert text.startswith(f"ORDER NOTE: {PROCESSES[process][0]}")
        mine = [part for part in parts if process in part.process]
        assert [row["part"] for row in rows(table)] == [part.key for part in mine]
        assert all(f"{part.key}: {part.name}" in text for part in mine)
        assert table.splitlines()[0] == ",".join(HEADER)


def test_a_laser_note_says_all_that_a_shop_asks() -> None:
    feed = sample_feed("sheet", "tube")
    note = order_notes(feed, flat_parts(feed))["laser.txt"]
    for words in (
        "CuZn37 (CW508L), EN 1652, temper R350", "1.5 mm", "ISO 9013 class 1", "ISO 2768-m", "nominal, no kerf",
        "pierces:", "deburr:", "revision A", "cut/loop_cuzn37_r350_1.5mm_qty1_reva.dxf", "quantity:   1",
    ):  # fmt: skip
        assert words in note
    assert "cost" not in note
    assert "estimate" not in note.lower()


def test_figures_are_those_of_the_part() -> None:
    feed = sample_feed("sheet", "tube")
    loop = next(part for part in flat_parts(feed) if part.key == "loop")
    row = next(row for row in rows(order_notes(feed, [loop])["fold.csv"]) if row["part"] == "loop")
    # Ring of 67.2 mm centreline and 7.2 mm width: 74.4 mm outside; the gap's side is cut back by the tabs.
    assert float(row["bbox_y_mm"]) == pytest.approx(74.4, abs=0.01)
    assert row["pierces"] == "3"
    assert row["bends"] == "4"
    assert float(row["mass_kg_each"]) == pytest.approx(loop.mass_kg, abs=1e-4)


def test_costs_from_own_rates() -> None:
    feed = with_rates(sample_feed("sheet", "tube"), cut_per_m=3.0, pierce=0.2, bend=1.5, material_per_kg=8.0)
    notes = order_notes(feed, flat_parts(feed))
    laser = next(row for row in rows(notes["laser.csv"]) if row["part"] == "loop")
    # By hand: 3 per metre of cut, 0.2 for each of 3 pierces, 8 per kg of the 74.18 x 74.4 x 1.5 mm blank of brass.
    blank = float(laser["bbox_x_mm"]) * float(laser["bbox_y_mm"]) * 1.5e-9 * 8440
    expected = 3 * float(laser["cut_length_mm"]) / 1e3 + 0.6 + 8 * blank
    assert float(laser["cost"]) == pytest.approx(expected, abs=0.01)
    assert next(row for row in rows(notes["fold.csv"]))["cost"] == "6.00"
    assert "Estimate from your own rates:" in notes["laser.txt"]
    assert "EUR" in notes["laser.txt"]


def test_wire_cost_and_quantity() -> None:
    feed = with_rates(sample_feed("wire", "tube"), bend=2.0)
    parts = [replace(part, quantity=3) for part in flat_parts(feed) if part.key == "loop"]
    assert rows(order_notes(feed, parts)["wire.csv"])[0]["cost"] == "18.00"


def test_print_time_and_plating() -> None:
    feed = sample_feed("wire", "printed", lining="copper-plating", plastic="abs")
    can = next(part for part in build_parts(feed) if "print" in part.process)
    # 12 cm3/h, common practice: 1040 kg/m3 ABS.
    assert print_hours(can, feed) == pytest.approx(can.mass_kg / 1040 * 1e6 / 12)
    bare = replace(can, print_solid=None)
    notes = order_notes(with_rates(feed, print_per_h=2.0), [bare])
    assert {"print.txt", "plate.txt"} <= set(notes)
    assert float(rows(notes["print.csv"])[0]["cost"]) == pytest.approx(2 * print_hours(can, feed), abs=0.01)
    assert "plate.txt" not in order_notes(sample_feed("wire", "printed"), [bare])


def test_kerf_is_said() -> None:
    feed = sample_feed("sheet", "tube")
    data = feed.job.model_dump()
    data["limits"]["kerf_mm"] = 0.2
    changed = replace(feed, job=Job.model_validate(data))
    note = order_notes(changed, flat_parts(changed))["laser.txt"]
    assert "half a kerf of 0.2 mm into the waste" in note
    assert "nominal, no kerf" not in note


def test_only_files_that_exist_are_named() -> None:
    feed = sample_feed("sheet", "tube")
    note = order_notes(feed, flat_parts(feed), files={"sheets.pdf"})["laser.txt"]
    assert "cut/" not in note
    assert "sheets.pdf" in note


def test_lines_fit_and_bytes_are_equal() -> None:
    feed = sample_feed("sheet", "rolled")
    first, second = order_notes(feed, flat_parts(feed)), order_notes(feed, flat_parts(feed))
    assert first == second
    for name, text in first.items():
        assert text.endswith("\n")
        if name.endswith(".txt"):
            # A file's name is never broken, so a line may be as long as the longest name.
            assert all(len(line) <= WIDTH or ".dxf" in line for line in text.splitlines())
