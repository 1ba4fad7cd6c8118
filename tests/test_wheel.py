"""A wheel built from the tree runs without the tree."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
from collections.abc import Callable
from importlib.util import find_spec
from pathlib import Path

import pytest

from fabgen import cli, commands
from fabgen.folder import files_in

ROOT = Path(__file__).parent.parent
pytestmark = pytest.mark.slow


@pytest.fixture(scope="module")
def installed(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The wheel, installed where the tree is not seen; built from a copy, so the tree stays clean."""
    folder = tmp_path_factory.mktemp("wheel")
    source = folder / "source"
    keep_out = shutil.ignore_patterns(".git", ".venv", "build", "*.egg-info", "__pycache__", "out_examples", "tests")
    shutil.copytree(ROOT, source, ignore=keep_out)
    result = subprocess.run(
        [sys.executable, "-m", "pip", "wheel", "--quiet", "--no-deps", "-w", str(folder), str(source)],
        capture_output=True, text=True, check=False,
    )  # fmt: skip
    if result.returncode and "setuptools" in result.stderr:
        pytest.skip("no network to fetch the build tool")
    assert result.returncode == 0, result.stderr
    place = folder / "installed"
    wheel = next(folder.glob("fabgen-*.whl"))
    subprocess.run(
        [sys.executable, "-m", "pip", "install", "--quiet", "--no-deps", "--target", str(place), str(wheel)],
        check=True, capture_output=True,
    )  # fmt: skip
    shutil.rmtree(source)
    return place


def run(installed: Path, words: list[str], cwd: Path, environment: dict[str, str]) -> subprocess.CompletedProcess[str]:
    """The installed command itself, in a folder that is not the tree."""
    return subprocess.run(
        [str(installed / "bin" / "fabgen"), *words], capture_output=True, text=True, check=False, cwd=cwd,
        env={**environment, "PYTHONPATH": str(installed)},
    )  # fmt: skip


def test_it_holds_code_tables_templates_and_fonts_and_nothing_else(installed: Path) -> None:
    names = {path.relative_to(installed).as_posix() for path in installed.rglob("*") if path.is_file()}
    names = {name for name in names if ".dist-info/" not in name and "__pycache__" not in name} - {"bin/fabgen"}
    assert all(name.startswith("fabgen/") for name in names)
    for name in ("templates/hydrogen-wire.toml", "stock/metals.toml", "py.typed", "drawing/DejaVuSans.ttf"):
        assert f"fabgen/{name}" in names
    tree = {path.relative_to(ROOT).as_posix() for path in (ROOT / "fabgen").rglob("*.py")}
    assert {name for name in names if name.endswith(".py")} == tree


OWN_ROW = """
[[wire]]
key = "reel"
name = "reel in the drawer"
diameters_mm = [3.3]
source = "measured"
known_from = "measured"
"""
# Every command, each with what its output must hold.
COMMANDS = (
    (["--version"], "fabgen "),
    (["--help"], "exit status"),
    (["--completion", "bash"], "complete -o filenames"),
    (["--completion", "zsh"], "bashcompinit"),
    (["--completion", "fish"], "complete -c fabgen"),
    (["start"], "hydroxyl-choke"),
    (["start", "--list"], "hydrogen-brass"),
    (["start", "--keys"], "frequency_mhz"),
    (["start", "hydrogen-wire", "-o", "job.toml"], "job.toml is written"),
    (["stock"], "source: "),
    (["stock", "metal", "brass", "--json"], "cuzn37"),
    (["stock", "wire", "--stock", "own.toml"], "reel in the drawer"),
    (["size", "job.toml", "--quiet"], "return loss"),
    (["size", "job.toml", "--quiet", "--json", "--plots", "plots"], '"fabgen_version"'),
    (["check", "job.toml", "--quiet"], "findings"),
    (["pack", "job.toml", "-o", "some", "--only", "tables", "--quiet"], "5 files"),
    (["pack", "job.toml", "-o", "pack", "--quiet"], "return loss"),
    (["check", "pack", "--quiet"], "pack pack"),
)


def test_every_command_runs_without_the_tree(
    installed: Path, tmp_path: Path, real_environment: dict[str, str], real_pack: Callable[[str], Path]
) -> None:
    wanted = real_pack("hydrogen-wire")
    environment = {key: value for key, value in real_environment.items() if key in {"PATH", "HOME", "FABGEN_CACHE"}}
    (tmp_path / "own.toml").write_text(OWN_ROW, encoding="utf-8")
    for words, output in COMMANDS:
        result = run(installed, words, tmp_path, environment)
        assert result.returncode == 0, f"{words}: {result.stderr}"
        assert output in result.stdout, words
    assert {words[0] for words, _ in COMMANDS if not words[0].startswith("-")} == set(commands.COMMANDS)
    assert files_in(tmp_path / "pack") == files_in(wanted)
    assert [n for n in files_in(wanted) if (tmp_path / "pack" / n).read_bytes() != (wanted / n).read_bytes()] == []


def test_it_is_the_installed_copy_that_runs(installed: Path, tmp_path: Path) -> None:
    result = subprocess.run(
        [sys.executable, "-c", "import fabgen; print(fabgen.__file__)"], capture_output=True, text=True, check=True,
        cwd=tmp_path, env={"PATH": os.environ["PATH"], "PYTHONPATH": str(installed)},
    )  # fmt: skip
    assert Path(result.stdout.strip()).is_relative_to(installed)


# Part of the C library, on every machine.
LIBC = {"ld-linux-x86-64.so.2", "libc.so.6", "libdl.so.2", "libm.so.6", "libpthread.so.0", "librt.so.1"}


def test_every_system_library_has_its_package_named() -> None:
    """The CAD kernel and the mesher as installed here: what they need and do not bring along."""
    if shutil.which("readelf") is None:
        pytest.skip("readelf (binutils) is not installed")
    site = Path(find_spec("OCP").submodule_search_locations[0]).parent  # type: ignore[union-attr,index]
    folders = ("OCP", "netgen", "pyngcore", "cadquery_ocp.libs", "netgen_mesher.libs", "netgen_occt.libs")
    present = {path.name for path in site.rglob("*.so*")} | {path.name for path in site.parent.glob("*.so*")}
    files = [str(path) for folder in folders for path in (site / folder).rglob("*.so*")]
    text = subprocess.run(["readelf", "-d", *files], capture_output=True, text=True, check=True).stdout
    needed = set(re.findall(r"\(NEEDED\).*\[(.+?)\]", text)) - present - LIBC
    kernel = {name for name in needed if name.startswith("libTK")}  # netgen finds the CAD kernel's by its own path
    assert needed - kernel
    assert sorted(needed - kernel - set(cli._LIBRARY_PACKAGES)) == []
