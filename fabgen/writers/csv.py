"""The tables of a pack as comma-separated values: UTF-8, header row with units in the names, point as decimal mark.

Depends on: sizing.records, parts (records, bend_rule, bend_table), checks.records.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Sequence
from dataclasses import fields

from fabgen.checks.records import Finding
from fabgen.errors import GeometryError
from fabgen.parts.bend_rule import DEFINITION
from fabgen.parts.bend_table import fold_edges_mm
from fabgen.parts.records import Part
from fabgen.sizing.records import PatternCut

_FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")


def csv_text(header: Sequence[str], rows: Iterable[Sequence[object]]) -> str:
    """A table as text with line feeds; a text that a spreadsheet would take for a formula gets an apostrophe."""
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(header)
    for row in rows:
        writer.writerow([_cell(value) for value in row])
    return stream.getvalue()


def _cell(value: object) -> object:
    if isinstance(value, str) and value.startswith(_FORMULA_STARTS) and not _is_number(value):
        return "'" + value
    return "" if value is None else value


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


def parts_csv(parts: Sequence[Part]) -> str:
    """The bill of materials: one row a part, made or bought."""
    header = (
        "part", "name", "quantity", "process", "material", "material_name", "temper", "thickness_mm", "cut_length_mm",
        "mass_kg_each", "tolerance", "finish", "sizes", "notes",
    )  # fmt: skip
    return csv_text(
        header,
        (
            (
                part.key, part.name, part.quantity, "+".join(part.process), part.material, part.material_name,
                part.temper, _number(part.thickness_mm), _number(part.wire.cut_length_mm if part.wire else None),
                f"{part.mass_kg:.4f}", part.tolerance, part.finish,
                "; ".join(f"{name} {value:g}" for name, value in part.sizes), "; ".join(part.notes),
            )
            for part in parts
        ),
    )  # fmt: skip


def findings_csv(findings: Sequence[Finding]) -> str:
    """All findings, in the order given."""
    names = [field.name for field in fields(Finding)]
    return csv_text(names, ([getattr(finding, name) for name in names] for finding in findings))


def pattern_csv(cuts: Sequence[PatternCut]) -> str:
    """The expected pattern: directivity over the angle off the axis, one row per plane and angle."""
    header = ("plane", "phi_deg", "theta_deg", "co_dbi", "cross_dbi")
    planes = {90.0: "E", 0.0: "H"}
    return csv_text(
        header,
        (
            (planes.get(cut.phi_deg, "other"), f"{cut.phi_deg:g}", f"{theta:g}", f"{co:.3f}", f"{cross:.3f}")
            for cut in cuts
            for theta, co, cross in zip(cut.theta_deg, cut.co_dbi, cut.cross_dbi, strict=True)
        ),
    )


def _number(value: float | None) -> str:
    return "" if value is None else f"{value:.3f}".rstrip("0").rstrip(".")


def wire_schedule_csv(part: Part) -> str:
    """The marks of one bent wire along the straight piece, in the order of bending; a turn is from the row before."""
    if part.wire is None:
        raise GeometryError(f"{part.key} is not a wire; only wires have a schedule")
    header = (
        "order", "bend", "name", "mark_start_mm", "mark_end_mm", "angle_deg", "axis_radius_mm", "mandrel_mm",
        "turn_before_deg", "wire_mm", "cut_length_mm", "end_preparation", "neutral_inside_axis_mm",
    )  # fmt: skip
    wire = part.wire
    return csv_text(
        header,
        (
            (
                bend.order, bend.number, bend.name, _number(bend.start_mm), _number(bend.end_mm),
                _number(bend.angle_deg), _number(bend.radius_mm), _number(bend.mandrel_mm), _number(turn_deg),
                _number(wire.diameter_mm), _number(wire.cut_length_mm), wire.end_preparation,
                _number(bend.neutral_shift_mm),
            )
            for bend, turn_deg in wire.work()
        ),
    )  # fmt: skip


def bend_table_csv(parts: Sequence[Part]) -> str:
    """Every fold of every flat part, in the order of bending; K as the share of the thickness at the neutral line.

    ``left_edge_mm``, ``right_edge_mm``: from the fold line's middle, square to it, to the sheet's first edge as
    seen along the line from its first to its second end.
    """
    header = (
        "part", "order", "fold", "angle_deg", "direction", "seen_from", "inside_radius_mm", "k_factor", "allowance_mm",
        "deduction_mm", "thickness_mm", "x1_mm", "y1_mm", "x2_mm", "y2_mm", "left_edge_mm", "right_edge_mm",
        "k_definition",
    )  # fmt: skip
    return csv_text(
        header,
        (
            (
                part.key, fold.order, fold.number, _number(abs(fold.angle_deg)), "up" if fold.angle_deg > 0 else "down",
                part.flat.face, _number(fold.inside_radius_mm), f"{fold.k_factor:.4f}", _number(fold.allowance_mm),
                _number(fold.deduction_mm), _number(part.flat.thickness_mm), *map(_number, (*fold.start, *fold.end)),
                *map(_number, fold_edges_mm(part.flat, fold)), DEFINITION,
            )
            for part in parts
            if part.flat is not None
            for fold in sorted(part.flat.folds, key=lambda fold: fold.order)
        ),
    )  # fmt: skip
