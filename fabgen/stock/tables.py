"""The stock tables: read once, looked up by key, with the user's own rows on top.

The tables lie beside this module as TOML, one array per kind. A row without a source is refused, shipped or
the user's own alike.

Depends on: errors, stock records.
"""

from __future__ import annotations

import difflib
import tomllib
from collections.abc import Mapping
from dataclasses import replace
from functools import cache
from importlib import resources
from pathlib import Path
from typing import Any, TypeVar

from fabgen.errors import JobError
from fabgen.stock.records import (
    Band,
    Coax,
    Connector,
    Die,
    Dielectric,
    Limit,
    Lining,
    Metal,
    Plastic,
    Printer,
    Screw,
    Sheet,
    Temper,
    Tolerance,
    Wire,
)
from fabgen.stock.rows import build_row

KINDS: Mapping[str, type] = {
    "metal": Metal,
    "wire": Wire,
    "sheet": Sheet,
    "lining": Lining,
    "plastic": Plastic,
    "dielectric": Dielectric,
    "printer": Printer,
    "connector": Connector,
    "coax": Coax,
    "screw": Screw,
    "die": Die,
    "band": Band,
    "limit": Limit,
    "tolerance": Tolerance,
}
FILES: Mapping[str, str] = {kind: f"{kind}{'es' if kind == 'coax' else 's'}.toml" for kind in KINDS}
Row = TypeVar("Row")
_user_rows: dict[str, dict[str, Any]] = {}


@cache
def _shipped(kind: str) -> dict[str, Any]:
    text = resources.files("fabgen.stock").joinpath(FILES[kind]).read_text(encoding="utf-8")
    return _rows_of(kind, tomllib.loads(text).get(kind, []), FILES[kind])


def _rows_of(kind: str, raw: Any, where: str) -> dict[str, Any]:
    if not isinstance(raw, list):
        raise JobError(f"{where}: '{kind}' is one table; write rows as [[{kind}]]")
    rows: dict[str, Any] = {}
    for item in raw:
        row = build_row(KINDS[kind], item, f"{where}, [[{kind}]]")
        if row.key in rows:
            raise JobError(f"{where}: {kind} '{row.key}' stands there twice; keep one row")
        rows[row.key] = row
    return rows


def all_rows(kind: str) -> tuple[Any, ...]:
    """Every row of a kind in table order, the user's own rows last.

    Raises JobError for an unknown kind."""
    _known("kind of stock", kind, KINDS)
    return tuple({**_shipped(kind), **_user_rows.get(kind, {})}.values())


def load_user_rows(path: Path | str) -> tuple[Any, ...]:
    """Read the user's own rows; they are added to the tables and replace shipped rows of the same key.

    Returns the rows. Raises JobError when the file is missing, not TOML, or a row is not complete."""
    file = Path(path)
    try:
        data = tomllib.loads(file.read_text(encoding="utf-8"))
    except FileNotFoundError:
        raise JobError(f"stock file {file}: no such file; give a TOML file with [[metal]] rows") from None
    except (OSError, UnicodeDecodeError, tomllib.TOMLDecodeError) as error:
        raise JobError(f"stock file {file}: cannot be read as TOML ({error})") from None
    added: list[Any] = []
    for kind in data:
        _known("kind of stock", kind, KINDS)
    for kind, raw in data.items():
        rows = _rows_of(kind, raw, str(file))
        _user_rows.setdefault(kind, {}).update(rows)
        added.extend(rows.values())
    return tuple(added)


def forget_user_rows() -> None:
    """Drop the user's own rows (between two jobs with different stock files)."""
    _user_rows.clear()


def _known(what: str, key: str, allowed: Mapping[str, Any]) -> None:
    if key in allowed:
        return
    near = difflib.get_close_matches(key.lower(), allowed, n=1, cutoff=0.4)
    hint = f" Did you mean '{near[0]}'?" if near else ""
    raise JobError(f"unknown {what} '{key}'.{hint} Allowed: {', '.join(allowed)}")


