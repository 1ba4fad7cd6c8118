"""The series capacitor as a part: sleeve for a wire loop, overlapping plates for a sheet loop.

    sleeve                                     plates
      wire d      overlap                        ______________      film t
    ========|================----              __|====overlap====|___
    --------[ tube, bore D   ]------ to bar      |_______________|

Depends on: errors, sizing.records, sizing.rounding, stock.
"""

from __future__ import annotations

import math
from collections.abc import Callable

from fabgen.errors import NoSolutionError
from fabgen.sizing.records import CapacitorPart
from fabgen.sizing.rounding import round_to
from fabgen.stock import tables
from fabgen.stock.records import Coax

EPSILON_0_PF_PER_MM = 8.8541878128e-3
DIELECTRIC = "ptfe"
TRIM_DOWN, TRIM_UP = 0.6, 1.5
SHORTEST_OVERLAP_MM = 0.3
OVERLAP_STEP_MM = 0.1
SLEEVE_TUBES_MM = ((2.0, 1.1), (2.5, 1.6), (3.0, 2.1), (4.0, 3.1), (5.0, 4.1))
"""Outside and bore of metric brass tube as model shops stock it. Common practice, no source."""
LEAST_SLEEVE_MM = 0.25
"""Thinnest wall of PTFE tube that survives assembly. Common practice, no source."""
FILMS_MM = (0.05, 0.1, 0.25, 0.5, 1.0)
"""PTFE film by the sheet. Common practice, no source."""
# Field of a wire's flat end inside a longer tube, C_end / (e0 er D) over d/D: finite differences on the
# axisymmetric Laplace equation at three grids, extrapolated to a zero step (about 1 %).
_END_RATIO = (0.2, 0.25, 0.3, 0.35, 0.4, 0.5, 0.6, 0.7, 0.8)
_END_VALUE = (0.566, 0.701, 0.845, 0.998, 1.162, 1.535, 1.989, 2.570, 3.384)


def series_capacitor_pf(reactance_ohm: float, frequency_mhz: float) -> float:
    """The capacitor that cancels an inductive reactance: C = 1 / (omega X), pF. ``reactance_ohm`` above 0."""
    if not reactance_ohm > 0:
        raise NoSolutionError(
            f"the reactance at the tap is {reactance_ohm:.1f} ohm; a series capacitor needs an inductive one"
        )
    return 1e6 / (2 * math.pi * frequency_mhz * reactance_ohm)


def sleeve_pf(overlap_mm: float, inner_mm: float, bore_mm: float, permittivity: float) -> float:
    """Coaxial capacitor C = 2 pi e0 er L / ln(D/d) + end correction of the wire's flat end, pF.

    The PTFE tube fills the room between wire and brass. Valid for L above D/2 and d/D 0.2 to 0.8; the field at the
    tube's mouth is left out (a few hundredths of a pF). Pozar, Microwave Engineering, table 2.1, for the line; the
    end by our own electrostatic computation.
    """
    import numpy as np

    per_mm = 2 * math.pi * EPSILON_0_PF_PER_MM * permittivity / math.log(bore_mm / inner_mm)
    end = EPSILON_0_PF_PER_MM * permittivity * bore_mm * float(np.interp(inner_mm / bore_mm, _END_RATIO, _END_VALUE))
    return per_mm * overlap_mm + end


def plates_pf(overlap_mm: float, width_mm: float, film_mm: float, permittivity: float) -> float:
    """Parallel plates with the fields at all edges, pF:

        C = e0 er w l / t (1 + t/(pi w) (1 + ln(2 pi w / t))) (1 + t/(pi l) (1 + ln(2 pi l / t)))

    H. B. Palmer, Trans. AIEE 56 (1937) 363, known from memory. Valid for w and l above 2 t, film wider than the
    plates.
    """

    def edge(side: float) -> float:
        return 1 + film_mm / (math.pi * side) * (1 + math.log(2 * math.pi * side / film_mm))

    return EPSILON_0_PF_PER_MM * permittivity * width_mm * overlap_mm / film_mm * edge(width_mm) * edge(overlap_mm)


def peak_voltage_v(capacitance_pf: float, frequency_mhz: float, power_w: float, impedance_ohm: float = 50.0) -> float:
    """Peak voltage across the capacitor: sqrt(2 P / R) / (omega C)."""
    omega = 2 * math.pi * frequency_mhz * 1e6
    return math.sqrt(2 * power_w / impedance_ohm) / (omega * capacitance_pf * 1e-12)


