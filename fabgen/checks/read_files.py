"""A written pack read back from its files alone: the feed from record.json, the parts from DXF and CSV.

Nothing is taken from the program's own geometry code, so a file that says something else than the record is found.

Depends on: errors, job, sizing.records, parts (contour, records), checks.records. Imports ezdxf when called.
"""

from __future__ import annotations

import csv
import dataclasses
import io
import json
import struct
import types
import typing
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import accumulate
from pathlib import Path
from typing import Any, Union

from fabgen.errors import JobError
from fabgen.job import Job
from fabgen.parts.contour import Circle, Contour, FoldLine, Outline, Vertex
from fabgen.parts.records import FlatPattern, Part, WireBend, WirePath
from fabgen.sizing import records
from fabgen.sizing.records import Feed, PatternCut, Response

RECORD = "record.json"
WHITE = (1.0, 1.0, 1.0)


@dataclass(frozen=True)
class Pack:
    """What was read: the record as data, the feed and parts rebuilt from the files, and the folder."""

    folder: Path
    record: Mapping[str, Any]
    feed: Feed
    parts: tuple[Part, ...]

    def rows(self, name: str) -> list[dict[str, str]]:
        """Rows of a CSV file of the pack; none when the file is not there."""
        return rows_of(self.folder / name)


def read_pack(folder: Path | str) -> Pack:
    """Read a pack back. Raises JobError when the folder is no pack or its record is not whole."""
    root = Path(folder)
    path = root / RECORD
    if not path.is_file():
        raise JobError(f"{root} is not a pack: it has no {RECORD}; give the folder that 'fabgen pack' wrote")
    try:
        data = json.loads(path.read_text(encoding="utf-8"))
        feed = feed_of(data, root)
        parts = tuple(_part(item, data, root) for item in data["parts"])
    except (KeyError, TypeError, ValueError, AttributeError) as error:
        raise JobError(f"{path} is not a whole record ({type(error).__name__}: {error}); write the pack anew") from None
    return Pack(root, data, feed, parts)


def feed_of(data: Mapping[str, Any], folder: Path) -> Feed:
    """The feed of a record; pattern and reflection from their own files."""
    predicted = {**data["predicted"], "gain": data["predicted"]["gain_dbi"], "patterns": [], "response": None}
    predicted.pop("gain_dbi")
    frequencies, reflection = touchstone(folder / "predicted.s1p")
    response = Response(frequencies, reflection, ())
    whole = {key: data[key] for key in ("capacitor", "sensitivities", "yields", "modes", "self_checks", "settings")}
    feed = {
        name: _build(hint, {**whole, "sizes": data["sizes"], "remarks": data["remarks"]}[name])
        for name, hint in _hints(Feed).items()
        if name not in {"job", "predicted", "can_trials"}
    }
    numbers = {k: v for k, v in predicted.items() if k != "response"}
    values = {name: _build(hint, numbers[name]) for name, hint in _hints(records.Predicted).items() if name in numbers}
    values["patterns"] = patterns_of(folder / "pattern.csv")
    return Feed(
        job=Job.model_validate(data["job"]), predicted=records.Predicted(**values, response=response), **feed
    )


def _hints(record: type) -> dict[str, Any]:
    return typing.get_type_hints(record)


def _build(hint: Any, value: Any) -> Any:
    """A value of the type from plain JSON data: nested records, tuples, complex numbers as [re, im]."""
    origin = typing.get_origin(hint)
    if origin in {Union, types.UnionType}:
        if value is None:
            return None
        return _build(next(a for a in typing.get_args(hint) if a is not type(None)), value)
    if origin is tuple:
        return tuple(_build(typing.get_args(hint)[0], item) for item in value)
    if hint is complex:
        return complex(*value)
    if dataclasses.is_dataclass(hint) and isinstance(hint, type):
        hints = _hints(hint)
        return hint(**{name: _build(hints[name], item) for name, item in value.items()})
    return float(value) if hint is float and value is not None else value


