"""The stock tables: complete rows with sources, look-ups, messages, the user's own rows, standard figures."""

from __future__ import annotations

import math
from collections.abc import Iterator
from pathlib import Path

import pytest

from fabgen.errors import JobError
from fabgen.job import Job
from fabgen.stock import gauges, tables
from fabgen.stock.records import Source


@pytest.fixture
def clean_user_rows() -> Iterator[None]:
    yield
    tables.forget_user_rows()


@pytest.mark.parametrize("kind", list(tables.KINDS))
def test_every_row_has_a_source_and_says_how_it_is_known(kind: str) -> None:
    rows = tables.all_rows(kind)
    assert rows
    sources: list[Source] = [row.source for row in rows]
    if kind == "metal":
        sources += [temper.source for row in rows for temper in row.tempers]
    assert all(s.text.strip() and s.known_from.strip() for s in sources)


def test_defaults_of_the_job_file_are_in_the_tables() -> None:
    job = Job.model_validate(
        {
            "target": {"frequency_mhz": 1420.406},
            "dish": {"diameter_m": 2.4, "focal_ratio": 0.4},
            "loop": {"form": "wire", "wire_mm": 4},
        }
    )
    assert tables.metal(job.loop.metal).solderable
    assert tables.metal(job.can.metal).key == "en-aw-5754"
    assert tables.plastic(job.can.plastic).key == "petg"
    assert tables.lining(job.can.lining).kind == "foil"
    assert tables.coax(job.cable.coax).outer_mm == 3.58
    assert tables.connector(job.cable.connector).hole_count == 4
    assert tables.screw(job.can.flange.screw).clearance_medium_mm == 4.5


def test_iso_273_clearance_holes() -> None:
    # TO-15, TO-16, TO-17: ISO 273:1979, read in a secondary page that quotes the source.
    keys = ["M2", "M2.5", "M3", "M4", "M5", "M6", "M8"]
    rows = [tables.screw(key) for key in keys]
    assert [r.clearance_fine_mm for r in rows] == [2.2, 2.7, 3.2, 4.3, 5.3, 6.4, 8.4]
    assert [r.clearance_medium_mm for r in rows] == [2.4, 2.9, 3.4, 4.5, 5.5, 6.6, 9.0]
    assert [r.clearance_coarse_mm for r in rows] == [2.6, 3.1, 3.6, 4.8, 5.8, 7.0, 10.0]


def test_iso_2768_and_iso_9013() -> None:
    # TO-01..03, TO-08..10: ISO 2768-1:1989, ISO 9013:2017, read in a secondary page that quotes the source.
    assert [tables.general_tolerance_mm(s, "m") for s in (3, 6, 30, 120, 400, 1000)] == [
        0.1, 0.1, 0.2, 0.3, 0.5, 0.8,
    ]  # fmt: skip
    assert tables.general_tolerance_mm(30.1, "f") == 0.15
    assert tables.general_tolerance_mm(200, "c") == 1.2
    assert [tables.laser_tolerance_mm(67, t) for t in (1.0, 1.5, 4.0)] == [0.20, 0.25, 0.25]
    with pytest.raises(JobError, match="ends at 2000"):
        tables.general_tolerance_mm(2001, "f")
    with pytest.raises(JobError, match=r"6\.3 mm"):
        tables.laser_tolerance_mm(20, 8.0)


def test_conductivities() -> None:
    # SK-03 IEC 60028, SK-08 ASTM B36 28 % IACS, SK-11 61.3 % IACS, SK-13 43 % IACS; SK-21 EN 10088-1.
    assert tables.metal("cu-etp").conductivity_s_per_m == 5.8e7
    assert tables.metal("cuzn30").conductivity_s_per_m == pytest.approx(0.28 * 5.8e7, rel=1e-3)
    assert tables.metal("en-aw-1050").conductivity_s_per_m == pytest.approx(0.613 * 5.8e7, rel=1e-3)
    assert tables.metal("en-aw-6061").conductivity_s_per_m == pytest.approx(0.43 * 5.8e7, rel=1e-3)
    assert 1 / tables.metal("1.4301").conductivity_s_per_m == pytest.approx(0.73e-6, rel=1e-2)


def test_tempers_by_any_name_and_bend_ratios_of_en_485() -> None:
    # SB-24, SB-25: EN 485-2, read in a secondary page that quotes the source.
    assert tables.temper("en-aw-5754", "O").key == "H111"
    assert tables.temper("en-aw-5754", "h32").key == "H22"
    assert tables.temper("cu-etp").key == "R220"
    assert dict(tables.temper("en-aw-5754", "H111").bend_ratio)[1.5] == 0.5
    assert dict(tables.temper("en-aw-5754", "H22").bend_ratio)[1.5] == 1.0
    with pytest.raises(JobError, match=r"Did you mean 'R240'\? Allowed: R220"):
        tables.temper("cu-etp", "R2400")


@pytest.mark.parametrize("metal", tables.all_rows("metal"), ids=lambda m: m.key)
def test_bend_rows_grow_with_thickness_and_parallel_is_never_easier(metal: object) -> None:
    for temper in metal.tempers:  # type: ignore[attr-defined]
        ends = [row[0] for row in temper.bend_ratio]
        assert ends == sorted(ends)
        assert ends == [row[0] for row in temper.bend_ratio_parallel]
        pairs = zip(temper.bend_ratio, temper.bend_ratio_parallel, strict=True)
        assert all(parallel[1] >= across[1] for across, parallel in pairs)
        assert temper.yield_mpa < temper.tensile_mpa


