"""Whole packs from real computations, by the command line."""

from __future__ import annotations

import csv
import json
import re
import resource
import shutil
import subprocess
import sys
from collections.abc import Callable
from dataclasses import fields, replace
from pathlib import Path

import pytest

from fabgen.errors import ChecksFailedError, JobError
from fabgen.folder import RECORD_NAME, files_in, sha256_of
from fabgen.pack import GROUPS, PackOptions, build_content, chosen_groups, write_pack
from fabgen.sizing.records import Sizes
from tests.samples import sample_feed

ROOT = Path(__file__).parent.parent
pytestmark = pytest.mark.slow
NAMES = ("hydrogen-wire", "hydrogen-brass")


@pytest.fixture(params=NAMES)
def pack(request: pytest.FixtureRequest, real_pack: Callable[[str], Path]) -> Path:
    return real_pack(request.param)


def record_of(pack: Path) -> dict[str, object]:
    record: dict[str, object] = json.loads((pack / RECORD_NAME).read_text(encoding="utf-8"))
    return record


def rows(path: Path) -> list[dict[str, str]]:
    with path.open(encoding="utf-8", newline="") as stream:
        return list(csv.DictReader(stream))


def test_every_file_is_there(pack: Path) -> None:
    names = files_in(pack)
    for name in ("sheets.pdf", "parts.csv", "predicted.s1p", "pattern.csv", "findings.csv", RECORD_NAME):
        assert name in names
    folders = {name.split("/")[0] for name in names if "/" in name}
    assert {"cut", "bend", "model", "order"} <= folders
    assert any(name.startswith("model/assembly") for name in names)
    # every name can be sent to a shop: ASCII, no blanks
    assert all(re.fullmatch(r"[A-Za-z0-9._/-]+", name) for name in names)


def test_the_record_lists_every_file(pack: Path) -> None:
    record = record_of(pack)
    assert record["files"] == {name: sha256_of(pack / name) for name in files_in(pack) if name != RECORD_NAME}


def test_the_feed_is_matched_and_nothing_stops(pack: Path) -> None:
    record = record_of(pack)
    assert record["predicted"]["return_loss_db"] >= 20  # type: ignore[index]
    assert not [row for row in rows(pack / "findings.csv") if row["severity"] == "stop"]
    assert {field.name for field in fields(Sizes)} <= set(record["sizes"])  # type: ignore[call-overload]


def test_every_made_part_has_its_files(pack: Path) -> None:
    names = files_in(pack)
    for row in rows(pack / "parts.csv"):
        process = set(row["process"].split("+"))
        if "print" in process:
            assert f"print/{row['part']}.stl" in names
        if "laser" in process:
            assert [name for name in names if name.startswith(f"cut/{row['part']}_")]
        # what is cut straight from bought cable or tube is not bent
        if "wire" in process and "buy" not in process:
            assert f"bend/{row['part']}_wire_schedule.csv" in names


def run(words: list[str], environment: dict[str, str], **changes: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "fabgen", *words],
        capture_output=True, text=True, check=False, env={**environment, **changes}, cwd=ROOT,
    )  # fmt: skip


@pytest.mark.parametrize("name", NAMES)
def test_another_seed_another_zone_another_folder_same_bytes(
    name: str, real_pack: Callable[[str], Path], real_environment: dict[str, str], tmp_path: Path
) -> None:
    first = real_pack(name)
    target = tmp_path / "Zweites Päckchen"
    words = ["pack", f"templates/{name}.toml", "-o", str(target), "--quiet"]
    result = run(
        words, real_environment, PYTHONHASHSEED="7", TZ="Pacific/Kiritimati", LC_ALL="C", SOURCE_DATE_EPOCH="1"
    )
    assert result.returncode == 0, result.stderr
    assert files_in(target) == files_in(first)
    assert [file for file in files_in(first) if (first / file).read_bytes() != (target / file).read_bytes()] == []


def children_seconds() -> float:
    """Processor time of all ended children: the clock would also count what else the machine does."""
    usage = resource.getrusage(resource.RUSAGE_CHILDREN)
    return usage.ru_utime + usage.ru_stime


