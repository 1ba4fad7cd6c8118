"""What several test files share: real packs, each sized and written once a session."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent


@pytest.fixture(scope="session")
def real_cache(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The folder of the results that the session's real runs share."""
    return tmp_path_factory.mktemp("cache")


@pytest.fixture(scope="session")
def real_environment(real_cache: Path) -> dict[str, str]:
    """This environment with the shared cache and the tree first."""
    return {**os.environ, "FABGEN_CACHE": str(real_cache), "PYTHONPATH": str(ROOT)}


@pytest.fixture(scope="session")
def real_pack(tmp_path_factory: pytest.TempPathFactory, real_environment: dict[str, str]) -> Callable[[str], Path]:
    """A function from a template's name to its whole pack, written by the command line."""
    folder = tmp_path_factory.mktemp("packs")

    def make(name: str) -> Path:
        target = folder / name
        if not target.exists():
            job = ROOT / "templates" / f"{name}.toml"
            subprocess.run(
                [sys.executable, "-m", "fabgen", "pack", str(job), "-o", str(target), "--quiet"],
                check=True, env=real_environment, capture_output=True, text=True,
            )  # fmt: skip
        return target

    return make
