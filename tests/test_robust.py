"""What breaks a run from outside: signals, disks, other runs, odd surroundings. Each leaves no half pack."""

from __future__ import annotations

import contextlib
import json
import os
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import pytest

from fabgen.folder import RECORD_NAME, files_in, sha256_of

ROOT = Path(__file__).parent.parent
JOB = str(ROOT / "templates" / "hydrogen-wire.toml")


def command(*words: str) -> list[str]:
    return [sys.executable, "-m", "tests.robust_child", "pack", JOB, *words]


def surroundings(**changes: str | None) -> dict[str, str]:
    """This process's environment with PYTHONPATH to the tree, no cache, and the changes (None takes out)."""
    merged: dict[str, str | None] = {**os.environ, "PYTHONPATH": str(ROOT), "FABGEN_CACHE": "", **changes}
    return {key: value for key, value in merged.items() if value is not None}


def pack(
    target: Path, *words: str, before: list[str] | None = None, **changes: str | None
) -> subprocess.CompletedProcess[bytes]:
    return subprocess.run(
        [*(before or []), *command("-o", str(target), "--quiet", "--only", "tables", *words)],
        capture_output=True, check=False, env=surroundings(**changes), cwd=target.parent,
    )  # fmt: skip


# No test waits by the clock for anything but a failure; these bounds are for a machine under heavy load.
LONG_S = 300
PATIENCE_S = 240


def launch(target: Path, pause: float, *words: str) -> subprocess.Popen[str]:
    """A run that will wait once it has written its first files.

    A shell starts what it puts in the background with Ctrl-C ignored, and children inherit that; the run gets the
    usual meaning back.
    """
    return subprocess.Popen(
        command("-o", str(target), "--quiet", "--only", "tables", *words),
        stderr=subprocess.PIPE, stdout=subprocess.DEVNULL, text=True, env=surroundings(FABGEN_TEST_PAUSE=str(pause)),
        preexec_fn=lambda: signal.signal(signal.SIGINT, signal.SIG_DFL),  # noqa: PLW1509 (no threads here)
    )  # fmt: skip


def start(target: Path, pause: float, *words: str) -> subprocess.Popen[str]:
    """A run that has written its first files and now waits."""
    process = launch(target, pause, *words)
    assert process.stderr is not None
    assert process.stderr.readline() == "first files are written\n"
    return process


def is_whole(target: Path) -> bool:
    record = json.loads((target / RECORD_NAME).read_text(encoding="utf-8"))
    present = [name for name in files_in(target) if name != RECORD_NAME]
    return present == sorted(record["files"]) and all(sha256_of(target / n) == record["files"][n] for n in present)


@pytest.fixture
def older(tmp_path: Path) -> Path:
    """A whole pack that stands already."""
    target = tmp_path / "pack"
    result = pack(target)
    assert result.returncode == 0, result.stderr
    return target


@pytest.mark.parametrize(
    ("number", "status", "words"),
    [(signal.SIGINT, 130, "stopped; nothing was written"), (signal.SIGTERM, 143, "ended from outside")],
)
def test_stopped_in_the_middle(older: Path, number: signal.Signals, status: int, words: str) -> None:
    stamp = (older / RECORD_NAME).stat().st_mtime_ns
    process = start(older, LONG_S)
    process.send_signal(number)
    _, message = process.communicate(timeout=PATIENCE_S)
    assert process.returncode == status
    assert words in message
    assert "Traceback" not in message
    assert [path.name for path in older.parent.iterdir()] == ["pack"]
    assert is_whole(older)
    assert (older / RECORD_NAME).stat().st_mtime_ns == stamp


def test_killed_in_the_middle_then_run_again(older: Path) -> None:
    process = start(older, LONG_S)
    process.kill()
    process.communicate(timeout=PATIENCE_S)
    assert is_whole(older)
    assert len(list(older.parent.iterdir())) == 2
    assert pack(older).returncode == 0
    assert [path.name for path in older.parent.iterdir()] == ["pack"]
    assert is_whole(older)


def test_two_packs_into_one_folder_at_once(tmp_path: Path) -> None:
    target = tmp_path / "pack"
    runs = [start(target, 0.3) for _ in range(2)]
    for process in runs:
        _, message = process.communicate(timeout=PATIENCE_S)
        assert process.returncode == 0, message
    assert is_whole(target)
    assert [path.name for path in tmp_path.iterdir()] == ["pack"]


def test_time_limit_in_the_middle(older: Path) -> None:
    # Under load the limit may pass before the first files; what it leaves must be the same.
    process = launch(older, LONG_S, "--time-limit", "3")
    _, message = process.communicate(timeout=PATIENCE_S)
    assert process.returncode == 8
    assert "the time limit of 3 s has passed; nothing was written" in message
    assert [path.name for path in older.parent.iterdir()] == ["pack"]
    assert is_whole(older)