def rows_of(path: Path) -> list[dict[str, str]]:
    """Rows of a CSV file by the names of its header; none when there is no such file."""
    if not path.is_file():
        return []
    return list(csv.DictReader(io.StringIO(path.read_text(encoding="utf-8"), newline="")))


def patterns_of(path: Path) -> tuple[PatternCut, ...]:
    """The cuts of pattern.csv."""
    cuts: dict[float, list[tuple[float, float, float]]] = {}
    for row in rows_of(path):
        point = float(row["theta_deg"]), float(row["co_dbi"]), float(row["cross_dbi"])
        cuts.setdefault(float(row["phi_deg"]), []).append(point)
    return tuple(PatternCut(phi, *zip(*points, strict=True)) for phi, points in cuts.items())


def touchstone(path: Path) -> tuple[tuple[float, ...], tuple[complex, ...]]:
    """Frequencies in MHz and reflection of a one-port Touchstone file in MHz and real/imaginary form."""
    if not path.is_file():
        return (), ()
    lines = [line.split("!")[0].strip() for line in path.read_text(encoding="utf-8").splitlines()]
    option = next((line for line in lines if line.startswith("#")), "")
    if option.split()[:6] != ["#", "MHZ", "S", "RI", "R", "50"]:
        raise ValueError(f"{path.name} has the option line '{option}', not '# MHZ S RI R 50'")
    points = [tuple(map(float, line.split())) for line in lines if line and not line.startswith("#")]
    return tuple(p[0] for p in points), tuple(complex(p[1], p[2]) for p in points)


def _part(item: Mapping[str, Any], data: Mapping[str, Any], folder: Path) -> Part:
    return Part(
        key=item["key"], name=item["name"], process=tuple(item["process"]), material=item["material"],
        material_name=item["material_name"], temper=item["temper"], colour=WHITE, quantity=item["quantity"],
        sizes=tuple(item["sizes"].items()), tolerance=item["tolerance"], finish=item["finish"],
        flat=_flat(item["key"], folder), wire=_wire(item["key"], folder), thickness_mm=item["thickness_mm"],
        mass_kg=item["mass_kg"], notes=tuple(item["notes"]),
    )  # fmt: skip


def dxf_of(key: str, folder: Path, ending: str = "") -> Path | None:
    """The part's DXF: ``ending`` "" for the main file, "fold" or "r12" for its siblings."""
    names = sorted((folder / "cut").glob(f"{key}_*.dxf")) if (folder / "cut").is_dir() else []
    kinds = {"fold", "r12"}
    for path in names:
        last = path.stem.rsplit("_", 1)[-1]
        if last == ending or (not ending and last not in kinds):
            return path
    return None


def outlines_of(path: Path) -> dict[str, list[Outline]]:
    """Outlines of a DXF by layer (lines on a fold layer are left out)."""
    import ezdxf

    found: dict[str, list[Outline]] = {}
    for entity in ezdxf.readfile(path).modelspace():
        kind, layer = entity.dxftype(), entity.dxf.layer
        if kind == "CIRCLE":
            x, y, _ = entity.dxf.center
            found.setdefault(layer, []).append(Circle(x, y, 2 * entity.dxf.radius))
        elif kind == "LWPOLYLINE":
            found.setdefault(layer, []).append(Contour(tuple(Vertex(*p) for p in entity.get_points("xyb"))))
        elif kind == "POLYLINE":
            ring = ((v.dxf.location.x, v.dxf.location.y, v.dxf.get("bulge", 0.0)) for v in entity.vertices)
            found.setdefault(layer, []).append(Contour(tuple(Vertex(*p) for p in ring)))
    return found


