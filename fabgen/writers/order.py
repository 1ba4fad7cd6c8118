"""Order notes: what a shop has to know to make the parts, one note per process as text and as CSV.

Every note stands alone: material by standard designation, temper, thickness, quantity, tolerance, finish, size of
the blank, cut length, pierces, bends, mass, revision and the files that belong to it. Costs come from the user's own
rates only; without rates no cost is stated.

Depends on: stock, parts, sizing.records, writers (csv, dxf).
"""

from __future__ import annotations

import math
import textwrap
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass

from fabgen.parts.contour import bounds_mm, length_mm
from fabgen.parts.records import FlatPattern, Part
from fabgen.sizing.records import Feed
from fabgen.stock import tables
from fabgen.writers.csv import csv_text

WIDTH = 96
PROCESSES: Mapping[str, tuple[str, str]] = {
    "laser": ("laser cutting", "One DXF per part, 1:1 in millimetres. Cut the layers OUTLINE and HOLES."),
    "fold": ("folding", "Fold lines are the middle of the bend zone; angles, order, K and deductions stand in "
             "bend/bend_table.csv. Flat lengths are laid out with the K stated there: tell us if your tools need "
             "another, or bend the test strip first."),
    "roll": ("rolling", "Roll to the bore stated. The side named with each part is the face seen on its page: outside "
             "lies away from the axis once rolled. Blanks are laid out on the neutral line."),
    "turn": ("turning", "STEP is the model; sizes without tolerance after the class stated."),
    "drill": ("drilling", "Hole positions stand on the part's page and on the true-scale template."),
    "wire": ("wire bending", "Marks, mandrels, angles and order stand in the wire schedule in bend/."),
    "print": ("3D printing", "STL and 3MF are in print position, millimetres. No support, no scaling."),
    "plate": ("plating", "Plate the inside from floor to rim; mask nothing inside. Threads and outside may be bare."),
    "foil": ("foil", "Cut with a knife over the true-scale page; joints overlap and are soldered."),
    "buy": ("bought parts", "Shopping list; the part in hand decides, measure it before drilling."),
}  # fmt: skip
HEADER = (
    "part", "name", "revision", "quantity", "material", "designation", "temper", "thickness_mm", "tolerance", "finish",
    "deburr", "bbox_x_mm", "bbox_y_mm", "bbox_z_mm", "cut_length_mm", "pierces", "bends", "mass_kg_each", "contours",
    "files", "cost", "currency",
)  # fmt: skip


@dataclass(frozen=True)
class OrderLine:
    """One part as a shop sees it. Cost is for all pieces, None without rates."""

    part: Part
    box_mm: tuple[float | None, float | None, float | None]
    cut_length_mm: float | None
    pierces: int | None
    bends: int
    files: tuple[str, ...]
    cost: float | None


def order_notes(feed: Feed, parts: Sequence[Part], files: Collection[str] | None = None) -> dict[str, str]:
    """File name -> text of every order note, ``laser.txt`` and ``laser.csv`` and so on.

    ``files``: paths of the pack that exist, so that a note names no other; None names all that a whole pack has."""
    notes: dict[str, str] = {}
    for process in PROCESSES:
        chosen = [part for part in parts if process in _processes(part, feed)]
        if chosen:
            lines = [_line(part, process, feed, files) for part in chosen]
            notes[f"{process}.txt"] = _note(process, lines, feed)
            notes[f"{process}.csv"] = _table(lines, feed)
    return notes


def _processes(part: Part, feed: Feed) -> tuple[str, ...]:
    plated = "print" in part.process and tables.lining(feed.job.can.lining).kind == "plating"
    inside = plated and feed.job.can.make == "printed" and part.key.startswith(("can", "choke"))
    return (*part.process, "plate") if inside else part.process


def _line(part: Part, process: str, feed: Feed, files: Collection[str] | None) -> OrderLine:
    flat = part.flat
    cut = pierces = None
    if flat is not None:
        cut = length_mm(flat.outline) + math.fsum(length_mm(hole) for hole in flat.holes)
        pierces = 1 + len(flat.holes)
    elif part.wire is not None:
        cut = part.wire.piece_length_mm
    bends = len(flat.folds) if flat is not None else len(part.wire.bends) if part.wire is not None else 0
    named = tuple(name for name in _files(part, process, feed) if files is None or name in files)
    box = _box(part, process)
    return OrderLine(part, box, cut, pierces, bends, named, _cost(part, process, feed, cut, box))


