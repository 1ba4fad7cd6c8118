"""A written pack checked from its files alone: do record, tables, drawings, meshes and solids say the same?

The consistency checks of a feed run again on the feed and parts rebuilt from the files; the checks here compare
files with files. ``check_pack`` is what a user runs on a pack that came by mail.

Depends on: checks (registry, pack_register, read_files, read_solids, run, consistency, derived), errors, parts, stock.
"""

from __future__ import annotations

import hashlib
import math
from collections.abc import Iterator
from pathlib import Path

from fabgen import __version__
from fabgen.checks import derived, read_solids
from fabgen.checks.pack_register import PACK_CODES, SOLID_CODES, SOURCE, differs, pack_check
from fabgen.checks.read_files import (
    RECORD,
    Pack,
    dxf_of,
    outlines_of,
    read_pack,
    rows_of,
    stl_box,
    threemf_box,
    touchstone,
)
from fabgen.checks.records import Finding
from fabgen.checks.registry import Context, Fault, all_checks, findings_of
from fabgen.checks.run import MODULES, gathered
from fabgen.errors import FabgenError
from fabgen.folder import CHECKSUM_KEY, record_checksum
from fabgen.parts.build import build_parts
from fabgen.parts.contour import Outline, bounds_mm, length_mm
from fabgen.parts.records import FlatPattern, Part

LOADED = (*MODULES, derived, read_solids)
"""The modules whose import registers checks."""
BOX_MM = 0.05
"""Boxes and lengths of files that count as equal: rounding of tables and chord error of meshes."""


def check_pack(folder: Path | str, solids: bool = False) -> tuple[Finding, ...]:
    """What is wrong with a written pack; nothing for a pack as it was written. Accepted codes are left out.

    ``solids`` also reads every STEP file with the CAD kernel (seconds). Raises JobError when the folder is no
    pack or its record is not whole."""
    pack = read_pack(folder)
    return findings_of_pack(pack, solids)


def findings_of_pack(pack: Pack, solids: bool = False) -> tuple[Finding, ...]:
    """Like ``check_pack``, for a pack that was read already."""
    context = Context(pack.feed, pack.parts)
    accepted = set(pack.record["despite"])
    consistency = [
        entry for entry in all_checks() if entry.code.startswith("CONS-") and entry.code not in accepted and LOADED
    ]
    found = [finding for entry in consistency for finding in gathered(findings_of(entry, context))]
    for code, (_, function) in sorted(PACK_CODES.items()):
        if code in SOLID_CODES and not solids:
            continue
        faults = function(pack)
        found += [Finding(code, "stop", f.part, f.feature, f.value, f.limit, SOURCE, f.message, f.cure) for f in faults]
    return tuple(found)


@pack_check("CONS-201")
def files_are_whole(pack: Pack) -> Iterator[Fault]:
    """Every file is there, is listed, and has the SHA-256 that the record states."""
    listed: dict[str, str] = pack.record["files"]
    present = {
        path.relative_to(pack.folder).as_posix(): path
        for path in sorted(pack.folder.rglob("*"))
        if path.is_file() and path.name != RECORD
    }
    for name in sorted(set(listed) | set(present)):
        if name not in present:
            yield differs(name, "file", "missing", "in the record", f"{name} is in the record but not in the folder")
        elif name not in listed:
            yield differs(name, "file", "extra", "in the record", f"{name} is in the folder but not in the record")
        elif hashlib.sha256(present[name].read_bytes()).hexdigest() != listed[name]:
            yield differs(name, "file", "changed", listed[name][:12], f"{name} was changed after the pack was written")


@pack_check("CONS-211")
def record_is_whole(pack: Pack) -> Iterator[Fault]:
    """The record against the SHA-256 over all its other fields that it carries itself."""
    stated, found = str(pack.record.get(CHECKSUM_KEY, "none")), record_checksum(pack.record)
    if stated != found:
        yield differs(RECORD, CHECKSUM_KEY, stated[:12], found[:12], f"{RECORD} was changed after the pack was written")