def test_unknown_keys_name_the_nearest_and_list_what_is_allowed() -> None:
    with pytest.raises(JobError, match=r"unknown metal 'cu-etb'\. Did you mean 'cu-etp'\? Allowed: cu-etp, "):
        tables.metal("cu-etb")
    with pytest.raises(JobError, match=r"unknown connector 'zzz'\. Allowed: sma-4"):
        tables.connector("zzz")
    with pytest.raises(JobError, match="unknown kind of stock"):
        tables.all_rows("metals-of-old")


def test_a_limit_is_overridden_and_marked() -> None:
    plain = tables.limit("hole_min_mm", {})
    changed = tables.limit("hole_min_mm", {"hole_min_mm": 0.8})
    assert (plain.value, plain.overridden) == (1.0, False)
    assert (changed.value, changed.overridden) == (0.8, True)
    tables.check_overrides({"hole_min_mm": 0.8})
    with pytest.raises(JobError, match="Did you mean 'hole_min_mm'"):
        tables.check_overrides({"hole_min": 0.8})


COAX_ROW = """
[[coax]]
key = "my-coax"
name = "cable from the drawer"
outer_mm = 3.0
dielectric_mm = 2.5
inner_mm = 0.8
relative_permittivity = 2.1
min_bend_radius_mm = 8
source = "measured with calipers"
known_from = "own measurement"
"""


@pytest.mark.usefixtures("clean_user_rows")
def test_own_rows_are_added(tmp_path: Path) -> None:
    file = tmp_path / "own.toml"
    file.write_text(COAX_ROW)
    (row,) = tables.load_user_rows(file)
    assert tables.coax("my-coax") == row
    assert tables.all_rows("coax")[-1] == row


@pytest.mark.usefixtures("clean_user_rows")
@pytest.mark.parametrize(
    ("change", "message"),
    [
        (("outer_mm = 3.0\n", ""), "field 'outer_mm' is missing"),
        (("outer_mm = 3.0", "outer_mm = -3.0"), "above zero"),
        (("outer_mm = 3.0", "outer_mm = nan"), "finite number"),
        (("outer_mm = 3.0", "outer_mm = true"), "finite number"),
        (("outer_mm = 3.0", "outer = 3.0"), "unknown field 'outer'"),
        (('source = "measured with calipers"\n', ""), "give 'source'"),
        (('name = "cable from the drawer"', "name = 3"), "must be text"),
        (("[[coax]]", "[[coaxs]]"), "Did you mean 'coax'"),
        (("[[coax]]", "[coax]"), r"write rows as \[\[coax\]\]"),
        (("key =", "key"), "cannot be read as TOML"),
    ],
)
def test_own_rows_with_faults_are_refused(tmp_path: Path, change: tuple[str, str], message: str) -> None:
    file = tmp_path / "own.toml"
    file.write_text(COAX_ROW.replace(*change))
    with pytest.raises(JobError, match=message):
        tables.load_user_rows(file)


def test_own_rows_twice_or_missing_file(tmp_path: Path) -> None:
    file = tmp_path / "own.toml"
    file.write_text(COAX_ROW + COAX_ROW)
    with pytest.raises(JobError, match="twice"):
        tables.load_user_rows(file)
    with pytest.raises(JobError, match="no such file"):
        tables.load_user_rows(tmp_path / "none.toml")


# ASTM B258 table 1 (solid round wire), inches; from memory.
@pytest.mark.parametrize(
    ("gauge", "inch"),
    [("4/0", 0.4600), ("0000", 0.46), (0, 0.3249), (8, 0.1285), (10, 0.1019), (12, 0.0808), (14, 0.0641),
     (20, 0.0320), (36, 0.0050)],
)  # fmt: skip
def test_awg_after_astm_b258(gauge: int | str, inch: float) -> None:
    assert gauges.awg_mm(gauge) == pytest.approx(inch * 25.4, abs=0.00006 * 25.4)


def test_awg_steps_by_the_39th_root_of_92() -> None:
    assert gauges.awg_mm(10) / gauges.awg_mm(11) == pytest.approx(92 ** (1 / 39))
    assert gauges.awg_mm("4/0") / gauges.awg_mm(36) == pytest.approx(92)


def test_other_gauges() -> None:
    assert gauges.swg_mm(8) == pytest.approx(4.064)
    assert gauges.sheet_gauge_mm(16, "dc01-zinc") == pytest.approx(1.613, abs=1e-3)
    assert gauges.sheet_gauge_mm(16, "1.4301") == pytest.approx(1.5875)
    assert gauges.sheet_gauge_mm(16, "dc01") == pytest.approx(1.519, abs=1e-3)
    assert gauges.sheet_gauge_mm(16, "cuzn37") == gauges.awg_mm(16)
    for bad in (lambda: gauges.awg_mm(41), lambda: gauges.awg_mm("5/0"), lambda: gauges.swg_mm(99)):
        with pytest.raises(JobError, match="not a wire gauge"):
            bad()
    with pytest.raises(JobError, match="7 to 28"):
        gauges.sheet_gauge_mm(40, "dc01")


def test_coax_impedance_from_the_table_dimensions() -> None:
    # CN-14: 59.96/sqrt(er) ln(D/d), computed with an independent script.
    for key, ohm in (("rg402", 49.4), ("rg405", 49.9)):
        row = tables.coax(key)
        z0 = 59.96 / math.sqrt(row.relative_permittivity) * math.log(row.dielectric_mm / row.inner_mm)
        assert z0 == pytest.approx(ohm, abs=0.05)
