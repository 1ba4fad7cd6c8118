"""Wire and sheet gauges: American (AWG), British (SWG), and sheet gauges, in millimetres.

Depends on: errors.
"""

from __future__ import annotations

import re

from fabgen.errors import JobError

INCH_MM = 25.4

# British standard wire gauge, inches, BS 3737:1964 (withdrawn); from memory.
SWG_INCH = {
    "7/0": 0.500, "6/0": 0.464, "5/0": 0.432, "4/0": 0.400, "3/0": 0.372, "2/0": 0.348, "0": 0.324,
    "1": 0.300, "2": 0.276, "3": 0.252, "4": 0.232, "5": 0.212, "6": 0.192, "7": 0.176, "8": 0.160,
    "9": 0.144, "10": 0.128, "11": 0.116, "12": 0.104, "13": 0.092, "14": 0.080, "15": 0.072, "16": 0.064,
    "17": 0.056, "18": 0.048, "19": 0.040, "20": 0.036, "21": 0.032, "22": 0.028, "23": 0.024, "24": 0.022,
    "25": 0.020, "26": 0.018, "27": 0.0164, "28": 0.0148, "29": 0.0136, "30": 0.0124,
}  # fmt: skip

# Manufacturers' standard gauge for steel sheet, inches, derived from 41.82 lb/ft2 per inch; from memory.
STEEL_SHEET_INCH = {
    7: 0.1793, 8: 0.1644, 9: 0.1495, 10: 0.1345, 11: 0.1196, 12: 0.1046, 13: 0.0897, 14: 0.0747, 15: 0.0673,
    16: 0.0598, 17: 0.0538, 18: 0.0478, 19: 0.0418, 20: 0.0359, 21: 0.0329, 22: 0.0299, 23: 0.0269, 24: 0.0239,
    25: 0.0209, 26: 0.0179, 27: 0.0164, 28: 0.0149,
}  # fmt: skip

# Galvanised sheet gauge, inches: steel gauge plus zinc, at 40 oz/ft2 weights; from memory.
ZINC_SHEET_INCH = {
    8: 0.1681, 9: 0.1532, 10: 0.1382, 11: 0.1233, 12: 0.1084, 13: 0.0934, 14: 0.0785, 15: 0.0710, 16: 0.0635,
    17: 0.0575, 18: 0.0516, 19: 0.0456, 20: 0.0396, 21: 0.0366, 22: 0.0336, 23: 0.0306, 24: 0.0276, 25: 0.0247,
    26: 0.0217, 27: 0.0202, 28: 0.0187,
}  # fmt: skip

# Stainless sheet gauge, inches: 1/640 ft2 pound steps of the 1893 standard; from memory.
STAINLESS_SHEET_INCH = {
    8: 0.17187, 9: 0.15625, 10: 0.14062, 11: 0.125, 12: 0.10937, 13: 0.09375, 14: 0.07812, 15: 0.07031,
    16: 0.0625, 17: 0.05625, 18: 0.05, 19: 0.04375, 20: 0.0375, 21: 0.03437, 22: 0.03125, 23: 0.02812,
    24: 0.025, 25: 0.02187, 26: 0.01875, 27: 0.01719, 28: 0.01562,
}  # fmt: skip
SHEET_TABLES = {"steel": STEEL_SHEET_INCH, "zinc": ZINC_SHEET_INCH, "stainless": STAINLESS_SHEET_INCH}


def awg_mm(gauge: int | str) -> float:
    """Diameter in mm of an American wire gauge, ``4/0`` to 40, after ASTM B258.

    d = 0.005 in * 92^((36 - n)/39), with n = 1 - z for a gauge of z zeros. Raises JobError outside the range."""
    number = _awg_number(str(gauge))
    return float(0.005 * INCH_MM * 92.0 ** ((36 - number) / 39))


def _awg_number(text: str) -> int:
    zeros = re.fullmatch(r"([1-4])/0|(0{1,4})", text)
    if zeros:
        return 1 - (int(zeros[1]) if zeros[1] else len(zeros[2]))
    if text.isdecimal() and 1 <= int(text) <= 40:
        return int(text)
    raise JobError(f"AWG '{text}' is not a wire gauge; allowed: 4/0 to 1/0, 0, 1 to 40, or a diameter in mm")


def swg_mm(gauge: int | str) -> float:
    """Diameter in mm of a British standard wire gauge, ``7/0`` to 30 (BS 3737). Raises JobError outside it."""
    inch = SWG_INCH.get(str(gauge))
    if inch is None:
        raise JobError(f"SWG '{gauge}' is not a wire gauge; allowed: 7/0 to 2/0, 0 to 30, or a diameter in mm")
    return inch * INCH_MM


def sheet_gauge_mm(gauge: int, metal: str) -> float:
    """Thickness in mm of a gauge of sheet.

    Steel (``dc01...``), zinc-coated (``...zinc``) and stainless (``1.4...``) each have their own table; copper,
    brass and aluminium are gauged by the American wire gauge. Raises JobError outside the table."""
    table = _sheet_table(metal)
    if table is None:
        return awg_mm(gauge)
    inch = SHEET_TABLES[table].get(gauge)
    if inch is None:
        allowed = SHEET_TABLES[table]
        raise JobError(f"gauge {gauge} of {metal}: the {table} table has {min(allowed)} to {max(allowed)}")
    return inch * INCH_MM


def _sheet_table(metal: str) -> str | None:
    if "zinc" in metal:
        return "zinc"
    if metal.startswith("1."):
        return "stainless"
    return "steel" if metal.startswith(("dc", "tinplate")) else None