@pack_check("CONS-202")
def parts_list(pack: Pack) -> Iterator[Fault]:
    """parts.csv against the parts of the record: quantity, material, mass, sizes."""
    rows = {row["part"]: row for row in pack.rows("parts.csv")}
    if not rows:
        return
    for part in pack.parts:
        row = rows.get(part.key)
        if row is None:
            yield differs(part.key, "parts.csv", "missing", "one row", f"{part.key} has no row in parts.csv")
            continue
        for feature, value, wanted in (
            ("quantity", row["quantity"], str(part.quantity)),
            ("material", row["material"], part.material),
            ("temper", row["temper"], part.temper),
        ):
            if value != wanted:
                yield differs(
                    part.key, feature, value, wanted, f"parts.csv has {feature} {value}, the record {wanted}"
                )
        listed = dict(text.rsplit(" ", 1) for text in row["sizes"].split("; ") if text)
        for name, size in part.sizes:
            # The table has six significant digits.
            if name not in listed or abs(float(listed[name]) - size) > 1e-5 * abs(size) + 1e-6:
                yield differs(part.key, name, listed.get(name, "missing"), f"{size:g}", f"{name} differs in parts.csv")
        if abs(float(row["mass_kg_each"]) - part.mass_kg) > 1e-4:
            yield differs(part.key, "mass", row["mass_kg_each"], f"{part.mass_kg:.4f}", "mass differs from the record")


@pack_check("CONS-203")
def drawings_agree(pack: Pack) -> Iterator[Fault]:
    """Main DXF, its R12 copy and its fold copy have the same outlines; millimetres; name and thickness fit."""
    kerf = pack.feed.job.limits.kerf_mm
    for part in pack.parts:
        main = dxf_of(part.key, pack.folder)
        if main is None:
            continue
        first = _measures(outlines_of(main))
        for ending in ("r12", "fold"):
            other = dxf_of(part.key, pack.folder, ending)
            if other is None or (ending == "fold" and kerf > 0):
                continue
            second = _measures(outlines_of(other))
            if len(first) != len(second) or any(abs(a - b) > 1e-4 for a, b in zip(first, second, strict=False)):
                yield differs(
                    other.name, "outlines", "other contours", main.name, f"{other.name} and {main.name} differ"
                )
        if part.thickness_mm is not None and f"_{part.thickness_mm:g}mm_" not in main.name:
            yield differs(
                main.name, "thickness", "other name", f"{part.thickness_mm:g} mm", "file name and record differ"
            )


def _measures(layers: dict[str, list[Outline]]) -> list[float]:
    """Length and box of every outline and hole, sorted: equal for equal drawings."""
    shapes = [shape for layer in ("OUTLINE", "HOLES") for shape in layers.get(layer, ())]
    return [value for shape in sorted(map(_measure, shapes)) for value in shape]


def _measure(shape: Outline) -> tuple[float, ...]:
    return tuple(round(value, 5) for value in (*bounds_mm(shape), length_mm(shape)))


@pack_check("CONS-204")
def orders_agree(pack: Pack) -> Iterator[Fault]:
    """Order notes against the drawings: box, cut length, pierces, material, temper, revision and files."""
    parts = {part.key: part for part in pack.parts}
    revision = pack.feed.job.target.revision
    folder = pack.folder / "order"
    notes = sorted(folder.glob("*.csv")) if folder.is_dir() else []
    for path in (note for note in notes if note.name != "sheets.csv"):  # the sheet estimate: stock, not parts
        for row in rows_of(path):
            yield from _order_row(pack, path.name, row, parts.get(row["part"]), revision)


def _order_row(pack: Pack, note: str, row: dict[str, str], part: Part | None, revision: str) -> Iterator[Fault]:
    key = row["part"]
    if part is None:
        yield differs(note, key, "unknown", "a part of the record", f"order/{note} has {key}, the record has not")
        return
    wanted = {
        "quantity": str(part.quantity), "material": part.material, "temper": part.temper, "revision": revision,
    }  # fmt: skip
    for feature, value in wanted.items():
        if row[feature] != value:
            yield differs(note, f"{feature} of {key}", row[feature], value, f"order/{note} and the record differ")
    for name in row["files"].split():
        if not (pack.folder / name).is_file():
            yield differs(
                note, f"file of {key}", name, "in the pack", f"order/{note} names {name}, which is not there"
            )
    if part.flat is not None and row["cut_length_mm"]:
        yield from _order_flat(note, row, part.flat)


