"""Tables and order notes of a written pack: each figure in them, changed by hand, is found by its content."""

from __future__ import annotations

import csv
import re
import shutil
from dataclasses import replace
from pathlib import Path

import pytest

from fabgen.checks.read_files import read_pack
from fabgen.pack import PackOptions, write_pack
from fabgen.writers.tables_back import TOLD, tables_findings
from tests.samples import sample_feed

FIGURE = re.compile(r"(?<![\w.])\d+\.\d+(?![\w.])")


@pytest.fixture(scope="module")
def pack(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("tables") / "pack"
    write_pack(sample_feed("sheet", "turned"), folder, PackOptions(only=("tables", "bend", "cut", "order")))
    return folder


@pytest.fixture
def copy(pack: Path, tmp_path: Path) -> Path:
    return Path(shutil.copytree(pack, tmp_path / "pack"))


def test_a_pack_as_written_passes(pack: Path) -> None:
    assert tables_findings(read_pack(pack)) == ()


def test_every_cell_of_an_order_note_is_found(copy: Path) -> None:
    path, whole = copy / "order" / "laser.csv", read_pack(copy)
    heading, row, *others = csv.reader(path.read_text(encoding="utf-8").splitlines())
    half = len(heading) // 2
    assert half <= TOLD
    for columns in (range(half), range(half, len(heading))):
        changed = [f"{cell}7" if column in columns else cell for column, cell in enumerate(row)]
        with path.open("w", encoding="utf-8", newline="") as stream:
            csv.writer(stream, lineterminator="\n").writerows([heading, changed, *others])
        found = tables_findings(whole)
        assert {(f.code, f.severity, f.part) for f in found} == {("CONS-214", "stop", "order/laser.csv")}
        assert [(f.feature, f.value, f.limit) for f in found] == [
            (f"{heading[column]} of {row[0]}", changed[column], row[column]) for column in columns
        ]


@pytest.mark.parametrize(
    "name", ["parts.csv", "findings.csv", "bend/bend_table.csv", "order/laser.txt", "order/turn.csv"]
)
def test_the_last_figure_of_each_file_is_found(copy: Path, name: str) -> None:
    path = copy / name
    text = path.read_text(encoding="utf-8")
    last = list(FIGURE.finditer(text))[-1]
    digit = "3" if last[0][-1] != "3" else "4"
    path.write_text(f"{text[: last.end() - 1]}{digit}{text[last.end() :]}", encoding="utf-8")
    assert {(f.code, f.part) for f in tables_findings(read_pack(copy))} == {("CONS-214", name)}


def test_a_missing_line_or_row_or_note_is_found(copy: Path) -> None:
    for name in ("order/laser.txt", "parts.csv"):
        path = copy / name
        path.write_text("".join(path.read_text(encoding="utf-8").splitlines(keepends=True)[:-1]), encoding="utf-8")
    (copy / "order" / "fold.txt").unlink()
    found = tables_findings(read_pack(copy))
    assert {f.part for f in found} == {"order/laser.txt", "parts.csv", "order/fold.txt"}
    assert next(f for f in found if f.part == "order/fold.txt").value == "missing"


def test_other_marks_for_the_same_cells_are_found(copy: Path) -> None:
    path = copy / "parts.csv"
    path.write_bytes(path.read_bytes().replace(b"\n", b"\r\n"))
    (found,) = tables_findings(read_pack(copy))
    assert found.value == "other marks"


def test_a_pack_of_another_version_or_without_parts_is_told_or_left_alone(copy: Path) -> None:
    whole = read_pack(copy)
    (copy / "parts.csv").write_text("", encoding="utf-8")
    assert tables_findings(replace(whole, record={**whole.record, "fabgen_version": "0.0"})) == ()
    impossible = replace(whole.feed, sizes=replace(whole.feed.sizes, leg_width_mm=40.0))
    (found,) = tables_findings(replace(whole, feed=impossible))
    assert (found.part, found.value) == ("record.json", "unreadable")