def _look_up(what: str, kind: str, key: str) -> Any:
    user = _user_rows.get(kind, {})
    if key in user:
        return user[key]
    shipped = _shipped(kind)
    _known(what, key, {**shipped, **user})
    return shipped[key]


def metal(key: str) -> Metal:
    """The metal of that key, like ``cu-etp``. Raises JobError naming the nearest known key."""
    row: Metal = _look_up("metal", "metal", key)
    return row


def temper(of: Metal | str, key: str | None = None) -> Temper:
    """The metal's temper by key or by any of its names (``O`` finds ``H111``); None gives the usual one."""
    row = metal(of) if isinstance(of, str) else of
    if key is None:
        return row.default_temper
    for candidate in row.tempers:
        if candidate.key.lower() == key.lower():
            return candidate
    for candidate in row.tempers:
        if key.lower() in candidate.name.lower().split("/"):
            return candidate
    _known(f"temper of {row.key}", key, {t.key: t for t in row.tempers})
    raise JobError(f"unknown temper '{key}' of {row.key}")


def lining(key: str) -> Lining:
    """The conductive lining of that key, like ``copper-foil-35``."""
    row: Lining = _look_up("lining", "lining", key)
    return row


def plastic(key: str) -> Plastic:
    """The printing plastic of that key, like ``petg``."""
    row: Plastic = _look_up("plastic", "plastic", key)
    return row


def dielectric(key: str) -> Dielectric:
    """The capacitor's dielectric of that key, like ``ptfe``."""
    row: Dielectric = _look_up("dielectric", "dielectric", key)
    return row


def connector(key: str) -> Connector:
    """The panel connector of that key, like ``sma-4``."""
    row: Connector = _look_up("connector", "connector", key)
    return row


def coax(key: str) -> Coax:
    """The semi-rigid coaxial cable of that key, like ``rg402``."""
    row: Coax = _look_up("coax", "coax", key)
    return row


def screw(key: str) -> Screw:
    """The metric screw of that key, ``M2`` to ``M8``."""
    row: Screw = _look_up("screw", "screw", key)
    return row


def limit(key: str, overrides: Mapping[str, float] | None = None) -> Limit:
    """The limit of that key; a value in ``overrides`` (the job's table) takes its place and is marked."""
    row: Limit = _look_up("limit", "limit", key)
    if overrides and key in overrides:
        return replace(row, value=overrides[key], overridden=True)
    return row


def check_overrides(overrides: Mapping[str, float]) -> None:
    """Refuse an override of a limit that does not exist. Raises JobError naming the nearest known limit."""
    for key in overrides:
        _look_up("limit in overrides", "limit", key)


def general_tolerance_mm(size_mm: float, tolerance_class: str = "m") -> float:
    """Plus-minus in mm after ISO 2768-1 for a length, class ``f``, ``m`` or ``c``, up to 2 m or 4 m."""
    row: Tolerance = _look_up("tolerance class", "tolerance", f"iso2768-{tolerance_class}")
    return _by_size(row, size_mm)


def laser_tolerance_mm(size_mm: float, thickness_mm: float) -> float:
    """Plus-minus in mm after ISO 9013 class 1 for a laser-cut length in sheet up to 6.3 mm."""
    if thickness_mm > 6.3:
        raise JobError(f"sheet {thickness_mm:g} mm: laser tolerances end at 6.3 mm; use thinner sheet")
    band = "thin" if thickness_mm <= 1.0 else "medium" if thickness_mm <= 3.15 else "thick"
    row: Tolerance = _look_up("tolerance", "tolerance", f"iso9013-1-{band}")
    return _by_size(row, size_mm)


def _by_size(row: Tolerance, size_mm: float) -> float:
    for up_to, plus_minus in row.rows:
        if size_mm <= up_to:
            return plus_minus
    raise JobError(f"size {size_mm:g} mm: the table '{row.meaning}' ends at {row.rows[-1][0]:g} mm")