def _order_flat(note: str, row: dict[str, str], flat: FlatPattern) -> Iterator[Fault]:
    x0, y0, x1, y1 = bounds_mm(flat.outline)
    total = length_mm(flat.outline) + math.fsum(map(length_mm, flat.holes))
    for feature, drawn in (("bbox_x_mm", x1 - x0), ("bbox_y_mm", y1 - y0), ("cut_length_mm", total)):
        if abs(float(row[feature]) - drawn) > BOX_MM:
            yield differs(
                note, f"{feature} of {row['part']}", row[feature], f"{drawn:.2f} mm", f"order/{note} and the DXF differ"
            )
    if row["pierces"] and int(row["pierces"]) != 1 + len(flat.holes):
        yield differs(note, f"pierces of {row['part']}", row["pierces"], str(1 + len(flat.holes)), "holes differ")


@pack_check("CONS-205")
def reflection_agrees(pack: Pack) -> Iterator[Fault]:
    """predicted.s1p at the target against the record's return loss, and its reflection never above one."""
    frequencies, reflection = touchstone(pack.folder / "predicted.s1p")
    if not frequencies:
        return
    target, stated = pack.feed.job.target.frequency_mhz, pack.feed.predicted.return_loss_db
    if max(map(abs, reflection)) > 1 + 1e-6:
        yield differs(
            "predicted.s1p", "reflection", f"{max(map(abs, reflection)):.4f}", "1", "an active feed cannot be"
        )
    if not frequencies[0] <= target <= frequencies[-1]:
        yield differs("predicted.s1p", "sweep", f"{frequencies[0]:g} to {frequencies[-1]:g} MHz", f"{target:g} MHz",
                       "the sweep leaves the target out")  # fmt: skip
        return
    near = min(range(len(frequencies)), key=lambda i: abs(frequencies[i] - target))
    if abs(frequencies[near] - target) < 1e-3 and abs(abs(reflection[near]) - 10 ** (-stated / 20)) > 0.03:
        loss = -20 * math.log10(max(abs(reflection[near]), 1e-4))
        yield differs("predicted.s1p", "return loss", f"{loss:.1f} dB", f"{stated:.1f} dB", "sweep and record differ")


@pack_check("CONS-206")
def meshes_agree(pack: Pack) -> Iterator[Fault]:
    """STL and 3MF of one part: the same box, millimetres, standing on the bed, inside the printer, solid."""
    bed = pack.feed.job.limits.bed_mm
    for path in sorted((pack.folder / "print").glob("*.stl")) if (pack.folder / "print").is_dir() else []:
        (low, high), volume = stl_box(path)
        size = [b - a for a, b in zip(low, high, strict=True)]
        if abs(low[2]) > BOX_MM:
            yield differs(path.name, "bed", f"z = {low[2]:.2f} mm", "z = 0", "the part does not stand on the bed")
        if size[2] > bed[2] or any(a > b for a, b in zip(sorted(size[:2]), sorted(bed[:2]), strict=True)):
            fits = f"{bed[0]:g} x {bed[1]:g} x {bed[2]:g} mm"
            yield differs(path.name, "size", " x ".join(f"{s:.1f}" for s in size), fits, "larger than the bed")
        if volume <= 0:
            yield differs(path.name, "volume", f"{volume:.0f} mm3", "above zero", "the mesh is inside out or open")
        other = path.with_suffix(".3mf")
        if other.is_file():
            (low3, high3), unit = threemf_box(other)
            same = all(abs(b - a - s) <= BOX_MM for a, b, s in zip(low3, high3, size, strict=True))
            if not same or unit != "millimeter":
                yield differs(other.name, "size", unit, path.name, f"{other.name} and {path.name} differ")


@pack_check("CONS-207")
def findings_agree(pack: Pack) -> Iterator[Fault]:
    """findings.csv against the record, and no stop that was not accepted with ``--despite``."""
    rows = pack.rows("findings.csv")
    recorded = [tuple(str(value) for value in item.values()) for item in pack.record["findings"]]
    listed = [tuple(value.removeprefix("'") for value in row.values()) for row in rows]
    if rows and sorted(listed) != sorted(tuple(v.removeprefix("'") for v in row) for row in recorded):
        yield differs(
            "findings.csv", "rows", f"{len(listed)}", f"{len(recorded)}", "findings.csv and the record differ"
        )
    accepted = set(pack.record["despite"])
    for item in pack.record["findings"]:
        if item["severity"] == "stop" and item["code"] not in accepted:
            yield differs(item["part"], item["code"], "stop", "accepted", "the pack was written in spite of a stop")