def _flat(key: str, folder: Path) -> FlatPattern | None:
    path = dxf_of(key, folder, "fold") or dxf_of(key, folder)
    if path is None:
        return None
    layers = outlines_of(path)
    rows = [row for row in rows_of(folder / "bend" / "bend_table.csv") if row["part"] == key]
    thickness = next(float(word[:-2]) for word in path.stem.split("_") if word.endswith("mm") and word[0].isdigit())
    (outline,) = layers["OUTLINE"]
    face = rows[0]["seen_from"] if rows else ""
    return FlatPattern(outline, tuple(layers.get("HOLES", ())), tuple(map(_fold, rows)), thickness, face)


def _fold(row: Mapping[str, str]) -> FoldLine:
    sign = 1.0 if row["direction"] == "up" else -1.0
    return FoldLine(
        number=int(row["fold"]), start=(float(row["x1_mm"]), float(row["y1_mm"])),
        end=(float(row["x2_mm"]), float(row["y2_mm"])), angle_deg=sign * float(row["angle_deg"]),
        inside_radius_mm=float(row["inside_radius_mm"]), k_factor=float(row["k_factor"]),
        allowance_mm=float(row["allowance_mm"]), deduction_mm=float(row["deduction_mm"]), order=int(row["order"]),
    )  # fmt: skip


def _wire(key: str, folder: Path) -> WirePath | None:
    rows = rows_of(folder / "bend" / f"{key}_wire_schedule.csv")
    if not rows:
        return None
    first = rows[0]
    bends = _bends(rows)
    return WirePath(float(first["wire_mm"]), float(first["cut_length_mm"]), bends, first["end_preparation"])


def _bends(rows: Sequence[Mapping[str, str]]) -> tuple[WireBend, ...]:
    """The bends along the wire; the turns of the file are from row to row, in order of work."""
    planes = accumulate(float(row["turn_before_deg"]) for row in rows)
    along = sorted(zip(rows, planes, strict=True), key=lambda pair: int(pair[0]["bend"]))
    before = (0.0, *(plane for _, plane in along))
    return tuple(_bend(row, plane - last) for (row, plane), last in zip(along, before, strict=False))


def _bend(row: Mapping[str, str], plane_deg: float) -> WireBend:
    return WireBend(
        number=int(row["bend"]), start_mm=float(row["mark_start_mm"]), end_mm=float(row["mark_end_mm"]),
        angle_deg=float(row["angle_deg"]), radius_mm=float(row["axis_radius_mm"]), mandrel_mm=float(row["mandrel_mm"]),
        plane_deg=plane_deg, order=int(row["order"]), name=row["name"],
    )  # fmt: skip


Box = tuple[tuple[float, float, float], tuple[float, float, float]]


def stl_box(path: Path) -> tuple[Box, float]:
    """Box (low, high corner) and enclosed volume in mm3 of a binary STL."""
    import numpy as np

    data = path.read_bytes()
    (count,) = struct.unpack_from("<I", data, 80)
    kind = np.dtype([("normal", "<f4", 3), ("corner", "<f4", (3, 3)), ("spare", "<u2")])
    corners = np.frombuffer(data, kind, count, 84)["corner"].astype(float)
    low, high = corners.reshape(-1, 3).min(axis=0), corners.reshape(-1, 3).max(axis=0)
    a, b, c = corners[:, 0], corners[:, 1], corners[:, 2]
    volume = float(np.sum(a * np.cross(b, c)) / 6)
    return ((low[0], low[1], low[2]), (high[0], high[1], high[2])), volume


def threemf_box(path: Path) -> tuple[Box, str]:
    """Box and unit of a 3MF file's first object."""
    import zipfile
    from xml.etree import ElementTree

    with zipfile.ZipFile(path) as archive:
        model = next(name for name in sorted(archive.namelist()) if name.endswith(".model"))
        root = ElementTree.fromstring(archive.read(model))
    space = root.tag[: root.tag.index("}") + 1]
    axes = [[float(v.get(axis, "")) for v in root.iter(f"{space}vertex")] for axis in "xyz"]
    low, high = [min(axis) for axis in axes], [max(axis) for axis in axes]
    return ((low[0], low[1], low[2]), (high[0], high[1], high[2])), root.get("unit", "millimeter")
