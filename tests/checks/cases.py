"""For every code one case that raises it and one that does not. Feeds are the shared samples with one thing changed."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cache
from typing import Any

from fabgen.job import Job
from fabgen.parts.build import build_parts
from fabgen.parts.contour import Circle, Contour, FoldLine, polygon
from fabgen.parts.records import FlatPattern, Part, WireBend, WirePath
from fabgen.sizing.records import Feed, Mode, Sensitivity
from tests.samples import sample_feed

Case = tuple[Feed, tuple[Part, ...]]


def with_job(feed: Feed, **tables: dict[str, Any]) -> Feed:
    """The feed with keys of its job changed: ``with_job(feed, can={"lining": "nickel-paint"})``."""
    data = feed.job.model_dump()
    for table, keys in tables.items():
        data[table].update(keys)
    return replace(feed, job=Job.model_validate(data))


def with_sizes(feed: Feed, **sizes: Any) -> Feed:
    return replace(feed, sizes=replace(feed.sizes, **sizes))


def with_seam_current(feed: Feed, share: float) -> Feed:
    """The same share of the largest current across a seam wherever it lies."""
    (seam,) = feed.predicted.wall_current.seams
    even = replace(seam, crossing_a_per_m=tuple(share * seam.peak_a_per_m for _ in seam.angle_deg))
    return with_predicted(feed, wall_current=replace(feed.predicted.wall_current, seams=(even,)))


def with_predicted(feed: Feed, **values: Any) -> Feed:
    return replace(feed, predicted=replace(feed.predicted, **values))


@cache
def base(form: str = "wire", make: str = "tube", frequency_mhz: float = 1420.406, choke: bool = False) -> Feed:
    return sample_feed(form, make, frequency_mhz, choke)


@cache
def parts_of(form: str = "wire", make: str = "tube", choke: bool = False) -> tuple[Part, ...]:
    return tuple(build_parts(base(form, make, choke=choke)))


def built(feed: Feed) -> Case:
    return feed, tuple(build_parts(feed))


def alone(feed: Feed, *parts: Part) -> Case:
    return feed, parts


def part_of(key: str, form: str = "wire", make: str = "tube") -> Part:
    return next(part for part in parts_of(form, make) if part.key == key)


def sheet_part(
    flat: FlatPattern, material: str = "en-aw-5754", temper: str = "H22", key: str = "bracket", mass_kg: float = 0.1
) -> Part:
    """A folded bracket for the sheet checks."""
    return Part(
        key=key, name=key, process=("laser", "fold"), material=material, material_name=material, temper=temper,
        colour=(0.5, 0.5, 0.5), quantity=1, sizes=(), tolerance="ISO 2768-m", finish="", flat=flat,
        thickness_mm=flat.thickness_mm, mass_kg=mass_kg,
    )  # fmt: skip


def rectangle(x0: float, y0: float, x1: float, y1: float) -> Contour:
    return polygon([(x0, y0), (x1, y0), (x1, y1), (x0, y1)])


def fold(x: float = 30.0, radius: float = 1.5, angle: float = 90.0, number: int = 1, width: float = 20.0) -> FoldLine:
    return FoldLine(number, (x, 0.0), (x, width), angle, radius, 0.325, 3.12, 1.88, number)


def bracket(
    thickness: float = 1.5,
    holes: tuple[Circle | Contour, ...] = (),
    folds: tuple[FoldLine, ...] | None = None,
    outline: Contour | None = None,
) -> FlatPattern:
    """60 x 20 mm with a fold in the middle unless told otherwise."""
    return FlatPattern(outline or rectangle(0, 0, 60, 20), holes, (fold(),) if folds is None else folds, thickness)


def wire_part(
    bends: tuple[WireBend, ...], cut_length_mm: float, diameter_mm: float = 4.0, temper: str = "R220"
) -> Part:
    return replace(
        part_of("loop"),
        material="cu-etp",
        temper=temper,
        wire=WirePath(diameter_mm, cut_length_mm, bends, "cut square"),
    )


def wire_bend(number: int, start: float, end: float, radius: float = 8.0, plane: float = 0.0) -> WireBend:
    return WireBend(number, start, end, 90.0, radius, 2 * radius - 4, plane, number, f"bend {number}")


@dataclass(frozen=True)
class Pair:
    """Positive and negative case of a code, with a word that the positive message must hold and its severity."""

    positive: Callable[[], Case]
    negative: Callable[[], Case]
    severity: str
    word: str


WIRE, SHEET = "wire", "sheet"
COMB = polygon([(0, 0), (60, 0), (60, 20), (31, 20), (31, 10), (30.5, 10), (30.5, 20), (0, 20)])
NECKED = polygon(
    [
        (0, 0),
        (25, 0),
        (25, 9.5),
        (35, 9.5),
        (35, 0),
        (60, 0),
        (60, 20),
        (35, 20),
        (35, 10.5),
        (25, 10.5),
        (25, 20),
        (0, 20),
    ]
)
TAB = polygon([(0, -10), (30, -10), (30, 0), (50, 0), (50, 20), (30, 20), (30, 30), (0, 30)])
RELIEVED = polygon(
    [
        (0, -10),
        (30, -10),
        (30, -2),
        (27, -2),
        (27, 0),
        (50, 0),
        (50, 20),
        (27, 20),
        (27, 22),
        (30, 22),
        (30, 30),
        (0, 30),
    ]
)


def thick_sheet(thickness: float) -> Case:
    return alone(base(), sheet_part(bracket(thickness, folds=(fold(radius=20.0),)), "cuzn37", "R350"))


def yields(**values: float) -> Callable[[], Case]:
    return lambda: (replace(base(), yields=replace(base().yields, **values)), parts_of())


def overridden(key: str, value: float, feed: Feed | None = None, parts: tuple[Part, ...] | None = None) -> Case:
    return with_job(feed or base(), overrides={key: value}), parts_of() if parts is None else parts


def printed(**can: Any) -> Feed:
    return with_job(base(WIRE, "printed"), can=can)


def transmit(watts: float, frequency_mhz: float = 1296.0) -> Feed:
    return with_job(base(WIRE, "tube", frequency_mhz), wishes={"transmit_w": watts})


def with_voltage(watts: float, volts: float) -> Feed:
    feed = transmit(watts)
    return replace(feed, capacitor=replace(feed.capacitor, peak_voltage_v=volts))


def with_capacitor_row(reach_mhz_per_pf: float, tap_mhz_per_mm: float = 0.5) -> Case:
    row = Sensitivity("series_capacitor_pf", 0.02, -reach_mhz_per_pf, -1.0, 0.02 * reach_mhz_per_pf)
    others = (
        replace(r, resonance_mhz_per_mm=tap_mhz_per_mm) if r.size == "tap_height_mm" else r
        for r in base().sensitivities
    )
    return replace(base(), sensitivities=(*others, row)), parts_of()


def changed_part(key: str, form: str = WIRE, make: str = "tube", **changes: Any) -> Case:
    feed = base(form, make)
    return feed, tuple(replace(p, **changes) if p.key == key else p for p in parts_of(form, make))


def changed_flat(form: str = SHEET, **changes: Any) -> Case:
    part = part_of("loop", form)
    assert part.flat is not None
    return changed_part("loop", form, flat=replace(part.flat, **changes))


def changed_wire(**changes: Any) -> Case:
    part = part_of("loop")
    assert part.wire is not None
    return changed_part("loop", wire=replace(part.wire, **changes))


def good(form: str = WIRE, make: str = "tube") -> Callable[[], Case]:
    return lambda: (base(form, make), parts_of(form, make))


def _inwards(at: tuple[float, float]) -> tuple[float, float]:
    """A bar's fold moved over the gap onto the other bar's."""
    return at[0], at[1] - 10.0 if at[1] > 0 else at[1]


def with_folds(move: Callable[[FoldLine], FoldLine]) -> Case:
    part = part_of("loop", SHEET)
    assert part.flat is not None
    return changed_flat(folds=tuple(move(f) for f in part.flat.folds))


def strip(length_mm: float) -> Part:
    return replace(sheet_part(FlatPattern(rectangle(0, 0, length_mm, 60), thickness_mm=1.0), key="wall"), temper="H111")


def tabs(count: float, length_mm: float = 700.0) -> Part:
    return replace(strip(length_mm), sizes=(("flat_length_mm", length_mm), ("tab_count", count)))


PAIRS: dict[str, Pair] = {
    "ELEC-101": Pair(
        lambda: (
            with_job(printed(lining="copper-plating"), target={"frequency_mhz": 300.0}),
            parts_of(WIRE, "printed"),
        ),
        good(WIRE, "printed"),
        "caution",
        "skin depths",
    ),
    "ELEC-102": Pair(lambda: (with_job(base(), can={"metal": "tinplate"}), parts_of()), good(), "caution", "steel"),
    "ELEC-103": Pair(lambda: (with_predicted(base(), feed_noise_k=9.0), parts_of()), good(), "caution", "9.0 K"),
    "ELEC-104": Pair(lambda: (with_predicted(base(), ohmic_loss_db=0.4), parts_of()), good(), "caution", "0.40 dB"),
    "ELEC-105": Pair(
        lambda: (printed(lining="copper-plating"), parts_of(WIRE, "printed")), good(WIRE, "printed"), "note", "rough"
    ),
    "ELEC-106": Pair(
        lambda: (printed(lining="nickel-paint"), parts_of(WIRE, "printed")),
        lambda: (printed(lining="nickel-paint", lining_sheet_resistance_ohm=0.5), parts_of(WIRE, "printed")),
        "note",
        "sheet resistance",
    ),
    "ELEC-201": Pair(lambda: (with_sizes(base(), can_bore_mm=120.0), parts_of()), good(), "caution", "below cut-off"),
    "ELEC-202": Pair(
        lambda: (replace(base(), modes=(Mode("TE21", 1300.0, True, True, "broken symmetry"),)), parts_of()),
        lambda: (replace(base(), modes=base().modes[:2]), parts_of()),
        "note",
        "TE21",
    ),
    "ELEC-301": Pair(lambda: overridden("slot_max_wavelengths", 0.01), good(), "caution", "open holes"),
    "ELEC-302": Pair(lambda: (with_sizes(base(), leg_pitch_mm=40.0), parts_of()), good(), "caution", "apart"),
    "ELEC-303": Pair(lambda: alone(base(), tabs(20)), lambda: alone(base(), tabs(34)), "caution", "pitch"),
    "ELEC-304": Pair(
        lambda: (with_seam_current(sample_feed(WIRE, "folded", flats=8), 0.5), ()),
        lambda: (with_seam_current(sample_feed(WIRE, "folded", flats=8), 0.19), ()),
        "caution",
        "50% of the largest wall current",
    ),
    "ELEC-305": Pair(
        good(WIRE, "rolled"),
        lambda: (with_job(base(WIRE, "rolled"), can={"metal": "cuzn37"}), parts_of(WIRE, "rolled")),
        "note",
        "cross this joint",
    ),
    "ELEC-401": Pair(
        lambda: (with_voltage(100.0, 2000.0), ()), lambda: (with_voltage(100.0, 100.0), ()), "stop", "arcs"
    ),
    "ELEC-402": Pair(
        lambda: (with_sizes(transmit(1500.0), leg_pitch_mm=4.5), ()), lambda: (transmit(50.0), ()), "stop", "between"
    ),
    "ELEC-403": Pair(lambda: (transmit(50.0), ()), good(), "caution", "people"),
    "ELEC-404": Pair(lambda: (transmit(1.0, 1420.0), ()), lambda: (transmit(1.0, 1296.0), ()), "stop", "prohibited"),
    "ELEC-405": Pair(good(), lambda: (base(WIRE, "tube", 1296.0), ()), "note", "1400 to 1427"),
    "ELEC-406": Pair(
        lambda: (transmit(10.0), ()), lambda: (transmit(1.0, 2450.0), ()), "note", "needs a licence"
    ),
    "ELEC-501": Pair(
        good(), lambda: (with_job(base(), limits={"environment": "indoor"}), parts_of()), "note", "floating"
    ),
    "ELEC-601": Pair(lambda: (with_predicted(base(), return_loss_db=15.0), parts_of()), good(), "caution", "15.0 dB"),
    "ELEC-602": Pair(
        lambda: (with_job(base(), wishes={"bandwidth_mhz": 60.0}), parts_of()),
        lambda: (with_job(base(), wishes={"bandwidth_mhz": 30.0}), parts_of()),
        "caution",
        "42.0 MHz",
    ),
    "ELEC-603": Pair(
        lambda: (with_job(base(), wishes={"neighbours": [{"frequency_mhz": 900.0, "rejection_db": 40.0}]}), ()),
        lambda: (with_job(base(), wishes={"neighbours": [{"frequency_mhz": 900.0, "rejection_db": 20.0}]}), ()),
        "caution",
        "29.0 dB",
    ),
    "ELEC-604": Pair(
        lambda: (replace(base(), settings=replace(base().settings, resonance_uncertainty_mhz=30.0)), ()),
        good(),
        "caution",
        "30.0 MHz",
    ),
    "ELEC-605": Pair(
        lambda: (replace(base(), settings=replace(base().settings, return_loss_uncertainty_db=15.0)), ()),
        good(),
        "caution",
        "17.0 dB only",
    ),
    "SHEET-101": Pair(
        lambda: alone(base(), sheet_part(bracket(folds=(fold(radius=0.8),)))),
        lambda: alone(base(), sheet_part(bracket())),
        "stop",
        "needs 1.5 mm",
    ),
    "SHEET-102": Pair(
        lambda: alone(base(), sheet_part(bracket())),
        lambda: alone(base(), sheet_part(bracket(folds=(fold(radius=2.5),)))),
        "note",
        "rolling",
    ),
    "SHEET-103": Pair(
        lambda: alone(base(), sheet_part(bracket(folds=(fold(radius=1.0),)), temper="H111")),
        lambda: alone(base(), sheet_part(bracket(), temper="H111")),
        "note",
        "under 1 thickness",
    ),
    "SHEET-104": Pair(lambda: thick_sheet(8.0), lambda: thick_sheet(6.0), "caution", "ends at 6 mm"),
    "SHEET-105": Pair(
        lambda: alone(base(), sheet_part(bracket(folds=(fold(angle=135.0),)))),
        lambda: alone(base(), sheet_part(bracket(folds=(fold(angle=-120.0),)))),
        "caution",
        "135 degrees",
    ),
    "SHEET-106": Pair(
        lambda: alone(base(), sheet_part(bracket(folds=(fold(20.0), fold(40.0, 2.0, number=2))))),
        lambda: alone(base(), sheet_part(bracket(folds=(fold(20.0), fold(40.0, number=2))))),
        "note",
        "2 inside radii",
    ),
    "SHEET-201": Pair(
        lambda: alone(base(), sheet_part(bracket(folds=(fold(55.5),)))),
        lambda: alone(base(), sheet_part(bracket(folds=(fold(54.0),)))),
        "caution",
        "short leg",
    ),
    "SHEET-202": Pair(
        lambda: alone(with_job(base(), limits={"die_opening_mm": 20.0}), sheet_part(bracket())),
        lambda: alone(with_job(base(), limits={"die_opening_mm": 10.0}), sheet_part(bracket())),
        "note",
        "makes about 3 mm",
    ),
    "SHEET-203": Pair(
        lambda: alone(base(), sheet_part(bracket(folds=(fold(30.0, angle=40.0), fold(33.0, angle=-40.0, number=2))))),
        lambda: alone(base(), sheet_part(bracket(folds=(fold(30.0, angle=40.0), fold(38.0, angle=-40.0, number=2))))),
        "note",
        "step",
    ),
    "SHEET-301": Pair(
        lambda: alone(base(), sheet_part(bracket(holes=(Circle(24, 10, 4),)))),
        lambda: alone(base(), sheet_part(bracket(holes=(Circle(23.4, 10, 4),)))),
        "caution",
        "oval",
    ),
    "SHEET-302": Pair(
        lambda: alone(base(), sheet_part(bracket(holes=(Circle(10, 4, 4),)))),
        lambda: alone(base(), sheet_part(bracket(holes=(Circle(10, 4.3, 4),)))),
        "caution",
        "to the edge",
    ),
    "SHEET-303": Pair(
        lambda: alone(base(), sheet_part(bracket(holes=(Circle(10, 10, 1.2),)))),
        lambda: alone(base(), sheet_part(bracket(holes=(rectangle(8, 9, 12, 10.6),)))),
        "caution",
        "1.2 mm",
    ),
    "SHEET-304": Pair(
        lambda: alone(base(), sheet_part(bracket(holes=(Circle(8, 10, 4), Circle(13, 10, 4))))),
        lambda: alone(base(), sheet_part(bracket(holes=(Circle(8, 10, 4), Circle(13.6, 10, 4))))),
        "caution",
        "web of 1 mm",
    ),
    "SHEET-305": Pair(
        lambda: alone(base(), sheet_part(bracket(folds=(), outline=NECKED))),
        lambda: alone(base(), sheet_part(bracket(0.8, folds=(), outline=NECKED))),
        "caution",
        "narrower",
    ),
    "SHEET-306": Pair(
        lambda: alone(base(), sheet_part(bracket(folds=(), outline=COMB))),
        lambda: alone(base(), sheet_part(bracket(0.4, folds=(), outline=COMB))),
        "caution",
        "gap",
    ),
    "SHEET-307": Pair(
        lambda: alone(base(), sheet_part(bracket(folds=(fold(28.0),), outline=TAB))),
        lambda: alone(base(), sheet_part(bracket(folds=(fold(28.0),), outline=RELIEVED))),
        "caution",
        "tears",
    ),
    "SHEET-308": Pair(
        lambda: with_folds(lambda f: replace(f, start=_inwards(f.start), end=_inwards(f.end))),
        good(SHEET),
        "stop",
        "overlap by",
    ),
    "SHEET-401": Pair(
        lambda: alone(base(), sheet_part(bracket(0.3, folds=()))),
        lambda: alone(base(), sheet_part(bracket(0.5, folds=()))),
        "caution",
        "laser",
    ),
    "SHEET-402": Pair(
        lambda: alone(base(), sheet_part(FlatPattern(rectangle(0, 0, 2100, 100)))),
        lambda: alone(base(), sheet_part(FlatPattern(rectangle(0, 0, 900, 1900)))),
        "stop",
        "does not fit",
    ),
    "SHEET-403": Pair(
        lambda: alone(base(), sheet_part(bracket(), mass_kg=20.0)),
        lambda: alone(base(), sheet_part(bracket(), mass_kg=10.0)),
        "caution",
        "20.0 kg",
    ),
    "WIRE-101": Pair(
        lambda: alone(base(), wire_part((wire_bend(1, 30, 40, 5.0),), 70)),
        lambda: alone(base(), wire_part((wire_bend(1, 30, 40, 6.0),), 70)),
        "caution",
        "inside radius 3 mm",
    ),
    "WIRE-102": Pair(
        lambda: alone(base(), wire_part((wire_bend(1, 30, 40), wire_bend(2, 42, 52)), 90)),
        lambda: alone(base(), wire_part((wire_bend(1, 30, 40), wire_bend(2, 44, 54)), 90)),
        "caution",
        "one plane",
    ),
    "WIRE-103": Pair(
        lambda: alone(base(), wire_part((wire_bend(1, 10, 20),), 70)),
        lambda: alone(base(), wire_part((wire_bend(1, 12, 22),), 70)),
        "caution",
        "too short to grip",
    ),
    "WIRE-104": Pair(
        lambda: alone(base(), wire_part((wire_bend(1, 30, 40), wire_bend(2, 40, 50, plane=90.0)), 90)),
        lambda: alone(base(), wire_part((wire_bend(1, 30, 40), wire_bend(2, 45, 55, plane=90.0)), 90)),
        "note",
        "drop",
    ),
    "WIRE-201": Pair(lambda: (with_sizes(base(WIRE, "tube", 408.0), wire_mm=1.0), ()), good(), "caution", "swings"),
    "WIRE-202": Pair(lambda: (with_sizes(base(WIRE, "tube", 408.0), wire_mm=1.0), ()), good(), "caution", "hangs"),
    "WIRE-203": Pair(lambda: (with_sizes(base(WIRE, "tube", 408.0), wire_mm=1.0), ()), good(), "caution", "knock"),
    "WIRE-204": Pair(lambda: (with_sizes(base(WIRE, "tube", 408.0), wire_mm=1.0), ()), good(), "caution", "ice"),
    "PRINT-101": Pair(
        lambda: (with_sizes(base(WIRE, "printed"), wall_mm=0.9), ()), good(WIRE, "printed"), "caution", "0.9 mm thick"
    ),
    "PRINT-102": Pair(
        lambda: (with_sizes(base(WIRE, "printed"), wall_mm=2.6), ()), good(WIRE, "printed"), "note", "lines"
    ),
    "PRINT-103": Pair(
        good(WIRE, "printed"),
        lambda: built(with_job(base(WIRE, "printed"), limits={"bed_mm": [400.0, 400.0, 400.0]})),
        "note",
        "pieces",
    ),
    "PRINT-104": Pair(
        lambda: overridden("bridge_max_mm", 1.0, base(WIRE, "printed"), parts_of(WIRE, "printed")),
        good(WIRE, "printed"),
        "caution",
        "bridge",
    ),
    "PRINT-106": Pair(
        lambda: overridden("print_hole_min_mm", 2.8, base(WIRE, "printed"), ()),
        good(WIRE, "printed"),
        "caution",
        "close",
    ),
    "PRINT-201": Pair(lambda: (printed(plastic="pla"), ()), lambda: (printed(plastic="asa"), ()), "stop", "softens"),
    "PRINT-202": Pair(lambda: (printed(plastic="pa12"), ()), good(WIRE, "printed"), "caution", "swells"),
    "PRINT-203": Pair(lambda: (base(WIRE, "printed"), ()), good(WIRE, "printed"), "caution", "lifts"),
    "PRINT-204": Pair(good(WIRE, "printed"), good(), "note", "unbroken"),
    "PRINT-205": Pair(
        lambda: (replace(base(WIRE, "printed"), sensitivities=(Sensitivity("can_bore_mm", 0.1, 1, 1, 1),)), ()),
        good(WIRE, "printed"),
        "note",
        "reckoned",
    ),
    "ASSY-101": Pair(lambda: overridden("tool_clearance_mm", 6.0), good(), "caution", "washer"),
    "ASSY-102": Pair(
        lambda: (with_job(base(WIRE, "turned"), overrides={"web_min_thicknesses": 5.0}), ()),
        lambda: (with_job(base(SHEET, "turned"), overrides={"web_min_thicknesses": 0.3}), ()),
        "caution",
        "web",
    ),
    "ASSY-103": Pair(lambda: (with_sizes(base(), can_bore_mm=70.0), ()), good(), "caution", "connector"),
    "ASSY-104": Pair(lambda: changed_part("coax-stub", sizes=(("jacket_mm", 5.0),)), good(), "caution", "too short"),
    "ASSY-105": Pair(good(), lambda: (base(), ()), "note", "conductor bends"),
    "ASSY-201": Pair(good(WIRE, "printed"), good(), "caution", "solder"),
    "ASSY-202": Pair(good(), lambda: (with_job(base(), can={"metal": "cuzn37"}), parts_of()), "caution", "cannot be"),
    "ASSY-203": Pair(
        lambda: (base(), ()), lambda: (with_job(base(), can={"metal": "cuzn37"}), ()), "caution", "0.55 V"
    ),
    "ASSY-204": Pair(
        lambda: (with_sizes(base(), floor_mm=1.0), ()),
        lambda: (with_sizes(base(), floor_mm=2.0), ()),
        "note",
        "threads",
    ),
    "ASSY-205": Pair(
        lambda: changed_part("screw-connector", sizes=(("diameter_mm", 2.5), ("length_mm", 4.0))),
        good(),
        "stop",
        "too short",
    ),
    "ASSY-301": Pair(
        lambda: with_capacitor_row(1.0), lambda: with_capacitor_row(100.0), "caution", "capacitor reaches"
    ),
    "ASSY-302": Pair(yields(after_trimming=0.8), good(), "caution", "80%"),
    "ASSY-303": Pair(yields(before_trimming=0.5), yields(before_trimming=0.95), "note", "screwdriver"),
    "ASSY-304": Pair(lambda: alone(base(), sheet_part(bracket(), mass_kg=4.0)), good(), "caution", "4.00 kg"),
    "OUT-101": Pair(lambda: (with_job(base(), can={"drain_holes": False}), ()), good(), "caution", "water"),
    "OUT-102": Pair(lambda: overridden("drain_min_mm", 4.0), good(), "caution", "film"),
    "OUT-201": Pair(lambda: (with_job(base(), can={"radome": True}), ()), good(), "note", "reflects"),
    "OUT-301": Pair(yields(drift_mhz_hot=-15.0), good(), "caution", "15.0 MHz"),
    "OUT-302": Pair(yields(return_loss_cold_db=11.0), good(), "caution", "cold"),
    "OUT-401": Pair(good(), lambda: (with_job(base(), limits={"environment": "sheltered"}), ()), "note", "surge"),
    "OUT-402": Pair(good(), lambda: (with_job(base(), limits={"environment": "indoor"}), ()), "note", "4524 W"),
    "OUT-403": Pair(good(WIRE, "printed"), lambda: (printed(plastic="asa"), ()), "caution", "brittle"),
    "CONS-101": Pair(lambda: (with_sizes(base(), loop_height_mm=32.7), parts_of()), good(), "stop", "loop_height_mm"),
    "CONS-102": Pair(
        lambda: (with_sizes(base(SHEET), strip_width_mm=7.3), parts_of(SHEET)), good(SHEET), "stop", "ring"
    ),
    "CONS-103": Pair(
        lambda: (with_sizes(base(SHEET), loop_height_mm=31.9), parts_of(SHEET)), good(SHEET), "stop", "bar"
    ),
    "CONS-104": Pair(
        lambda: with_folds(lambda f: replace(f, allowance_mm=f.allowance_mm + 0.1)), good(SHEET), "stop", "allowance"
    ),
    "CONS-105": Pair(lambda: changed_wire(cut_length_mm=262.0), good(), "stop", "last end"),
    "CONS-106": Pair(lambda: (with_sizes(base(), floor_mm=2.0), parts_of()), good(), "stop", "floor"),
    "CONS-107": Pair(
        lambda: (with_sizes(base(WIRE, "rolled"), can_bore_mm=222.0), parts_of(WIRE, "rolled")),
        good(WIRE, "rolled"),
        "stop",
        "flat length",
    ),
    "CONS-108": Pair(lambda: (with_sizes(base(), series_capacitor_pf=1.2), parts_of()), good(), "stop", "gives"),
    "CONS-109": Pair(lambda: (with_sizes(base(), series_capacitor_pf=1.12), parts_of()), good(), "stop", "sized for"),
    "CONS-110": Pair(lambda: (with_job(base(), loop={"wire_mm": 3.0}), parts_of()), good(), "stop", "stock"),
    "CONS-111": Pair(
        lambda: (with_sizes(base(), tap_height_mm=13.4), parts_of()), good(), "stop", "jacket of the coax"
    ),
    "NOTE-101": Pair(lambda: overridden("hole_min_mm", 0.8), good(), "note", "overrides the limit"),
}
