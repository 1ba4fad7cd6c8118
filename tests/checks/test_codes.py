"""Each code once raised and once not, with its cure, its source and its severity; and the catalogue page."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

import pytest

import fabgen.checks
from fabgen.checks import printed as printed_checks
from fabgen.checks.catalogue import catalogue_text
from fabgen.checks.records import Finding
from fabgen.checks.registry import Context, all_checks, check, findings_of
from fabgen.checks.run import run_checks
from fabgen.errors import FabgenError, JobError
from fabgen.stock import tables
from tests.checks.cases import PAIRS, Case, base, parts_of, printed, with_capacitor_row, with_job, with_sizes

ENTRIES = {entry.code: entry for entry in all_checks()}
TESTED_BELOW = {"PRINT-105"}


def found(code: str, case: Case) -> list[Finding]:
    return list(findings_of(ENTRIES[code], Context(case[0], tuple(case[1]))))


def test_every_code_has_a_pair() -> None:
    assert set(ENTRIES) == set(PAIRS) | TESTED_BELOW


@pytest.mark.parametrize("code", sorted(PAIRS))
def test_raised(code: str) -> None:
    findings = found(code, PAIRS[code].positive())
    assert findings
    assert PAIRS[code].severity in {f.severity for f in findings}
    assert any(PAIRS[code].word in f"{f.message} {f.feature}" for f in findings)
    for finding in findings:
        assert finding.code == code
        assert all((finding.part, finding.feature, finding.value, finding.limit, finding.source, finding.message))
        # A cure says what to do, with a number.
        assert re.search(r"\d", finding.cure)
        assert not re.search(r"\b[A-Z]{2}-\d\d\b", finding.source)


@pytest.mark.parametrize("code", sorted(PAIRS))
def test_not_raised(code: str) -> None:
    assert found(code, PAIRS[code].negative()) == []


def test_insert_wall(monkeypatch: pytest.MonkeyPatch) -> None:
    feed, parts = base("wire", "printed", choke=True), parts_of("wire", "printed", choke=True)
    assert found("PRINT-105", (feed, parts)) == []
    if not any(part.key.startswith("insert") for part in parts):
        pytest.fail("the sample with a choke has no inserts; choose one with a higher choke floor")
    real = printed_checks.ledge_of(feed)
    assert real is not None
    monkeypatch.setattr(printed_checks, "ledge_of", lambda _: replace(real, width_mm=real.width_mm - 2))
    (finding,) = found("PRINT-105", (feed, parts))
    assert "bursts" in finding.message


def test_severity_follows_the_case() -> None:
    thin = with_sizes(base("wire", "printed"), wall_mm=0.6)
    assert [f.severity for f in found("PRINT-101", (thin, ()))] == ["stop"]
    assert [f.severity for f in found("PRINT-201", (printed(plastic="petg"), ()))] == ["caution"]
    roof = with_job(base("wire", "tube"), can={"radome": True, "plastic": "pla"})
    assert [(f.severity, f.part) for f in found("PRINT-201", (roof, ()))] == [("stop", "radome")]
    named = PAIRS["SHEET-201"].positive()
    stopped = with_job(named[0], limits={"die_opening_mm": 12.0})
    assert [f.severity for f in found("SHEET-201", (stopped, named[1]))] == ["stop"]
    poor = replace(base(), predicted=replace(base().predicted, return_loss_db=7.0))
    assert [f.severity for f in found("ELEC-601", (poor, ()))] == ["stop"]
    protected = with_job(base("wire", "tube", 1665.402), wishes={"transmit_w": 1.0})
    assert [f.severity for f in found("ELEC-404", (protected, ()))] == ["caution"]
    assert [f.severity for f in found("OUT-402", (base("wire", "printed"), ()))] == ["caution"]


def test_tap_and_capacitor_together_trim() -> None:
    # 1 MHz/pF leaves the capacitor 0.43 MHz; the tap moves by a hundredth of the wavelength of 211 mm.
    (finding,) = found("ASSY-301", with_capacitor_row(1.0, 0.5))
    assert "the capacitor reaches 0.4 MHz and the tap, moved by 2.1 mm, 1.1 MHz" in finding.message
    assert found("ASSY-301", with_capacitor_row(1.0, 5.0)) == []


def test_issue_example_of_a_cure() -> None:
    (finding,) = found("SHEET-101", PAIRS["SHEET-101"].positive())
    assert finding.message == "inside radius 0.8 mm; EN AW-5754 [AlMg3] H22 at 1.5 mm needs 1.5 mm"
    assert finding.cure == "use 1.5 mm or temper H111"
    assert finding.source.startswith("bends EN 485-2")


def test_die_table_of_the_press_brake() -> None:
    # SB-35: V = 10 needs 7 mm flange, press-brake maker's chart; read in a secondary page that quotes the source.
    feed, parts = PAIRS["SHEET-201"].positive()
    (finding,) = found("SHEET-201", (with_job(feed, limits={"die_opening_mm": 10.0}), parts))
    assert finding.limit == "7 mm"
    # SB-40: 0.7 V + t/2 for a die outside the table.
    (finding,) = found("SHEET-201", (with_job(feed, limits={"die_opening_mm": 20.0}), parts))
    assert finding.limit == "14.75 mm"


def test_anodic_example() -> None:
    # SA-06: copper loop on aluminium can 0.55 V, above 0.50 even indoors; arithmetic on a list read in a
    # secondary page that quotes the source.
    for place in ("outdoor", "sheltered", "indoor"):
        findings = found("ASSY-203", (with_job(base(), limits={"environment": place}), ()))
        assert "copper Cu-ETP on aluminium EN AW-5754" in {f.feature for f in findings}
    brass = with_job(base(), limits={"environment": "indoor"}, loop={"metal": "cuzn37"})
    assert not [f for f in found("ASSY-203", (brass, ())) if f.part == "loop"]


def test_limits_against_the_reference_table() -> None:
    # id, key, value, known_from of the reference table.
    rows = [
        ("SB-40", "flange_min_die_openings", 0.7, "read in a secondary page that quotes the source"),
        ("SB-40", "flange_min_thicknesses", 4.0, "read in a secondary page that quotes the source"),
        ("SB-42", "hole_to_fold_thicknesses", 2.0, "read in a secondary page that quotes the source"),
        ("SB-43", "hole_min_thicknesses", 1.0, "read in a secondary page that quotes the source"),
        ("SB-43", "hole_min_mm", 1.0, "read in a secondary page that quotes the source"),
        ("SB-44", "hole_to_edge_thicknesses", 1.5, "read in a secondary page that quotes the source"),
        ("SB-45", "relief_min_mm", 1.0, "from memory"),
        ("TO-14", "laser_min_sheet_mm", 0.5, "read in a secondary page that quotes the source"),
        ("SK-49", "skin_depths_min", 5.0, "computed with an independent script"),
        ("PR-01", "print_wall_min_mm", 1.2, "read in a secondary page that quotes the source"),
        ("PR-01", "print_wall_thin_mm", 0.8, "read in a secondary page that quotes the source"),
        ("PR-02", "print_hole_min_mm", 2.0, "read in a secondary page that quotes the source"),
        ("SA-05", "anodic_difference_outdoor_v", 0.15, "read in a secondary page that quotes the source"),
        ("SA-05", "anodic_difference_sheltered_v", 0.25, "read in a secondary page that quotes the source"),
        ("SA-05", "anodic_difference_indoor_v", 0.50, "read in a secondary page that quotes the source"),
    ]
    for _, key, value, known_from in rows:
        row = tables.limit(key)
        assert (row.value, row.source.known_from) == (value, known_from), key
    # All others say themselves that nothing stands behind them.
    named = {key for _, key, _, _ in rows}
    for row in tables.all_rows("limit"):
        if row.key not in named and not row.source.known_from.startswith(("read", "computed")):
            assert row.source.known_from.startswith(("from memory", "common practice")), row.key


def test_every_limit_is_read_somewhere() -> None:
    # An override of a limit that nothing reads would promise something that does not happen.
    package = Path(fabgen.checks.__file__).parent.parent
    code = "".join(path.read_text(encoding="utf-8") for path in package.rglob("*.py"))
    families = ("roughness_", "anodic_difference_")
    for row in tables.all_rows("limit"):
        assert f'"{row.key}"' in code or row.key.startswith(families), row.key


@pytest.mark.parametrize("form", ["wire", "sheet"])
@pytest.mark.parametrize("make", ["printed", "tube", "turned", "rolled", "folded"])
@pytest.mark.parametrize("choke", [False, True])
def test_no_false_stop_on_sensible_feeds(form: str, make: str, choke: bool) -> None:
    findings = run_checks(base(form, make, choke=choke), parts_of(form, make, choke))
    assert [f for f in findings if f.severity == "stop"] == []
    assert findings == run_checks(base(form, make, choke=choke), parts_of(form, make, choke))


def test_order_and_overrides() -> None:
    feed = with_job(base(), overrides={"hole_min_mm": 5.0, "drain_min_mm": 2.0})
    findings = run_checks(feed, parts_of())
    severities = [f.severity for f in findings]
    assert severities == sorted(severities, key=["stop", "caution", "note"].index)
    assert {f.feature for f in findings if f.code == "NOTE-101"} == {"hole_min_mm", "drain_min_mm"}
    assert any("overridden in the job file: hole_min_mm" in f.source for f in findings if f.code == "SHEET-303")
    with pytest.raises(JobError, match="unknown limit in overrides 'hole_minimum'"):
        run_checks(with_job(base(), overrides={"hole_minimum": 1.0}), parts_of())


def test_a_code_is_registered_once() -> None:
    with pytest.raises(FabgenError, match="registered twice"):
        check("NOTE-101", "note")(lambda context: iter(()))


def test_catalogue_is_current() -> None:
    page = Path(fabgen.checks.__file__).parent / "CATALOGUE.md"
    assert page.read_text(encoding="utf-8") == catalogue_text(), (
        "run: python -m fabgen.checks.catalogue > fabgen/checks/CATALOGUE.md"
    )
    assert all(f"| {code} |" in catalogue_text() for code in ENTRIES)
