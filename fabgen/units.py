"""Conversions at the border: text with a unit into millimetres or megahertz, and back for reading.

Inside the program lengths are millimetres and frequencies megahertz. A value written with its unit ("12 AWG",
"1.42 GHz", "10 ft") is converted here, exactly where the unit is exact.

Sources: international inch 25.4 mm exactly (ISO 80000-3, 1959 agreement); AWG by the formula of ASTM B258,
d = 0.005 in * 92**((36 - n)/39), handbook standard; SWG from BS 3737 (table of the Imperial Standard Wire Gauge,
from memory); MSG, the Manufacturers' Standard Gauge of uncoated steel sheet, 41.82 lb/ft2 per inch (from memory).

Depends on: errors.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
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

_SWG_INCH: dict[int, float] = {
    -6: 0.500, -5: 0.464, -4: 0.432, -3: 0.400, -2: 0.372, -1: 0.348, 0: 0.324, 1: 0.300, 2: 0.276, 3: 0.252,
    4: 0.232, 5: 0.212, 6: 0.192, 7: 0.176, 8: 0.160, 9: 0.144, 10: 0.128, 11: 0.116, 12: 0.104, 13: 0.092,
    14: 0.080, 15: 0.072, 16: 0.064, 17: 0.056, 18: 0.048, 19: 0.040, 20: 0.036, 21: 0.032, 22: 0.028, 23: 0.024,
    24: 0.022, 25: 0.020, 26: 0.018, 27: 0.0164, 28: 0.0148, 29: 0.0136, 30: 0.0124, 31: 0.0116, 32: 0.0108,
    33: 0.0100, 34: 0.0092, 35: 0.0084, 36: 0.0076, 37: 0.0068, 38: 0.0060, 39: 0.0052, 40: 0.0048,
}  # fmt: skip
_MSG_INCH: dict[int, float] = {
    3: 0.2391, 4: 0.2242, 5: 0.2092, 6: 0.1943, 7: 0.1793, 8: 0.1644, 9: 0.1495, 10: 0.1345, 11: 0.1196,
    12: 0.1046, 13: 0.0897, 14: 0.0747, 15: 0.0673, 16: 0.0598, 17: 0.0538, 18: 0.0478, 19: 0.0418, 20: 0.0359,
    21: 0.0329, 22: 0.0299, 23: 0.0269, 24: 0.0239, 25: 0.0209, 26: 0.0179, 27: 0.0164, 28: 0.0149,
}  # fmt: skip
_FRACTION_OR_NUMBER = r"(?:\d+\s+\d+/\d+|\d+/\d+|\d+(?:\.\d*)?(?:[eE][+-]?\d\d?)?|\.\d+)"
_VALUE = re.compile(rf"^\s*([+-]?)\s*({_FRACTION_OR_NUMBER})\s*-?\s*(.*?)\s*$")
_MAX_TEXT = 40
_LENGTH_WORDS = "mm, cm, m, um, in, mil, ft, or a gauge: AWG, SWG, B&S (= AWG), MSG (steel sheet)"
_FREQUENCY_WORDS = "Hz, kHz, MHz, GHz"


@dataclass(frozen=True)
class Written:
    """A value as the user wrote it and as the program uses it."""

    key: str
    text: str
    value: float


def awg_mm(number: int) -> float:
    """Diameter of an American Wire Gauge size: d = 0.005 in * 92**((36 - n)/39), ASTM B258; 0000 is n = -3.

    ``number`` from -3 (0000) to 40; JobError outside.
    """
    if not -3 <= number <= 40:
        raise JobError(f"AWG {number} is outside the gauge; allowed 0000 (-3) to 40. Write the diameter in mm.")
    return float(0.005 * INCH_MM * 92.0 ** ((36 - number) / 39))


def swg_mm(number: int) -> float:
    """Diameter of an Imperial Standard Wire Gauge size by its table (BS 3737); 7/0 is -6, 40 the last."""
    if number not in _SWG_INCH:
        raise JobError(f"SWG {number} is outside the gauge; allowed 7/0 (-6) to 40. Write the diameter in mm.")
    return _SWG_INCH[number] * INCH_MM


def msg_mm(number: int) -> float:
    """Thickness of uncoated steel sheet by the Manufacturers' Standard Gauge, numbers 3 to 28."""
    if number not in _MSG_INCH:
        raise JobError(f"MSG {number} is outside the gauge; allowed 3 to 28. Write the thickness in mm.")
    return _MSG_INCH[number] * INCH_MM


def parse_length_mm(text: str) -> float:
    """Millimetres of a text such as "12 AWG", "1/4 in", "0.064\\"", "10 ft"; JobError names what is allowed."""
    return _parse(text, "length")


def parse_frequency_mhz(text: str) -> float:
    """Megahertz of a text such as "1.42 GHz" or "1420406 kHz"; JobError names what is allowed."""
    return _parse(text, "frequency")


def _parse(text: str, quantity: Quantity) -> float:
    words = _LENGTH_WORDS if quantity == "length" else _FREQUENCY_WORDS
    shown = repr(text if len(text) <= _MAX_TEXT else text[: _MAX_TEXT - 3] + "...")
    match = _VALUE.match(text) if len(text) <= _MAX_TEXT else None
    if match is None:
        gauge = _gauge_first(text) if quantity == "length" else None
        if gauge is not None:
            return gauge
        raise JobError(f"{shown} is not a number with a unit; allowed units: {words}")
    sign, number, unit = match.groups()
    if not unit:
        raise JobError(f"{shown} is in quotes but has no unit; write the bare number or add one of: {words}")
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
    if low in {"awg", "b&s", "swg", "msg"}:
        return _gauge(number, low)
    if low in {"ga", "gauge", "gage"}:
        raise JobError(
            f"{shown}: a bare gauge number means different thicknesses for different metals; write "
            f"'{number} B&S' (copper, brass, aluminium), '{number} MSG' (steel), '{number} SWG', or millimetres"
        )
    if low not in _LENGTH_MM:
        raise JobError(f"{shown}: {unit!r} is not a unit of length; allowed: {words}")
    return float(_number(number, shown) * _LENGTH_MM[low])


def _gauge_first(text: str) -> float | None:
    """Gauges are also written with the word first: "AWG 12"."""
    match = re.match(r"^\s*(awg|swg|b&s|msg)\s*(\d{1,4}(?:/0)?)\s*$", text[:_MAX_TEXT], re.IGNORECASE)
    return _gauge(match.group(2), match.group(1).lower()) if match else None


def _gauge(number: str, word: str) -> float:
    zeros = re.fullmatch(r"(\d)/0", number)
    if zeros:
        index = 1 - int(zeros.group(1))
    elif re.fullmatch(r"0{2,4}", number):
        index = 1 - len(number)
    elif re.fullmatch(r"\d{1,3}", number):
        index = int(number)
    else:
        raise JobError(f"gauge '{number}' is not a whole gauge number; allowed 40 to 0000 (4/0)")
    return {"awg": awg_mm, "b&s": awg_mm, "swg": swg_mm, "msg": msg_mm}[word](index)


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