def _box(part: Part, process: str) -> tuple[float | None, float | None, float | None]:
    """Box of the blank: flat pattern and thickness, printed or turned body; nothing for bought parts."""
    if part.flat is not None:
        x0, y0, x1, y1 = bounds_mm(part.flat.outline)
        return x1 - x0, y1 - y0, part.flat.thickness_mm
    if part.wire is not None:
        return part.wire.piece_length_mm, part.wire.diameter_mm, part.wire.diameter_mm
    body = part.print_solid if process in {"print", "plate"} else part.solid if process == "turn" else None
    if body is None:
        return None, None, None
    box = body().BoundingBox()
    return box.xlen, box.ylen, box.zlen


def _files(part: Part, process: str, feed: Feed) -> tuple[str, ...]:
    names: list[str] = []
    if part.flat is not None and process in {"laser", "fold", "roll", "foil", "drill"}:
        from fabgen.writers.dxf import file_name

        revision = feed.job.target.revision
        kinds = ("fold",) if process == "fold" else ("", "r12") if process == "laser" else ("",)
        names += [f"cut/{file_name(part, revision, kind) if kind else file_name(part, revision)}" for kind in kinds]
        names += ["bend/bend_table.csv"] if process == "fold" and part.flat.folds else []
    if part.wire is not None and process == "wire":
        names.append(f"bend/{part.key}_wire_schedule.csv")
    if process == "print":
        names += [f"print/{part.key}.stl", f"print/{part.key}.3mf"]
    if part.solid is not None and process not in {"buy", "laser", "foil"}:
        names.append(f"model/{part.key}.step")
    if process != "buy":
        names.append("sheets.pdf")
    return tuple(names)


def _cost(
    part: Part, process: str, feed: Feed, cut_mm: float | None, box: tuple[float | None, float | None, float | None]
) -> float | None:
    """Cost of all pieces in this process from the user's rates; None where no rate of the process is given."""
    rates, quantity = feed.job.rates, part.quantity
    sums: list[float] = []
    if process == "laser" and part.flat is not None:
        sums += [rates.cut_per_m * (cut_mm or 0.0) / 1e3] if rates.cut_per_m is not None else []
        sums += [rates.pierce * (1 + len(part.flat.holes))] if rates.pierce is not None else []
        if rates.material_per_kg is not None and box[0] is not None and box[1] is not None:
            blank = box[0] * box[1] * part.flat.thickness_mm * 1e-9 * tables.metal(part.material).density_kg_per_m3
            sums.append(rates.material_per_kg * blank)
    if process == "fold" and part.flat is not None and rates.bend is not None:
        sums.append(rates.bend * len(part.flat.folds))
    if process == "wire" and part.wire is not None:
        sums += [rates.bend * len(part.wire.bends)] if rates.bend is not None else []
        sums += [rates.material_per_kg * part.mass_kg] if rates.material_per_kg is not None else []
    if process == "print" and rates.print_per_h is not None:
        sums.append(rates.print_per_h * print_hours(part, feed))
    return quantity * math.fsum(sums) if sums else None


def print_hours(part: Part, feed: Feed) -> float:
    """Printing time from the plastic's volume at the table's rate (``print_rate_cm3_per_h``), hours."""
    density = tables.plastic(part.material).density_kg_per_m3
    volume_cm3 = part.mass_kg / density * 1e6
    return volume_cm3 / tables.limit("print_rate_cm3_per_h", feed.job.overrides).value


def _contours(feed: Feed, flat: FlatPattern | None) -> str:
    if flat is None:
        return ""
    kerf = feed.job.limits.kerf_mm
    return "nominal, no kerf" if kerf == 0 else f"moved by half a kerf of {kerf:g} mm into the waste"


def _tolerance(part: Part, process: str) -> str:
    return f"cut edges ISO 9013 class 1, {part.tolerance}" if process == "laser" else part.tolerance


def _deburr(part: Part, process: str) -> str:
    if part.flat is None:
        return ""
    return f"both sides; named side: {part.flat.face}" if process != "foil" else "none"