def test_a_check_of_a_sized_job_is_quick(real_pack: Callable[[str], Path], real_environment: dict[str, str]) -> None:
    real_pack("hydrogen-wire")
    began = children_seconds()
    result = run(["check", "templates/hydrogen-wire.toml", "--json"], real_environment)
    seconds = children_seconds() - began
    assert result.returncode == 0, result.stderr
    kept = rows(real_pack("hydrogen-wire") / "findings.csv")
    assert [row["code"] for row in json.loads(result.stdout)] == [row["code"] for row in kept]
    # 1.5 s on an idle machine
    assert seconds < 5


@pytest.mark.thorough
def test_the_drawn_loop_can_be_solved(real_pack: Callable[[str], Path], real_environment: dict[str, str]) -> None:
    real_pack("hydrogen-wire")
    result = run(["check", "templates/hydrogen-wire.toml", "--solid", "--json"], real_environment)
    assert result.returncode == 0, result.stderr
    (found,) = [row for row in json.loads(result.stdout) if row["code"] == "CONS-302"]
    assert re.fullmatch(r"[+-]\d+\.\d MHz", found["value"])
    # within the limit that the finding states itself
    assert found["severity"] == "note"


def test_size_says_what_the_pack_says(real_pack: Callable[[str], Path], real_environment: dict[str, str]) -> None:
    record = record_of(real_pack("hydrogen-brass"))
    result = run(["size", "templates/hydrogen-brass.toml", "--json"], real_environment)
    assert result.returncode == 0, result.stderr
    sized = json.loads(result.stdout)
    for key in ("sizes", "predicted", "capacitor", "job", "settings"):
        assert sized[key] == record[key]


def test_a_written_pack_is_checked_from_its_files_alone(
    pack: Path, real_environment: dict[str, str], tmp_path: Path
) -> None:
    result = run(["check", str(pack), "--quiet"], real_environment)
    assert result.returncode == 0, result.stdout
    assert "0 findings" in result.stdout
    changed = tmp_path / "changed"
    shutil.copytree(pack, changed)
    with (changed / "parts.csv").open("a", encoding="utf-8") as stream:
        stream.write("more,than,was,written\n")
    result = run(["check", str(changed), "--quiet"], real_environment)
    assert result.returncode == 4
    assert "parts.csv was changed after the pack was written" in result.stdout


@pytest.mark.parametrize(("form", "make"), [("wire", "rolled"), ("sheet", "printed")])
def test_every_part_is_there_once(form: str, make: str) -> None:
    keys = [part.key for part in build_content(sample_feed(form, make))[0]]
    assert len(keys) == len(set(keys))


def test_groups() -> None:
    assert chosen_groups(()) == tuple(GROUPS)
    assert chosen_groups(("sheets", "tables")) == ("tables", "sheets")
    with pytest.raises(JobError, match="is not a group of files; allowed: tables"):
        chosen_groups(("all",))


@pytest.mark.parametrize(
    ("form", "make"),
    [("wire", "rolled"), ("sheet", "folded"), ("wire", "printed"), ("sheet", "tube"), ("wire", "turned")],
)
def test_every_make_of_can_gives_a_pack(form: str, make: str, tmp_path: Path) -> None:
    feed = sample_feed(form, make)
    _, findings = build_content(feed)
    stops = tuple({finding.code for finding in findings if finding.severity == "stop"})
    report = write_pack(feed, tmp_path / "pack", PackOptions(("tables", "bend", "cut", "order"), stops))
    assert set(report.files) | {RECORD_NAME} == set(files_in(tmp_path / "pack"))


def test_stop_findings_are_named_all_at_once(tmp_path: Path) -> None:
    feed = sample_feed()
    limits = feed.job.limits.model_copy(update={"sheet_mm": (20.0, 20.0)})
    feed = replace(feed, job=feed.job.model_copy(update={"limits": limits}))
    with pytest.raises(ChecksFailedError) as caught:
        write_pack(feed, tmp_path / "pack")
    lines = str(caught.value).splitlines()
    assert re.match(r"\d finding\(s\) stop the pack:", lines[0])
    assert all(re.match(r"  [A-Z]+-\d+ [a-z0-9-]+: .*; use a sheet of", line) for line in lines[1:-1])
    assert re.search(r"--despite [A-Z]+-\d+$", lines[-1])
    assert not list(tmp_path.iterdir())
