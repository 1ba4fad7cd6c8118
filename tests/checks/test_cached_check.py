"""``fabgen check`` on a feed that was sized before: nothing is solved, and it is quick."""

from __future__ import annotations

import os
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import pytest

from fabgen.cache import Cache
from fabgen.cli import main
from fabgen.job_reader import read_job
from fabgen.sized import feed_key, feed_to_text
from tests.samples import sample_feed

JOB = """
[target]
frequency_mhz = 1420.406
name = "sample feed"

[dish]
diameter_m = 2.4
focal_ratio = 0.4

[loop]
form = "wire"
wire_mm = 4.0
metal = "cu-etp"

[can]
make = "rolled"
metal = "cuzn37"
"""
LIMIT_S = 1.5
"""Processor time of the command from its start to its end, as asked; measured 0.4 s."""
SOLVERS = (
    "fabgen.fields.model", "fabgen.fields.kernel", "fabgen.sizing.size_feed", "numba", "netgen", "cadquery", "OCP",
)  # fmt: skip


@pytest.fixture
def sized_job(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A job file whose feed lies in the cache."""
    folder = tmp_path / "cache"
    monkeypatch.setenv("FABGEN_CACHE", str(folder))
    path = tmp_path / "job.toml"
    path.write_text(JOB, encoding="utf-8")
    job = read_job(path)
    sample = sample_feed("wire", "rolled")
    Cache(folder).put(feed_key(job), feed_to_text(replace(sample, job=job)))
    return path


def test_nothing_is_solved(
    sized_job: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    from fabgen.fields.model import FeedSolver
    from fabgen.sizing import size_feed

    calls: list[str] = []
    for name in ("solve", "solve_pair"):
        monkeypatch.setattr(FeedSolver, name, lambda *_, called=name: calls.append(called))
    monkeypatch.setattr(size_feed, "size_feed", lambda *_: calls.append("size_feed"))
    assert main(["check", str(sized_job), "--quiet"]) == 0
    assert calls == []
    assert "ELEC-202" in capsys.readouterr().out


def test_it_is_quick_and_loads_no_solver(sized_job: Path) -> None:
    # The second run counts: the first one of a new installation compiles the modules.
    code = (
        "import sys, time; from fabgen.cli import main; status = main(['check', sys.argv[1], '--quiet']); "
        f"print('LOADED', [name for name in {SOLVERS!r} if name in sys.modules], file=sys.stderr); "
        "print('SECONDS', time.process_time(), file=sys.stderr); sys.exit(status)"
    )
    times = []
    for _ in range(3):
        command = [sys.executable, "-c", code, str(sized_job)]
        ran = subprocess.run(command, capture_output=True, text=True, env=dict(os.environ), check=False)
        assert ran.returncode == 0, ran.stderr
        assert "LOADED []" in ran.stderr
        times.append(float(ran.stderr.split("SECONDS")[1]))
    assert min(times) < LIMIT_S, f"processor time {times} s"
    print(f"check on a cached size: {min(times):.2f} s of processor time")
