"""The kept packs and pictures, and how far a new run may differ from them."""

from __future__ import annotations

import csv
import io
import json
import math
from pathlib import Path
from typing import Any

ROOT = Path(__file__).parent.parent
EXAMPLES = ("hydrogen-wire", "hydrogen-brass", "satellite-1690")
PICTURES = {"docs/hydrogen-wire.png": ("hydrogen-wire", 1), "docs/hydrogen-brass.png": ("hydrogen-brass", 1)}
DOTS_PER_INCH = 110
# Results of long computations may differ in the last digits between kinds of processor.
RELATIVE = 2e-3
_HASHES = {"files"}


def differences(kept: Path, new: Path) -> list[str]:
    """What differs between a kept and a new file, in words; numbers in data files may differ by ``RELATIVE``."""
    if kept.read_bytes() == new.read_bytes():
        return []
    if kept.suffix == ".json":
        return list(_unequal(json.loads(kept.read_text("utf-8")), json.loads(new.read_text("utf-8")), kept.name))
    if kept.suffix in {".csv", ".s1p"}:
        return list(_unequal(_cells(kept), _cells(new), kept.name))
    return [f"{kept.name} differs"]


def _cells(path: Path) -> list[list[str]]:
    text = path.read_text("utf-8")
    return (
        list(csv.reader(io.StringIO(text))) if path.suffix == ".csv" else [line.split() for line in text.splitlines()]
    )


def _unequal(kept: Any, new: Any, place: str) -> list[str]:
    if isinstance(kept, dict) and isinstance(new, dict):
        if set(kept) != set(new):
            return [f"{place}: keys differ: {sorted(set(kept) ^ set(new))[:5]}"]
        return [text for key in kept if key not in _HASHES for text in _unequal(kept[key], new[key], f"{place}.{key}")]
    if isinstance(kept, list) and isinstance(new, list):
        if len(kept) != len(new):
            return [f"{place}: {len(kept)} against {len(new)} entries"]
        return [
            text for i, (a, b) in enumerate(zip(kept, new, strict=True)) for text in _unequal(a, b, f"{place}[{i}]")
        ]
    try:
        same = math.isclose(float(kept), float(new), rel_tol=RELATIVE, abs_tol=RELATIVE)
    except (TypeError, ValueError):
        same = kept == new
    return [] if same else [f"{place}: {kept!r} against {new!r}"]


def render(sheets: Path, page: int, target: Path) -> None:
    """One page of the sheets as a picture, by poppler."""
    import subprocess

    subprocess.run(
        ["pdftoppm", "-r", str(DOTS_PER_INCH), "-f", str(page), "-l", str(page), "-png", "-singlefile", str(sheets),
         str(target.with_suffix(""))],
        check=True,
    )  # fmt: skip