def _note(process: str, lines: Sequence[OrderLine], feed: Feed) -> str:
    title, rule = PROCESSES[process]
    target = feed.job.target
    head = [
        f"ORDER NOTE: {title}",
        f"{target.name}, revision {target.revision}" + (f", {target.owner}" if target.owner else ""),
        "",
        *textwrap.wrap(rule, WIDTH),
        "",
    ]
    body = [text for line in lines for text in (*_block(line, process, feed), "")]
    mass = math.fsum(line.part.mass_kg * line.part.quantity for line in lines)
    count = sum(line.part.quantity for line in lines)
    foot = [f"Total: {count} piece{'s' * (count != 1)} of {len(lines)} part{'s' * (len(lines) != 1)}, {mass:.3f} kg"]
    costs = [line.cost for line in lines if line.cost is not None]
    if costs:
        foot.append(f"Estimate from your own rates: {math.fsum(costs):.2f} {feed.job.rates.currency}")
    return "\n".join([*head, *body, *foot]) + "\n"


def _block(line: OrderLine, process: str, feed: Feed) -> list[str]:
    part = line.part
    rows = [
        ("quantity", f"{part.quantity}"),
        ("material", part.material_name + (f", temper {part.temper}" if part.temper else "")),
        ("thickness", _mm(part.thickness_mm or (part.flat.thickness_mm if part.flat else None))),
        ("size", _box_text(line.box_mm) or _named_sizes(part)),
        ("tolerance", _tolerance(part, process)),
        ("finish", part.finish),
        ("deburr", _deburr(part, process)),
        ("contours", _contours(feed, part.flat) if process in {"laser", "foil"} else ""),
        ("cut length", f"{line.cut_length_mm:.0f} mm" if line.cut_length_mm is not None else ""),
        ("pierces", f"{line.pierces}" if line.pierces is not None and process == "laser" else ""),
        ("bends", f"{line.bends}" if line.bends and process in {"fold", "wire"} else ""),
        ("time", f"about {print_hours(part, feed):.1f} h a piece" if process == "print" else ""),
        ("mass", _mass(part.mass_kg)),
        ("notes", "; ".join(part.notes)),
        ("files", ", ".join(line.files)),
        ("estimate", f"{line.cost:.2f} {feed.job.rates.currency}" if line.cost is not None else ""),
    ]
    block = [f"{part.key}: {part.name}"]
    for name, text in rows:
        if text:
            block += textwrap.wrap(
                f"  {name + ':':<12}{text}", WIDTH, subsequent_indent=" " * 14, break_on_hyphens=False,
                break_long_words=False,
            )  # fmt: skip
    return block


def _mass(mass_kg: float) -> str:
    return f"{mass_kg:.3f} kg each" if mass_kg >= 0.1 else f"{1e3 * mass_kg:.1f} g each"


def _named_sizes(part: Part) -> str:
    """Sizes of a part without a drawing of its own, by name: ``length 8 mm``."""
    return ", ".join(f"{name.removesuffix('_mm').replace('_', ' ')} {value:g} mm" for name, value in part.sizes)


def _mm(value: float | None) -> str:
    return "" if value is None else f"{value:g} mm"


def _box_text(box: tuple[float | None, float | None, float | None]) -> str:
    if None in box:
        return ""
    return " x ".join(f"{value:.1f}" for value in box if value is not None) + " mm"


def _table(lines: Sequence[OrderLine], feed: Feed) -> str:
    rows = []
    for line in lines:
        part = line.part
        process = next((p for p in part.process if p in PROCESSES), "")
        rows.append(
            (
                part.key, part.name, feed.job.target.revision, part.quantity, part.material, part.material_name,
                part.temper, _number(part.thickness_mm), _tolerance(part, process), part.finish,
                _deburr(part, process), *(_number(value) for value in line.box_mm), _number(line.cut_length_mm),
                line.pierces, line.bends, f"{part.mass_kg:.4f}", _contours(feed, part.flat), " ".join(line.files),
                "" if line.cost is None else f"{line.cost:.2f}",
                "" if line.cost is None else feed.job.rates.currency,
            )
        )  # fmt: skip
    return csv_text(HEADER, rows)


def _number(value: float | None) -> str:
    return "" if value is None else f"{value:.2f}".rstrip("0").rstrip(".")