def capacitor_part(
    form: str, capacitance_pf: float, frequency_mhz: float, *, coax: Coax, plate_width_mm: float, transmit_w: float
) -> CapacitorPart:
    """Size the capacitor: ``form`` "sleeve" or "plates". Raises ``NoSolutionError`` when no stock gives it."""
    voltage = peak_voltage_v(capacitance_pf, frequency_mhz, transmit_w)
    if form == "sleeve":
        return _sleeve(capacitance_pf, coax, voltage)
    return _plates(capacitance_pf, plate_width_mm, voltage)


def sleeve_tube_mm(coax: Coax) -> tuple[float, float]:
    """Outside and bore of the narrowest stock tube with room for a PTFE tube around the coax's bare centre."""
    for outer, bore in SLEEVE_TUBES_MM:
        if (bore - coax.inner_mm) / 2 >= LEAST_SLEEVE_MM:
            return outer, bore
    raise NoSolutionError(
        f"no stock tube takes a centre conductor of {coax.inner_mm:g} mm with {LEAST_SLEEVE_MM:g} mm of PTFE; "
        "choose a thinner coax"
    )


def _sleeve(capacitance: float, coax: Coax, voltage: float) -> CapacitorPart:
    outer, bore = sleeve_tube_mm(coax)
    permittivity = tables.dielectric(DIELECTRIC).relative_permittivity

    def value(overlap: float) -> float:
        return sleeve_pf(overlap, coax.inner_mm, bore, permittivity)

    overlap, least, most = _overlaps(value, capacitance)
    return CapacitorPart(
        form="sleeve", capacitance_pf=capacitance, minimum_pf=value(least), maximum_pf=value(most),
        overlap_mm=overlap, overlap_max_mm=most, inner_mm=coax.inner_mm, outer_mm=bore,
        tube_wall_mm=round_to((outer - bore) / 2, 0.01), plate_width_mm=0.0, film_mm=0.0,
        relative_permittivity=permittivity, pf_per_mm=value(1.0) - value(0.0), peak_voltage_v=voltage,
        formula="C = 2 pi e0 er L / ln(D/d) + end correction of the wire's flat end",
        source="Pozar, Microwave Engineering, table 2.1 (from memory); end correction by finite differences",
    )  # fmt: skip


def _plates(capacitance: float, width: float, voltage: float) -> CapacitorPart:
    permittivity = tables.dielectric(DIELECTRIC).relative_permittivity

    def misfit(film: float) -> float:
        overlap = _overlap_of(lambda x: plates_pf(x, width, film, permittivity), capacitance)
        return abs(math.log(overlap / width))

    film = min(FILMS_MM, key=misfit)

    def value(overlap: float) -> float:
        return plates_pf(overlap, width, film, permittivity)

    overlap, least, most = _overlaps(value, capacitance)
    return CapacitorPart(
        form="plates", capacitance_pf=capacitance, minimum_pf=value(least), maximum_pf=value(most),
        overlap_mm=overlap, overlap_max_mm=most, inner_mm=0.0, outer_mm=0.0, tube_wall_mm=0.0,
        plate_width_mm=width, film_mm=film, relative_permittivity=permittivity,
        pf_per_mm=(value(overlap + 0.1) - value(overlap)) / 0.1, peak_voltage_v=voltage,
        formula="C = e0 er w l / t with Palmer's edge terms for both pairs of edges",
        source="H. B. Palmer, Trans. AIEE 56 (1937) 363, from memory",
    )  # fmt: skip


def _overlaps(value: Callable[[float], float], capacitance: float) -> tuple[float, float, float]:
    """Overlap for the capacitance, and the shortest and longest that trimming reaches."""
    overlap = round_to(_overlap_of(value, capacitance), OVERLAP_STEP_MM)
    least = max(SHORTEST_OVERLAP_MM, math.floor(10 * _overlap_of(value, TRIM_DOWN * capacitance)) / 10)
    most = math.ceil(10 * _overlap_of(value, TRIM_UP * capacitance)) / 10
    return max(overlap, SHORTEST_OVERLAP_MM), least, most


def _overlap_of(value: Callable[[float], float], capacitance: float) -> float:
    """Invert a rising capacitance by bisection; the shortest overlap where even that is too much."""
    low, high = SHORTEST_OVERLAP_MM / 3, 1.0
    if value(low) >= capacitance:
        return low
    while value(high) < capacitance:
        high *= 2
    for _ in range(60):
        middle = (low + high) / 2
        low, high = (middle, high) if value(middle) < capacitance else (low, middle)
    return (low + high) / 2
