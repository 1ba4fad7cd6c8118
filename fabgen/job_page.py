"""The page that lists every key of the job file, made from the schema and one table of meanings.

Depends on: job, job_units, job_reader.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any, get_args

from pydantic import BaseModel

from fabgen.job import Job
from fabgen.job_reader import bounds_of
from fabgen.job_units import AS_WRITTEN, model_of

MEANINGS = {
    "target.frequency_mhz": "frequency that the feed is for",
    "target.name": "title on sheets and in the record",
    "target.revision": "one or two capital letters or digits; on sheets and in file names",
    "target.owner": "owner named in the title block",
    "dish.diameter_m": "diameter of the dish",
    "dish.focal_ratio": "focal length divided by diameter",
    "dish.elevation_deg": "elevation that the dish looks at; for the noise from the ground",
    "loop.form": "one bent wire, or one cut and folded sheet",
    "loop.wire_mm": "diameter of the wire (form wire)",
    "loop.sheet_mm": "thickness of the sheet (form sheet)",
    "loop.strip_width_mm": "width of the ring cut from sheet; found when left out",
    "loop.metal": "metal of the loop, a key of `fabgen stock metal`",
    "loop.temper": "temper; the metal's usual one when left out",
    "loop.bend_radius_mm": "inside bend radius of the bars; by metal and temper when left out",
    "can.make": "how the can is made",
    "can.metal": "metal of the can",
    "can.temper": "temper; the metal's usual one when left out",
    "can.wall_mm": "thickness of the wall",
    "can.floor_mm": "thickness of the floor",
    "can.flats": "number of flats (make folded)",
    "can.plastic": "plastic (make printed), a key of `fabgen stock plastic`",
    "can.lining": "conductive lining (make printed), a key of `fabgen stock lining`",
    "can.lining_sheet_resistance_ohm": "your own measured sheet resistance of the lining, per square",
    "can.choke": "choke ring round the rim: true, or a table [can.choke] with sizes",
    "can.choke.bore_mm": "inner diameter of the choke's wall; found when left out",
    "can.choke.depth_mm": "depth of the choke; found when left out",
    "can.choke.floor_z_mm": "upper face of the choke's floor above the can's floor; found when left out",
    "can.drain_holes": "drain holes at the floor's edge, and in a wall of sheet beside the floor on all four sides",
    "can.radome": "printed cap over the rim",
    "can.flange.pattern": "bolt pattern of the mounting flange",
    "can.flange.count": "number of bolts",
    "can.flange.screw": "screw, a key of `fabgen stock screw`",
    "can.flange.bolt_circle_mm": "diameter of the bolt circle; found when left out",
    "can.flange.thickness_mm": "thickness of the flange; that of the floor when left out",
    "cable.coax": "semi-rigid coax up the bar, a key of `fabgen stock coax`",
    "cable.connector": "panel connector in the floor, a key of `fabgen stock connector`",
    "limits.resolution_mm": "sizes are rounded to this",
    "limits.kerf_mm": "0: nominal contours and the shop compensates; else the contours move by half of it",
    "limits.bed_mm": "printer's bed: x, y, height",
    "limits.line_width_mm": "printer's line width; walls are a multiple of it",
    "limits.sheet_mm": "stock sheet, for the nesting estimate",
    "limits.die_opening_mm": "opening of the V-die; by thickness when left out",
    "limits.tolerance_class": "general tolerance after ISO 2768-1",
    "limits.bend_rule": "bend allowance: DIN 6935, handbook constants, or your own test bend",
    "limits.test_bend_k": "K of your test bend (neutral line at R + K t)",
    "limits.can_test_bend_k": "K of the can's sheet where it is another than the loop's",
    "limits.corner_radius_mm": "least radius of an inner corner",
    "limits.environment": "where the feed stands, for corrosion and weather",
    "limits.paper": "paper of the sheets",
    "limits.projection": "first-angle or third-angle projection",
    "wishes.return_loss_db": "return loss wanted at the target",
    "wishes.bandwidth_mhz": "bandwidth wanted at that return loss",
    "wishes.selectivity": "how sharply neighbouring bands are rejected",
    "wishes.neighbours": "neighbouring frequencies to report, each a table",
    "wishes.neighbours.frequency_mhz": "a neighbouring frequency",
    "wishes.neighbours.rejection_db": "rejection wanted there, relative to the target",
    "wishes.goal": "what the can is chosen for",
    "wishes.receiver_noise_k": "noise temperature of the receiver",
    "wishes.transmit_w": "power, if the feed is to transmit; 0: receive only",
    "fixed.can_bore_mm": "inner diameter of a can that you have",
    "fixed.can_depth_mm": "its depth, inner face of the floor to the rim",
    "fixed.loop_diameter_mm": "centreline diameter of a loop that you have",
    "fixed.loop_height_mm": "its height above the floor",
    "fixed.leg_pitch_mm": "bars, centre to centre",
    "fixed.tap_height_mm": "height of the crossing above the floor",
    "rates.currency": "currency of your rates",
    "rates.cut_per_m": "cost of a metre of cut",
    "rates.pierce": "cost of a pierce",
    "rates.bend": "cost of a bend",
    "rates.print_per_h": "cost of an hour of printing",
    "rates.material_per_kg": "cost of a kilogram of material",
    "overrides": "limits of the checks, by key of `fabgen stock limit`; each override is printed on the sheets",
}


def job_page() -> str:
    """The page as Markdown: one table per section, one row per key."""
    lines = [
        "# The job file",
        "",
        "TOML. Frequency, dish and loop stock are needed, all else has the default shown or is found. Unknown keys are",
        'refused with the nearest known one. A length or frequency may carry its own unit in quotes: `"12 AWG"`,',
        '`"16 SWG"`, `"16 gauge"` (sheet, by its metal), `"1/4 in"`, `"10 ft"`, `"1.42 GHz"`.',
        "This page is made from the program by `fabgen start --keys`.",
    ]
    section = None
    for path, field in _keys(Job):
        if path[:-1] != section:
            section = path[:-1]
            title = f"[{'.'.join(section)}]" if section else "At the top"
            lines += ["", f"## {title}", "", "| key | means | allowed | default |", "|---|---|---|---|"]
        name = ".".join(path)
        lines.append(f"| `{path[-1]}` | {MEANINGS[name]} | {_allowed(path, field)} | {_default(field)} |")
    return "\n".join(lines) + "\n"


def _keys(model: type[BaseModel], path: tuple[str, ...] = ()) -> Iterator[tuple[tuple[str, ...], Any]]:
    """Keys with a value of their own, section by section; nested sections follow the one they lie in."""
    inner: list[tuple[tuple[str, ...], type[BaseModel]]] = []
    for name, field in model.model_fields.items():
        if name == AS_WRITTEN:
            continue
        below = model_of(field.annotation)
        if below is None or below is not field.annotation:
            yield (*path, name), field
        if below is not None:
            inner.append(((*path, name), below))
    for place, below in inner:
        yield from _keys(below, place)


def _allowed(path: tuple[str, ...], field: Any) -> str:
    words = _words(field.annotation)
    bounds = bounds_of(path)
    return bounds or words or "text"


def _words(annotation: Any) -> str:
    if annotation is bool:
        return "true or false"
    values = [str(v) if not isinstance(v, str) else f'"{v}"' for v in get_args(annotation) if isinstance(v, str | int)]
    if values:
        return ", ".join(values)
    if "dict" in str(annotation):
        return "numbers by name"
    below = model_of(annotation)
    if below is not None:
        return "true, false or a table" if bool in get_args(annotation) else "a list of tables"
    return next(
        (word for word in map(_words, get_args(annotation)) if word), "a number" if "float" in str(annotation) else ""
    )


def _default(field: Any) -> str:
    if field.is_required():
        return "needed"
    value = field.default if field.default_factory is None else None
    if value is None or value == ():
        return ""
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, tuple):
        return "[" + ", ".join(f"{item:g}" for item in value) + "]"
    return f'"{value}"' if isinstance(value, str) else f"{value:g}"
