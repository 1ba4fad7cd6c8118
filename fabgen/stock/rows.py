"""From a TOML table to a typed row, refusing what is missing, unknown, of the wrong type or not finite.

Depends on: errors, stock records.
"""

from __future__ import annotations

import math
import re
from dataclasses import MISSING, fields
from typing import Any, get_type_hints

from fabgen.errors import JobError
from fabgen.stock import records
from fabgen.stock.records import Source, Temper

# All figures of a row that are in neither set must be above zero.
MAY_BE_ZERO = frozenset({"mandrel_ratio", "adhesive_mm", "anodic_index_v", "swelling_percent"})
MAY_BE_NEGATIVE = frozenset({"permittivity_per_k", "value"})
_ROW_ID = re.compile(r"(?:, )?\b(?:SK|SB|WB|TO|CN|EM|FR|RX|PR|SA)-\d\d(?:\.\.(?:[A-Z]{2}-)?\d\d)?")


def build_row(record: type, raw: Any, where: str) -> Any:
    """A record of the type from its TOML table; ``source`` and ``known_from`` become its Source.

    Raises JobError with the place and the field."""
    if not isinstance(raw, dict):
        raise JobError(f"{where}: a row is a table of key = value lines")
    place = f"{where} '{raw.get('key', '?')}'"
    hints = get_type_hints(record, vars(records))
    known = {f.name: f for f in fields(record) if f.name != "overridden"}
    unknown = sorted(set(raw) - set(known) - {"known_from"})
    if unknown:
        raise JobError(f"{place}: unknown field '{unknown[0]}'; fields are {', '.join(known)}, known_from")
    values: dict[str, Any] = {}
    for name, field in known.items():
        if name == "source":
            values[name] = _source(raw, place)
        elif name in raw:
            values[name] = _value(name, hints[name], raw[name], place)
        elif field.default is MISSING and type(None) not in getattr(hints[name], "__args__", ()):
            raise JobError(f"{place}: field '{name}' is missing")
        elif field.default is MISSING:
            values[name] = None
    return record(**values)


def _source(raw: dict[str, Any], place: str) -> Source:
    for name in ("source", "known_from"):
        if not isinstance(raw.get(name), str) or not raw[name].strip():
            raise JobError(f"{place}: give '{name}': where the figures come from and how they are known")
    return Source(without_row_ids(raw["source"]), raw["known_from"])


def without_row_ids(text: str) -> str:
    """The text without ids of the tests' reference table (like ``SB-24``), which readers do not have."""
    text = _ROW_ID.sub("", text)
    text = re.sub(r"\(\s*[,;]\s*", "(", text)
    text = re.sub(r"\s*[,;]\s*\)", ")", text)
    return re.sub(r"\s*\(\s*\)", "", text)


def _value(name: str, hint: Any, value: Any, place: str) -> Any:
    if name == "tempers":
        return _tempers(value, place)
    if isinstance(value, list):
        return tuple(_value("rows", None, item, place) for item in value)
    if hint is bool or hint is str:
        if not isinstance(value, hint):
            wanted = "true or false" if hint is bool else "text"
            raise JobError(f"{place}: '{name}' is {value!r}; it must be {wanted}")
        return value
    if isinstance(value, bool) or not isinstance(value, int | float) or not math.isfinite(value):
        raise JobError(f"{place}: '{name}' is {value!r}; it must be a finite number")
    zero_allowed = hint is None or name in MAY_BE_ZERO
    if name not in MAY_BE_NEGATIVE and (value < 0 or (value == 0 and not zero_allowed)):
        raise JobError(f"{place}: '{name}' is {value!r}; it must be above zero{', or zero' * zero_allowed}")
    return value if hint is int else float(value)


def _tempers(value: Any, place: str) -> tuple[Temper, ...]:
    if not isinstance(value, list) or not value:
        raise JobError(f"{place}: a metal has one [[metal.tempers]] row at least")
    return tuple(build_row(Temper, item, f"{place}, temper") for item in value)
