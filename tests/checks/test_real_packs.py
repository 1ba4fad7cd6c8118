"""Packs of every template, sized by the field computation: each passes its own checks when read back from its files."""

from __future__ import annotations

from pathlib import Path

import pytest

from fabgen.checks.read_files import read_pack
from fabgen.checks.readback import findings_of_pack
from fabgen.checks.run import run_checks
from fabgen.job_reader import read_job
from fabgen.pack import write_pack
from fabgen.parts.build import build_parts
from fabgen.progress import Silent
from fabgen.sizing.size_feed import size_feed
from fabgen.writers.sheets_back import sheets_findings
from fabgen.writers.tables_back import tables_findings
from tests.examples import ROOT

TEMPLATES = sorted((ROOT / "templates").glob("*.toml"))


@pytest.mark.slow
@pytest.mark.thorough
@pytest.mark.parametrize("template", TEMPLATES, ids=lambda path: path.stem)
def test_a_real_pack_passes_its_own_checks(template: Path, tmp_path: Path) -> None:
    feed = size_feed(read_job(template), Silent())
    assert [f for f in run_checks(feed, build_parts(feed)) if f.severity == "stop"] == []
    write_pack(feed, tmp_path / "pack")
    pack = read_pack(tmp_path / "pack")
    assert findings_of_pack(pack, solids=True) == ()
    assert sheets_findings(pack) == ()
    assert tables_findings(pack) == ()
    seams = pack.feed.predicted.wall_current.seams
    # what the dominant mode alone would give: next to nothing in the E-plane, the most on the gap's side and opposite
    for seam in seams:
        crossing = dict(zip(seam.angle_deg, seam.crossing_a_per_m, strict=True))
        assert crossing[90.0] < 0.5 * max(crossing[0.0], crossing[180.0])
