"""The command line: what goes to which stream, and each exit status. The sizing is stood in for by the sample feed."""

from __future__ import annotations

import contextlib
import io
import json
import math
import os
import resource
import subprocess
import sys
import types
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from xml.etree import ElementTree

import pytest

from fabgen import __version__, cli, commands
from fabgen.checks.records import Finding
from fabgen.cli import build_parser, main
from fabgen.errors import FabgenError, NoSolutionError, NotCoveredError, NumericalError
from fabgen.job_reader import parse_job
from fabgen.sizing.front import Front, FrontPoint
from fabgen.sizing.records import SelfCheck
from fabgen.start import ask_job, templates, with_value
from tests.samples import sample_feed
from tests.test_job import FAULTS

ROOT = Path(__file__).parent.parent
JOB = str(ROOT / "templates" / "hydrogen-wire.toml")
Sizing = Callable[[object, object], object]


@pytest.fixture(autouse=True)
def _no_cache(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("FABGEN_CACHE", "")


@pytest.fixture
def sizing(monkeypatch: pytest.MonkeyPatch) -> Callable[[Sizing], None]:
    """Puts a function in the place of the sizing."""

    def put(function: Sizing) -> None:
        module = types.SimpleNamespace(size_feed=function)
        monkeypatch.setitem(sys.modules, "fabgen.sizing.size_feed", module)  # type: ignore[arg-type]

    put(lambda job, progress: sample_feed())
    return put


@pytest.fixture
def findings(monkeypatch: pytest.MonkeyPatch) -> Callable[[list[Finding]], None]:
    """Puts a list in the place of the checks' findings."""

    def put(found: list[Finding]) -> None:
        monkeypatch.setattr("fabgen.pack.build_content", lambda feed: ((), tuple(found)))
        monkeypatch.setattr("fabgen.pack.require_agreement", lambda folder: None)

    put([])
    return put


def a_finding(severity: str, code: str = "SHEET-101") -> Finding:
    return Finding(code, severity, "loop", "bend", "0.8 mm", "1.5 mm", "a table", "radius too small", "use 1.5 mm")  # type: ignore[arg-type]


def raising(error: BaseException) -> Sizing:
    def function(job: object, progress: object) -> object:
        raise error

    return function


def test_help_names_every_command_and_status(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["--help"]) == 0
    text = capsys.readouterr().out
    for word in ("start", "size", "check", "pack", "stock", "exit status", "130"):
        assert word in text


def test_version(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["--version"]) == 0
    assert capsys.readouterr().out == f"fabgen {__version__}\n"


@pytest.mark.parametrize(
    "words", [[], ["size"], ["pack", JOB], ["nonsense"], ["size", JOB, "--jsno"], ["pack", JOB, "-o"]]
)
def test_a_wrong_command_is_status_2(words: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    assert main(words) == 2
    captured = capsys.readouterr()
    assert captured.out == ""
    assert "usage: fabgen" in captured.err


def test_size_prints_a_table(sizing: object, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["size", JOB, "--quiet"]) == 0
    captured = capsys.readouterr()
    assert captured.err == ""
    for word in ("can bore", "loop diameter", "return loss", "aperture efficiency", "phase centre", "pF", " in"):
        assert word in captured.out
    assert "\x1b[" not in captured.out


def test_sizes_as_written_are_shown_both_ways(
    sizing: Callable[[Sizing], None], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    sizing(lambda job, progress: replace(sample_feed(), job=job))
    text = Path(JOB).read_text(encoding="utf-8")
    for section, key, value in (
        ("target", "frequency_mhz", '"1.42 GHz"'),
        ("dish", "diameter_m", '"10 ft"'),
        ("loop", "wire_mm", '"6 AWG"'),
        ("limits", "bed_mm", '["10 in", 250, 250]'),
    ):
        text = with_value(text, section, key, value)
    (tmp_path / "job.toml").write_text(text, encoding="utf-8")
    assert main(["size", str(tmp_path / "job.toml"), "--quiet"]) == 0
    shown = " ".join(capsys.readouterr().out.split())
    # ASTM B258: 6 AWG is 0.1620 in, 4.115 mm (from memory)
    for words in (
        "target.frequency_mhz 1.42 GHz = 1420 MHz",
        "dish.diameter_m 10 ft = 3.048 m (10 ft)",
        "loop.wire_mm 6 AWG = 4.115",
        " mm (0.162 in) ",
        "limits.bed_mm.1 10 in = 254 mm (10 in)",
    ):
        assert words in shown


def test_size_json_is_the_record(sizing: object, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["size", JOB, "--json", "--plain"]) == 0
    record = json.loads(capsys.readouterr().out)
    assert record["fabgen_version"] == __version__
    assert record["sizes"]["conductor"] == "wire"
    assert record["files"] == {}


def test_plots_are_written_as_svg(sizing: object, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = tmp_path / "plots"
    assert main(["size", JOB, "--quiet", "--plots", str(folder)]) == 0
    names = ["pattern.svg", "reflection.svg", "sensitivities.svg", "smith.svg"]
    assert sorted(path.name for path in folder.iterdir()) == names
    for name in names:
        assert ElementTree.parse(folder / name).getroot().tag.endswith("svg")
    blocked = tmp_path / "file"
    blocked.write_text("x", encoding="utf-8")
    assert main(["size", JOB, "--quiet", "--plots", str(blocked)]) == 5
    assert "name another after --plots" in capsys.readouterr().err


def test_the_front_is_shown(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    sizes = sample_feed().sizes
    points = tuple(
        FrontPoint(i / 8, sizes, (900.0, 1300.0), (-60.0 + 5 * i, -9.0 + i), 0.7, 12.0, 40.0) for i in range(9)
    )
    front = Front(points, ("place 0.5: no tap fits",))
    monkeypatch.setattr("fabgen.sized.selectivity_front_of", lambda job, progress: front)
    assert main(["size", JOB, "--front", "--quiet", "--plots", str(tmp_path)]) == 0
    text = capsys.readouterr().out
    assert text.count("dB/K") == 9
    assert "Not matched: place 0.5: no tap fits" in text
    assert [path.name for path in tmp_path.iterdir()] == ["front.svg"]
    assert main(["size", JOB, "--front", "--quiet", "--json"]) == 0
    assert len(json.loads(capsys.readouterr().out)["points"]) == 9


@pytest.mark.parametrize(
    ("found", "options", "status"),
    [([], [], 0), (["note"], [], 0), (["caution"], [], 0), (["caution"], ["--strict"], 4), (["stop", "note"], [], 4)],
)
def test_check_ends_by_the_worst(
    sizing: object,
    findings: Callable[[list[Finding]], None],
    capsys: pytest.CaptureFixture[str],
    found: list[str],
    options: list[str],
    status: int,
) -> None:
    findings([a_finding(severity) for severity in found])
    assert main(["check", JOB, "--quiet", *options]) == status
    text = capsys.readouterr().out
    assert f"{len(found)} findings" in text
    assert ("what to do: use 1.5 mm" in text) == bool(found)
    assert main(["check", JOB, "--quiet", "--json", *options]) == status
    assert [row["severity"] for row in json.loads(capsys.readouterr().out)] == found


def test_a_stop_finding_blocks_the_pack_unless_named(
    sizing: object, findings: Callable[[list[Finding]], None], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    findings([a_finding("stop")])
    target = tmp_path / "pack"
    assert main(["pack", JOB, "-o", str(target), "--quiet"]) == 4
    message = capsys.readouterr().err
    for word in ("SHEET-101 loop: radius too small; use 1.5 mm", "--despite SHEET-101"):
        assert word in message
    assert not list(tmp_path.iterdir())
    only = ["--only", "tables", "--quiet"]
    assert main(["pack", JOB, "-o", str(target), *only, "--despite", "SHEET-999"]) == 4
    assert main(["pack", JOB, "-o", str(target), *only, "--despite", "SHEET-101"]) == 0
    assert "WRITTEN DESPITE 1 STOP" in capsys.readouterr().out
    record = json.loads((target / "record.json").read_text(encoding="utf-8"))
    assert record["despite"] == ["SHEET-101"]


def test_only_some_groups(sizing: object, findings: object, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    target = tmp_path / "Päck für Øyvind"
    assert main(["pack", JOB, "-o", str(target), "--only", "tables", "--plain"]) == 0
    names = sorted(path.name for path in target.iterdir())
    assert names == ["findings.csv", "parts.csv", "pattern.csv", "predicted.s1p", "record.json"]
    captured = capsys.readouterr()
    assert "5 files, return loss 32.0 dB at 1420.41 MHz" in captured.out
    assert "writing parts list" in captured.err


def test_unknown_group(sizing: object, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["pack", JOB, "-o", str(tmp_path / "pack"), "--only", "tabels"]) == 2
    assert "allowed: tables, bend, cut, model, print, order, sheets" in capsys.readouterr().err


def test_a_used_folder_is_refused_before_anything_is_computed(
    sizing: Callable[[Sizing], None], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    sizing(raising(AssertionError("was computed")))
    (tmp_path / "mine.txt").write_text("x", encoding="utf-8")
    assert main(["pack", JOB, "-o", str(tmp_path)]) == 5
    assert "not empty and not a fabgen pack" in capsys.readouterr().err


def test_a_failed_self_check_stops_the_pack(
    sizing: Callable[[Sizing], None], findings: object, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    failed = SelfCheck("power balance", 0.08, 0.005, False, "radiated against input power")
    sizing(lambda job, progress: replace(sample_feed(), self_checks=(failed,)))
    assert main(["pack", JOB, "-o", str(tmp_path / "pack"), "--quiet"]) == 6
    assert "power balance: 0.08, limit 0.005 (radiated against input power)" in capsys.readouterr().err
    assert not list(tmp_path.iterdir())


@pytest.mark.parametrize(
    ("error", "status", "words"),
    [
        (NoSolutionError("no bore fits; nearest: 200 mm"), 3, "no bore fits; nearest: 200 mm"),
        (NumericalError("residual 1 above 1e-6"), 6, "residual"),
        (NotCoveredError("a spiral can is not built"), 7, "spiral"),
        (FabgenError("something"), 1, "something"),
        (MemoryError(), 9, "not enough memory"),
        (KeyboardInterrupt(), 130, "stopped; nothing was written"),
        (cli._EndedError(), 143, "ended from outside"),
        (OSError(28, "No space left on device"), 5, "the system refused: No space left on device"),
        (ImportError("libGL.so.1: cannot open shared object file"), 1, "install it: apt-get install libgl1"),
        (ImportError("libodd.so.7: cannot open"), 1, "install the system package that holds it"),
        (ImportError("No module named 'scipy'"), 1, "Install fabgen again"),
        (ImportError("No module named 'fabgen.sizing.match'"), 1, "Install fabgen again"),
        (ZeroDivisionError("float division by zero"), 1, "a fault in fabgen itself: ZeroDivisionError in test_cli.py"),
    ],
)
def test_every_end_has_its_status_and_message(
    sizing: Callable[[Sizing], None],
    capsys: pytest.CaptureFixture[str],
    error: BaseException,
    status: int,
    words: str,
) -> None:
    sizing(raising(error))
    assert main(["size", JOB, "--quiet"]) == status
    captured = capsys.readouterr()
    assert words in captured.err
    assert captured.err.startswith("fabgen: ")
    assert "Traceback" not in captured.err
    assert captured.out == ""


def test_every_documented_status_is_an_error_class() -> None:
    statuses = {cls.exit_status for cls in FabgenError.__subclasses__()} | {1}
    for status in statuses:
        assert f"  {status}  " in cli.EXIT_STATUSES


def test_debug_shows_the_trace_of_a_fault(sizing: Callable[[Sizing], None]) -> None:
    sizing(raising(ZeroDivisionError("x")))
    with pytest.raises(ZeroDivisionError):
        main(["size", JOB, "--debug", "--quiet"])


def test_time_limit(sizing: Callable[[Sizing], None], capsys: pytest.CaptureFixture[str]) -> None:
    def forever(job: object, progress: object) -> object:
        while True:
            pass

    sizing(forever)
    assert main(["size", JOB, "--quiet", "--time-limit", "0.1"]) == 8
    assert "the time limit of 0.1 s has passed" in capsys.readouterr().err


@pytest.mark.parametrize("value", ["0", "-1", "nan", "inf"])
def test_a_time_limit_without_meaning(sizing: object, value: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["size", JOB, f"--time-limit={value}"]) == 2
    assert "allowed: more than 0" in capsys.readouterr().err


def test_too_little_memory_is_said_first(
    sizing: object, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr("fabgen.resources.memory_mib", lambda: {"the limit set by ulimit": 1024})
    assert main(["size", JOB, "--quiet"]) == 9
    assert "the limit set by ulimit is 1024 MiB; the field computation and the solids need" in capsys.readouterr().err


def test_stock(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["stock"]) == 0
    everything = capsys.readouterr().out
    assert everything.count("source: ") > 60
    assert main(["stock", "metals", "brass"]) == 0
    brass = capsys.readouterr().out
    assert "cuzn37" in brass
    assert "cu-etp" not in brass
    assert main(["stock", "screw", "--json"]) == 0
    rows = json.loads(capsys.readouterr().out)["screw"]
    assert "M4" in {row["key"] for row in rows}
    assert all(row["source"]["text"] for row in rows)
    assert main(["stock", "unobtainium"]) == 2
    assert "no stock row holds 'unobtainium'; kinds: metal," in capsys.readouterr().err


def test_own_stock_rows(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    from fabgen.stock.tables import forget_user_rows

    shipped = (ROOT / "fabgen" / "stock" / "linings.toml").read_text(encoding="utf-8")
    row = "[[lining]]" + shipped.split("[[lining]]")[1].replace('"copper-foil-35"', '"my-foil"')
    own = tmp_path / "own.toml"
    own.write_text(row, encoding="utf-8")
    try:
        assert main(["stock", "lining", "--stock", str(own)]) == 0
        assert "my-foil" in capsys.readouterr().out
    finally:
        forget_user_rows()
    own.write_text("[[lining]]\nkey = 1\n", encoding="utf-8")
    assert main(["stock", "--stock", str(own)]) == 2


def test_a_job_may_name_own_rows(sizing: object, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    from fabgen.stock.tables import forget_user_rows

    job, own = tmp_path / "job.toml", tmp_path / "own.toml"
    text = Path(JOB).read_text(encoding="utf-8")
    job.write_text(with_value(text, "can", "lining", '"drawer-foil"'), encoding="utf-8")
    shipped = (ROOT / "fabgen" / "stock" / "linings.toml").read_text(encoding="utf-8")
    row = "[[lining]]" + shipped.split("[[lining]]")[1].replace('"copper-foil-35"', '"drawer-foil"')
    own.write_text(row, encoding="utf-8")
    assert main(["size", str(job), "--quiet"]) == 2
    assert "can.lining = 'drawer-foil' is not in the stock tables" in capsys.readouterr().err
    try:
        assert main(["size", str(job), "--quiet", "--stock", str(own)]) == 0
    finally:
        forget_user_rows()


STOCK_FAULTS = {
    "no file": (None, "no such file; give a TOML file"),
    "not TOML": ("[[wire", "cannot be read as TOML"),
    "unknown kind": ("[[wires]]\nkey = 'x'\n", "unknown kind of stock 'wires'. Did you mean 'wire'?"),
    "one table": ("[wire]\nkey = 'x'\n", "'wire' is one table; write rows as [[wire]]"),
    "not whole": ("[[wire]]\nkey = 'x'\n", "[[wire]]"),
    "twice": (2 * "[[wire]]\nkey='x'\nname='y'\ndiameters_mm=[1]\nsource='s'\nknown_from='m'\n", "stands there twice"),
}


@pytest.mark.parametrize("name", STOCK_FAULTS)
def test_each_fault_of_own_rows_is_named(name: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text, words = STOCK_FAULTS[name]
    own = tmp_path / "own.toml"
    if text is not None:
        own.write_text(text, encoding="utf-8")
    assert main(["stock", "--stock", str(own)]) == 2
    captured = capsys.readouterr()
    assert words in captured.err
    assert "own.toml" in captured.err or name == "unknown kind"
    assert captured.out == ""


@pytest.mark.parametrize("name", FAULTS)
def test_a_wrong_job_is_status_2_and_writes_nothing(
    name: str, sizing: Callable[[Sizing], None], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    sizing(raising(AssertionError("was computed")))
    text, words = FAULTS[name]
    (tmp_path / "job.toml").write_text(text, encoding="utf-8")
    assert main(["pack", str(tmp_path / "job.toml"), "-o", str(tmp_path / "pack")]) == 2
    captured = capsys.readouterr()
    assert captured.out == ""
    assert captured.err.startswith("fabgen: ")
    assert [word for word in words if word not in captured.err] == []
    assert [path.name for path in tmp_path.iterdir()] == ["job.toml"]


def test_start_lists_and_writes(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    assert main(["start", "--list"]) == 0
    assert len(capsys.readouterr().out.splitlines()) == len(templates()) == 8
    assert main(["start", "hydroxyl-choke"]) == 0
    text = Path("hydroxyl-choke.toml").read_text(encoding="utf-8")
    assert parse_job(text).can.choke is True
    assert main(["start", "hydroxyl-choke"]) == 5
    assert "exists already and is not overwritten" in capsys.readouterr().err
    assert main(["start", "hydroxil"]) == 2
    assert "did you mean 'hydroxyl-choke'?" in capsys.readouterr().err
    assert main(["start", "hydrogen-wire", "-o", "no/such/job.toml"]) == 5
    assert main(["start", "-o", "job.toml"]) == 0
    assert Path("job.toml").exists()


def test_start_asks_nothing_without_a_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("builtins.input", raising(AssertionError("asked")))
    monkeypatch.setattr(sys, "stdin", io.StringIO())
    assert main(["start"]) == 0


def questions(*answers: str) -> tuple[str, list[str]]:
    """The job text for these answers, and what was said."""
    said: list[str] = []
    queue = iter(answers)
    return ask_job(lambda question: next(queue), said.append), said


def test_the_questions_take_units_and_explain() -> None:
    text, said = questions(
        "12 MHz",
        "1.296 GHz",
        "3",
        "10 ft, 0.38",
        "wood 3",
        "sheet 1.5 mm",
        "cast",
        "tube",
        "100 mm",
        "6 1/4 in",
        "smaa",
        "n-4",
    )
    job = parse_job(text)
    assert job.target.frequency_mhz == 1296
    assert job.dish.diameter_m == 3.048
    assert (job.loop.form, job.loop.sheet_mm) == ("sheet", 1.5)
    assert (job.can.make, job.fixed.can_bore_mm) == ("tube", 158.75)
    assert job.cable.connector == "n-4"
    assert sum("allowed" in line.lower() or "write" in line for line in said) >= 6
    # sizes in other units stand in the job as they were given
    assert {w.key: w.text for w in job.as_written} == {
        "target.frequency_mhz": "1.296 GHz",
        "dish.diameter_m": "10 ft",
        "fixed.can_bore_mm": "6 1/4 in",
    }


@pytest.mark.parametrize(
    ("answer", "key", "millimetres"),
    [
        # handbook tables (from memory): 10 AWG 0.1019 in, 8 SWG 0.160 in, 16 B&S brass sheet 0.0508 in
        ("wire 10 AWG", "wire_mm", 0.1019 * 25.4),
        ("wire 8 SWG", "wire_mm", 0.160 * 25.4),
        ('wire 0.162"', "wire_mm", 4.1148),
        ("wire 5/32 in", "wire_mm", 3.96875),
        ("sheet 16 gauge", "sheet_mm", 0.0508 * 25.4),
        ("sheet 1/16 inch", "sheet_mm", 1.5875),
        ("sheet 1.6", "sheet_mm", 1.6),
    ],
)
def test_stock_in_any_unit_is_shown_both_ways(answer: str, key: str, millimetres: float) -> None:
    text, said = questions("", "", answer, "", "")
    job = parse_job(text)
    assert getattr(job.loop, key) == pytest.approx(millimetres, abs=2e-3)
    assert f"({millimetres / 25.4:.3f} in)" in said[2]


@pytest.mark.parametrize("answer", ["wire 12 ga", "wire 99 AWG", "sheet 99 gauge", "wire 30 mm", "sheet nan", "wire"])
def test_stock_without_meaning_is_asked_again(answer: str) -> None:
    text, said = questions("", "", answer, "wire 3 mm", "", "")
    assert parse_job(text).loop.wire_mm == 3
    assert sum("allowed" in line or "rite" in line for line in said) == 1


def test_the_questions_have_answers_of_their_own() -> None:
    text, said = questions("", "", "", "", "")
    job = parse_job(text)
    assert job.target.frequency_mhz == 1420.406
    assert job.loop.wire_mm == 4.0
    # 2.4 m of f/D 0.40: half angle 2 atan(1/1.6) = 64 degrees; 21 cm on 2.4 m: about 6 degrees wide
    words = ("211.1 mm", "64 degrees off", "6.2 degrees wide", "4.00 mm (0.157 in)", "rolled seam", "4 screws")
    assert [word for word, line in zip(words, [*said[:2], said[1], *said[2:]], strict=True) if word not in line] == []


def on_terminal(folder: Path, keys: str, *words: str) -> tuple[int, str]:
    """A run of ``fabgen start`` on a terminal of its own: exit status and what the screen showed."""
    import pty

    main_end, child_end = pty.openpty()
    process = subprocess.Popen(
        [sys.executable, "-m", "fabgen", "start", *words],
        stdin=child_end, stdout=child_end, stderr=child_end, cwd=folder, close_fds=True,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )  # fmt: skip
    os.close(child_end)
    os.write(main_end, keys.encode())
    shown = b""
    with contextlib.suppress(OSError):
        while piece := os.read(main_end, 4096):
            shown += piece
    os.close(main_end)
    return process.wait(timeout=60), shown.decode().replace("\r\n", "\n")


def test_start_asks_five_questions_on_a_terminal(tmp_path: Path) -> None:
    status, shown = on_terminal(tmp_path, "1.42 GHz\n8 ft, 0.42\nwire 8 AWG\nprinted\nn-4\n")
    assert status == 0, shown
    questions_shown = ["Frequency [", "Dish: ", "Loop stock [", "Can: ", "Connector ["]
    assert [shown.count(question) for question in questions_shown] == [1] * 5
    for consequence in ("211.1 mm", "2.438 m (8.00 ft)", "3.26 mm (0.128 in)", "STL and 3MF", "N panel jack"):
        assert consequence in shown
    assert "job.toml is written. Look through it, then: fabgen pack job.toml -o job-pack" in shown
    job = parse_job((tmp_path / "job.toml").read_text(encoding="utf-8"))
    assert (job.target.frequency_mhz, job.dish.diameter_m, job.dish.focal_ratio) == (1420.0, 2.4384, 0.42)
    assert (job.can.make, job.cable.connector) == ("printed", "n-4")


def test_start_on_a_terminal_that_closes(tmp_path: Path) -> None:
    status, shown = on_terminal(tmp_path, "1.42 GHz\n\x04")
    assert status == 2
    assert "the answers ended before the questions; nothing was written" in shown
    assert not list(tmp_path.iterdir())


def test_start_on_a_terminal_does_not_ask_in_vain(tmp_path: Path) -> None:
    (tmp_path / "job.toml").write_text("mine", encoding="utf-8")
    status, shown = on_terminal(tmp_path, "")
    assert status == 5
    assert "Frequency" not in shown
    assert "job.toml exists already and is not overwritten" in shown


def test_a_key_is_set_or_added() -> None:
    text = "[a]\nx = 1  # one\ny = 2\n[b]\nx = 3\n"
    assert with_value(text, "b", "x", "4") == "[a]\nx = 1  # one\ny = 2\n[b]\nx = 4\n"
    assert "x = 5  # one" in with_value(text, "a", "x", "5")
    assert with_value(text, "b", "z", "6").endswith("[b]\nz = 6\nx = 3\n")
    assert with_value(text, "c", "z", "7").endswith("\n[c]\nz = 7\n")


@pytest.mark.parametrize("shell", ["bash", "zsh", "fish"])
def test_completion_knows_every_option(shell: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["--completion", shell]) == 0
    script = capsys.readouterr().out
    for word in ("start", "pack", "time-limit", "despite", "hydrogen-wire", "metal", "sheets"):
        assert word in script


def test_bash_completes() -> None:
    script = subprocess.run(
        [sys.executable, "-m", "fabgen", "--completion", "bash"], capture_output=True, text=True, check=True, cwd=ROOT
    ).stdout
    ask = 'COMP_WORDS=(fabgen pack --des); COMP_CWORD=2; _fabgen; echo "${COMPREPLY[@]}"'
    answer = subprocess.run(["bash", "-c", script + ask], capture_output=True, text=True, check=True).stdout
    assert answer == "--despite\n"


def test_groups_of_the_parser_are_those_of_the_pack() -> None:
    from fabgen.pack import GROUPS

    assert tuple(GROUPS) == cli._GROUPS
    assert set(commands.COMMANDS) == {"start", "size", "check", "pack", "stock"}
    assert build_parser().prog == "fabgen"


class _Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


@pytest.mark.parametrize(("variable", "coloured"), [("", True), ("NO_COLOR", False)])
def test_colour_only_on_a_terminal_and_not_with_no_color(
    sizing: object,
    findings: Callable[[list[Finding]], None],
    monkeypatch: pytest.MonkeyPatch,
    variable: str,
    coloured: bool,
) -> None:
    findings([a_finding("stop")])
    monkeypatch.delenv("NO_COLOR", raising=False)
    monkeypatch.setenv("TERM", "xterm")
    if variable:
        monkeypatch.setenv(variable, "1")
    stream = _Terminal()
    monkeypatch.setattr(sys, "stdout", stream)
    main(["check", JOB, "--quiet"])
    assert ("\x1b[31m" in stream.getvalue()) == coloured


def test_a_bar_is_drawn_on_a_terminal_and_goes_away() -> None:
    from fabgen.progress import open_display

    stream = _Terminal()
    with open_display(quiet=False, plain=False, colour=False, stream=stream) as display:
        display.step("searching the can")
        display.share(1, 2)
        display.step("searching the loop")
    assert "searching the loop" in stream.getvalue()


def run(*words: str, **environment: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "fabgen", *words],
        capture_output=True, text=True, cwd=ROOT, env={**os.environ, **environment}, check=False,
    )  # fmt: skip


@pytest.mark.parametrize("words", [["--help"], ["stock"], ["size", "none.toml"], ["start", "--list"]])
def test_short_answers_load_no_heavy_package(words: list[str]) -> None:
    heavy = ["numpy", "scipy", "cadquery", "OCP", "netgen", "ezdxf", "shapely", "reportlab", "matplotlib", "numba"]
    code = (
        "import sys; from fabgen.cli import main; main(sys.argv[1:]); "
        f"sys.stderr.write('LOADED ' + ' '.join(m for m in {heavy!r} if m in sys.modules))"
    )
    result = subprocess.run([sys.executable, "-c", code, *words], capture_output=True, text=True, cwd=ROOT, check=False)
    assert result.stderr.endswith("LOADED ")


@pytest.mark.parametrize(
    ("words", "status"),
    [(["--help"], 0), (["stock"], 0), (["start", "--list"], 0), (["size", "none.toml"], 2), (["nonsense"], 2)],
)
def test_short_answers_are_quick(words: list[str], status: int) -> None:
    """0.4 s of processor time, the best of three: another program's load is not this one's."""
    best = math.inf
    for _ in range(3):
        before = resource.getrusage(resource.RUSAGE_CHILDREN)
        assert run(*words).returncode == status
        after = resource.getrusage(resource.RUSAGE_CHILDREN)
        best = min(best, after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime)
    assert best < 0.4


def test_a_reader_that_goes_away_is_no_error() -> None:
    command = f"{sys.executable} -m fabgen stock | head -n 1; echo ${{PIPESTATUS[0]}}"
    result = subprocess.run(["bash", "-c", command], capture_output=True, text=True, cwd=ROOT, check=False)
    assert result.stdout.splitlines()[-1] == "0"
    assert result.stderr == ""


def test_a_full_standard_output_is_said() -> None:
    command = f"{sys.executable} -m fabgen stock > /dev/full"
    result = subprocess.run(["bash", "-c", command], capture_output=True, text=True, cwd=ROOT, check=False)
    assert result.returncode == 5
    assert "No space left" in result.stderr
    assert "Traceback" not in result.stderr