@contextlib.contextmanager
def small_disk(folder: Path, kibibytes: int) -> Iterator[Path]:
    """A disk of a few kibibytes; skips where this user may not mount one."""
    place = folder / "disk"
    place.mkdir()
    options = ["-t", "tmpfs", "-o", f"size={kibibytes}k", "tmpfs", str(place)]
    if (
        shutil.which("mount") is None
        or subprocess.run(["mount", *options], capture_output=True, check=False).returncode
    ):
        pytest.skip("mounting a small disk is not permitted here; the limit on file size is tested instead")
    try:
        yield place
    finally:
        subprocess.run(["umount", str(place)], check=True)


@pytest.mark.parametrize("kibibytes", [8, 24])
def test_full_disk(tmp_path: Path, kibibytes: int) -> None:
    with small_disk(tmp_path, kibibytes) as disk:
        result = pack(disk / "pack")
        assert result.returncode == 5
        assert b"the disk is full; free some space" in result.stderr
        assert b"Traceback" not in result.stderr
        assert not list(disk.iterdir())


def test_full_disk_keeps_the_older_pack(tmp_path: Path) -> None:
    with small_disk(tmp_path, 96) as disk:
        assert pack(disk / "pack").returncode == 0
        (disk / "ballast").write_bytes(b"0" * (shutil.disk_usage(disk).free - 4096))
        assert pack(disk / "pack").returncode == 5
        assert is_whole(disk / "pack")
        assert sorted(path.name for path in disk.iterdir()) == ["ballast", "pack"]


def test_limit_on_file_size(tmp_path: Path) -> None:
    result = pack(tmp_path / "pack", before=["prlimit", "--fsize=2000"])
    assert result.returncode == 5
    assert b"a file would be larger than allowed here" in result.stderr
    assert not list(tmp_path.iterdir())


def test_read_only_folder(tmp_path: Path) -> None:
    place = tmp_path / "locked"
    place.mkdir()
    place.chmod(0o555)
    locked = subprocess.run(["chattr", "+i", str(place)], capture_output=True, check=False).returncode == 0
    if not locked and os.access(place, os.W_OK):
        pytest.skip("this user can write everywhere and may not lock a folder")
    try:
        result = pack(place / "pack")
    finally:
        if locked:
            subprocess.run(["chattr", "-i", str(place)], check=True)
        place.chmod(0o755)
    assert result.returncode == 5
    assert b"permi" in result.stderr
    assert not list(place.iterdir())


@pytest.mark.parametrize(
    "changes",
    [
        {"LC_ALL": "C", "LANG": None},
        {"LC_ALL": "tr_TR.ISO-8859-9", "PYTHONIOENCODING": "ascii", "PYTHONUTF8": "0", "PYTHONCOERCECLOCALE": "0"},
        {"HOME": None, "XDG_CACHE_HOME": None, "FABGEN_CACHE": None},
        {"HOME": "/nonexistent", "XDG_CACHE_HOME": None, "FABGEN_CACHE": None},
        {"TZ": "Pacific/Kiritimati"},
        {"TERM": None, "COLUMNS": "20"},
        {"PYTHONHASHSEED": "1"},
        {"PYTHONOPTIMIZE": "2"},
    ],
    ids="-".join,
)
def test_odd_surroundings_change_no_byte(older: Path, changes: dict[str, str | None]) -> None:
    target = older.parent / "Päckchen für Ø 70"
    result = pack(target, **changes)
    assert result.returncode == 0, result.stderr
    assert files_in(target) == files_in(older)
    assert all((target / name).read_bytes() == (older / name).read_bytes() for name in files_in(older))


def test_one_core(older: Path) -> None:
    target = older.parent / "one core"
    core = str(min(os.sched_getaffinity(0)))
    assert pack(target, before=["taskset", "-c", core]).returncode == 0
    assert (target / RECORD_NAME).read_bytes() == (older / RECORD_NAME).read_bytes()


def test_one_gibibyte_of_memory(tmp_path: Path) -> None:
    result = pack(tmp_path / "pack", before=["prlimit", f"--as={1 << 30}"])
    assert result.returncode == 9
    assert b"the limit set by ulimit is 1024 MiB" in result.stderr
    assert not list(tmp_path.iterdir())


def test_an_odd_job_path(tmp_path: Path) -> None:
    job = tmp_path / "Auftrag für Ø 70 – 'neu' $HOME.toml"
    shutil.copy(JOB, job)
    result = subprocess.run(
        [sys.executable, "-m", "tests.robust_child", "size", str(job), "--quiet"],
        capture_output=True, check=False, env=surroundings(), cwd=ROOT,
    )  # fmt: skip
    assert result.returncode == 0, result.stderr
    bad = tmp_path / os.fsdecode(b"caf\xe9.toml")
    result = subprocess.run(
        [sys.executable, "-m", "tests.robust_child", "size", str(bad)],
        capture_output=True, check=False, env=surroundings(), cwd=ROOT,
    )  # fmt: skip
    assert result.returncode == 2
    assert b"there is no job file" in result.stderr


def test_a_new_day_changes_no_byte(older: Path) -> None:
    target = older.parent / "another day"
    time.sleep(1.1)
    assert pack(target).returncode == 0
    assert all((target / name).read_bytes() == (older / name).read_bytes() for name in files_in(older))
