"""What the sheets and the terminal say of findings: stops in red and in words, overrides, and as data."""

from __future__ import annotations

import dataclasses
from pathlib import Path

import pytest

from fabgen.checks.run import run_checks
from fabgen.checks.texts import size_words
from fabgen.drawing.flow import Block
from fabgen.drawing.model import RED, Text
from fabgen.drawing.pages.closing import findings_blocks
from fabgen.errors import ChecksFailedError
from fabgen.pack import PackOptions, write_pack
from fabgen.report import findings_report
from fabgen.writers.pdf_text import page_texts
from tests.checks.cases import base, parts_of, with_job
from tests.samples import sample_capacitor


def texts(blocks: list[Block]) -> list[Text]:
    return [item for block in blocks for item in block.items if isinstance(item, Text)]


def test_a_stop_is_red_and_in_words_and_an_override_is_told() -> None:
    feed = with_job(base("wire", "printed"), can={"plastic": "pla"}, overrides={"hole_min_mm": 0.8})
    findings = run_checks(feed, parts_of("wire", "printed"))
    shown = texts(findings_blocks(findings))
    red = " ".join(item.text for item in shown if item.colour == RED)
    black = " ".join(item.text for item in shown if item.colour != RED)
    assert "PRINT-201" in red
    assert "STOP" in red.upper()
    assert "softens" in red
    assert "NOTE-101" in black
    assert "overrides the limit" in black
    assert "0.8 in place of 1 mm" in black
    terminal = findings_report("sample", findings, False)
    assert "PRINT-201" in terminal.split("Caution")[0]


@pytest.mark.slow
def test_a_pack_written_in_spite_of_a_stop_says_so_on_its_sheets(tmp_path: Path) -> None:
    feed = with_job(base("sheet", "turned"), wishes={"transmit_w": 1.0}, overrides={"drain_min_mm": 2.5})
    # a band where nobody may transmit; the capacitor's voltage follows from the power
    feed = dataclasses.replace(feed, capacitor=sample_capacitor(feed.job, feed.sizes))
    only = ("tables", "sheets")
    with pytest.raises(ChecksFailedError, match="--despite ELEC-404"):
        write_pack(feed, tmp_path / "pack", PackOptions(only=only))
    write_pack(feed, tmp_path / "pack", PackOptions(only=only, despite=("ELEC-404",)))
    words = " ".join(" ".join(page) for page in page_texts(tmp_path / "pack" / "sheets.pdf"))
    assert "ELEC-404" in words
    assert "NOTE-101" in words
    assert "drain_min_mm" in words


def test_sizes_in_words() -> None:
    assert size_words("leg_pitch_mm") == "bar pitch"
    assert size_words("choke.bore_mm") == "bore of the choke"
    assert size_words("series_capacitor_pf") == "overlap of the capacitor"
