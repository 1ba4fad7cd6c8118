"""Conversions at the border: text with a unit into millimetres or megahertz, and back for reading.

Inside the program lengths are millimetres and frequencies megahertz. A value written with its unit ("1.42 GHz",
"10 ft") is converted here, exactly where the unit is exact.

Source: international inch, 25.4 mm exactly (ISO 80000-3; agreement of 1959). Wire and sheet gauges stand in
``fabgen.stock.gauges``.

Depends on: errors.
"""

from __future__ import annotations

import math
import re
from fractions import Fraction
from typing import Literal

from fabgen.errors import JobError

Quantity = Literal["length", "frequency"]

INCH_MM = 25.4
_INCH = Fraction("25.4")
SPEED_OF_LIGHT_MM_MHZ = 299_792.458

_LENGTH_MM: dict[str, Fraction] = {
    "um": Fraction(1, 1000),
    "µm": Fraction(1, 1000),
    "mm": Fraction(1),
    "cm": Fraction(10),
    "m": Fraction(1000),
    "in": _INCH,
    "inch": _INCH,
    "inches": _INCH,
    '"': _INCH,
    "mil": _INCH / 1000,
    "thou": _INCH / 1000,
    "ft": 12 * _INCH,
    "foot": 12 * _INCH,
    "feet": 12 * _INCH,
    "'": 12 * _INCH,
}
_FREQUENCY_MHZ: dict[str, Fraction] = {
    "hz": Fraction(1, 1_000_000),
    "khz": Fraction(1, 1000),
    "mhz": Fraction(1),
    "ghz": Fraction(1000),
}

_FRACTION_OR_NUMBER = r"(?:\d+\s+\d+/\d+|\d+/\d+|\d+(?:\.\d*)?(?:[eE][+-]?\d\d?)?|\.\d+)"
_VALUE = re.compile(rf"^\s*([+-]?)\s*({_FRACTION_OR_NUMBER})\s*-?\s*(.*?)\s*$")
_MAX_TEXT = 40
_LENGTH_WORDS = "mm, cm, m, um, in, mil, ft; for wire AWG and SWG, for sheet also gauge"
_FREQUENCY_WORDS = "Hz, kHz, MHz, GHz"


def parse_length_mm(text: str) -> float:
    """Millimetres of a text such as "6 mm", "1/4 in", "0.064\\"", "10 ft"; JobError names what is allowed."""
    return _parse(text, "length")


def parse_frequency_mhz(text: str) -> float:
    """Megahertz of a text such as "1.42 GHz" or "1420406 kHz"; JobError names what is allowed."""
    return _parse(text, "frequency")


def _parse(text: str, quantity: Quantity) -> float:
    words = _LENGTH_WORDS if quantity == "length" else _FREQUENCY_WORDS
    shown = repr(text if len(text) <= _MAX_TEXT else text[: _MAX_TEXT - 3] + "...")
    match = _VALUE.match(text) if len(text) <= _MAX_TEXT else None
    if match is None:
        raise JobError(f"{shown} is not a number with a unit; allowed units: {words}")
    sign, number, unit = match.groups()
    if not unit:
        raise JobError(f"{shown} is in quotes but has no unit; write the bare number or add one of: {words}")
    if unit.startswith(","):
        raise JobError(f"{shown} has a comma; write the decimals after a point, and no commas between thousands")
    value = (-1 if sign == "-" else 1) * _unit_value(number, unit, quantity, shown, words)
    if not math.isfinite(value):
        raise JobError(f"{shown} is not a finite number")
    return value


def _unit_value(number: str, unit: str, quantity: Quantity, shown: str, words: str) -> float:
    low = unit.lower()
    if quantity == "frequency":
        if low not in _FREQUENCY_MHZ:
            raise JobError(f"{shown}: {unit!r} is not a unit of frequency; allowed: {words}")
        return float(_number(number, shown) * _FREQUENCY_MHZ[low])
    if low not in _LENGTH_MM:
        raise JobError(f"{shown}: {unit!r} is not a unit of length; allowed: {words}")
    return float(_number(number, shown) * _LENGTH_MM[low])


def _number(text: str, shown: str) -> Fraction:
    total = Fraction(0)
    for piece in text.split():
        top, _, bottom = piece.partition("/")
        if bottom and int(bottom) == 0:
            raise JobError(f"{shown} divides by zero")
        total += Fraction(top) / int(bottom or "1")
    return total


def show_both_mm(value_mm: float) -> str:
    """A length for people of both systems: "25.40 mm (1.000 in)"."""
    return f"{value_mm:.2f} mm ({value_mm / INCH_MM:.3f} in)"


def wavelength_mm(frequency_mhz: float) -> float:
    """Free-space wavelength, c/f with c = 299 792 458 m/s exactly."""
    return SPEED_OF_LIGHT_MM_MHZ / frequency_mhz