@pack_check("CONS-209")
def parts_made_anew(pack: Pack) -> Iterator[Fault]:
    """Parts of the record and their drawings against the parts made anew from the record's job and sizes.

    Left out for a pack of another version, whose rules may differ."""
    if pack.record["fabgen_version"] != __version__:
        return
    try:
        anew = {part.key: part for part in build_parts(pack.feed)}
    except FabgenError as error:
        yield differs("record.json", "sizes", "no part", "buildable", f"the record's sizes make no parts: {error}")
        return
    listed = {part.key: part for part in pack.parts}
    for key in sorted(set(anew) ^ set(listed)):
        have, want = ("listed", "not made") if key in listed else ("missing", "made")
        yield differs(key, "part", have, want, f"{key} is {have} in the record and {want} of its sizes")
    for key in sorted(set(anew) & set(listed)):
        yield from _part_anew(listed[key], anew[key], pack.feed.job.limits.kerf_mm)


def _part_anew(part: Part, anew: Part, kerf_mm: float) -> Iterator[Fault]:
    for feature in ("process", "quantity", "material", "material_name", "temper", "tolerance", "finish", "notes"):
        value, wanted = getattr(part, feature), getattr(anew, feature)
        if value != wanted:
            yield differs(part.key, feature, str(value), str(wanted), f"{feature} of {part.key} was changed")
    sizes, wanted_sizes = _numbers(part), _numbers(anew)
    for name in sorted(set(sizes) | set(wanted_sizes)):
        value, wanted = sizes.get(name, math.nan), wanted_sizes.get(name, math.nan)
        if not abs(value - wanted) <= 1e-5:
            message = f"{name} of {part.key} is {value:.3f} in the record, the sizes give {wanted:.3f}"
            yield differs(part.key, name, f"{value:.3f}", f"{wanted:.3f}", message)
    if abs(part.mass_kg - anew.mass_kg) > 1e-5 * anew.mass_kg + 1e-9:
        message = f"the record's mass of {part.key} is not that of its sizes"
        yield differs(part.key, "mass", f"{part.mass_kg:.6f} kg", f"{anew.mass_kg:.6f} kg", message)
    if part.flat is not None and anew.flat is not None and not kerf_mm:
        drawn, wanted_flat = (
            _measures({"OUTLINE": [flat.outline], "HOLES": list(flat.holes)}) for flat in (part.flat, anew.flat)
        )
        if len(drawn) != len(wanted_flat) or any(abs(a - b) > 1e-3 for a, b in zip(drawn, wanted_flat, strict=True)):
            message = f"the drawing of {part.key} is not that of the record's sizes"
            yield differs(part.key, "outlines", "other contours", "1 um", message)


def _numbers(part: Part) -> dict[str, float]:
    return {**dict(part.sizes), "thickness_mm": part.thickness_mm or 0.0}


@pack_check("CONS-210")
def record_and_job(pack: Pack) -> Iterator[Fault]:
    """Frequency, wavelength, flats, bars and fixed sizes of the record against its job."""
    job, s = pack.feed.job, pack.feed.sizes
    rows: list[tuple[str, float, float]] = [
        ("frequency_mhz", pack.record["frequency_mhz"], job.target.frequency_mhz),
        ("wavelength_mm", pack.record["wavelength_mm"], job.wavelength_mm),
        ("can_flats", s.can_flats, job.can.flats if job.can.make == "folded" else 0),
    ]
    if s.wire_mm is not None:
        rows.append(("leg_width_mm", s.leg_width_mm, s.wire_mm))
    for name, wanted in job.fixed.model_dump().items():
        if wanted is not None:
            rows.append((name, getattr(s, name), wanted))
    for name, value, wanted in rows:
        if not math.isclose(value, wanted, rel_tol=1e-8, abs_tol=1e-6):
            yield differs("record.json", name, f"{value:g}", f"{wanted:g}", f"{name} of the record is not the job's")
