"""A wheel built from the tree runs without the tree."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
pytestmark = pytest.mark.slow


@pytest.fixture(scope="module")
def installed(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The content of the wheel, unpacked where the tree is not seen; built from a copy, so the tree stays clean."""
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
    with zipfile.ZipFile(next(folder.glob("fabgen-*.whl"))) as wheel:
        wheel.extractall(folder / "installed")
    return folder / "installed"


def run(installed: Path, words: list[str], cwd: Path, environment: dict[str, str]) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "fabgen", *words], capture_output=True, text=True, check=False, cwd=cwd,
        env={**environment, "PYTHONPATH": str(installed)},
    )  # fmt: skip


def test_it_holds_code_tables_templates_and_fonts_and_nothing_else(installed: Path) -> None:
    names = {path.relative_to(installed).as_posix() for path in installed.rglob("*") if path.is_file()}
    names = {name for name in names if ".dist-info/" not in name}
    assert all(name.startswith("fabgen/") for name in names)
    for name in ("templates/hydrogen-wire.toml", "stock/metals.toml", "py.typed", "drawing/DejaVuSans.ttf"):
        assert f"fabgen/{name}" in names
    tree = {path.relative_to(ROOT).as_posix() for path in (ROOT / "fabgen").rglob("*.py")}
    assert {name for name in names if name.endswith(".py")} == tree


def test_every_command_runs_without_the_tree(
    installed: Path, tmp_path: Path, real_environment: dict[str, str], real_pack: object
) -> None:
    real_pack("hydrogen-wire")  # type: ignore[operator]
    environment = {key: value for key, value in real_environment.items() if key in {"PATH", "HOME", "FABGEN_CACHE"}}
    environment |= {key: value for key, value in os.environ.items() if key.startswith("COV")}
    for words in (
        ["start", "hydrogen-wire", "-o", "job.toml"],
        ["start", "--list"],
        ["stock", "metal"],
        ["size", "job.toml", "--quiet"],
        ["check", "job.toml", "--quiet"],
        ["pack", "job.toml", "-o", "pack", "--quiet"],
    ):
        result = run(installed, words, tmp_path, environment)
        assert result.returncode == 0, f"{words}: {result.stderr}"
    pack = real_pack("hydrogen-wire")  # type: ignore[operator]
    assert (tmp_path / "pack" / "record.json").read_bytes() == (pack / "record.json").read_bytes()
