"""Values of the job file that carry their own unit: "12 AWG", "16 gauge", "1.42 GHz", "10 ft".

The key's ending says what a bare number would mean; a text is converted once, here, and kept beside the value.

Depends on: errors, units, stock, job.
"""

from __future__ import annotations

import re
from typing import Any

from pydantic import BaseModel

from fabgen.errors import JobError
from fabgen.job import AsWritten, Can, Job, Loop
from fabgen.stock import gauges
from fabgen.units import parse_frequency_mhz, parse_length_mm

AS_WRITTEN = "as_written"
_MAX_GAUGE_TEXT = 20
_GAUGE = re.compile(
    r"(?P<number>\d{1,4}(?:/0)?)\s*-?\s*(?P<word>awg|swg|b&s|ga|gauge|gage)"
    r"|(?P<word_before>awg|swg|b&s|gauge|gage)\s*(?P<number_after>\d{1,4}(?:/0)?)",
    re.IGNORECASE,
)
_SHEET_KEYS = {"sheet_mm", "wall_mm", "floor_mm", "thickness_mm"}


def model_of(annotation: Any) -> type[BaseModel] | None:
    """The section model behind a field's annotation, also inside a union or a tuple."""
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return annotation
    for part in getattr(annotation, "__args__", ()):
        model = model_of(part)
        if model is not None:
            return model
    return None


class UnitReader:
    """Walks the raw tables along the schema.

    ``data``: the same tables with texts turned into numbers and lists into tuples; ``written``: what was converted;
    ``faults``: what could not be.
    """

    def __init__(self, raw: dict[str, Any]) -> None:
        self.written: list[AsWritten] = []
        self.faults: list[str] = []
        self._metals = {"loop": _metal(raw, "loop", Loop), "can": _metal(raw, "can", Can)}
        self.data = self._table({k: v for k, v in raw.items() if k != AS_WRITTEN}, Job, ())

    def _table(self, data: dict[str, Any], model: type[BaseModel], path: tuple[str, ...]) -> dict[str, Any]:
        result: dict[str, Any] = {}
        for key, value in data.items():
            field = model.model_fields.get(key)
            inner = None if field is None else model_of(field.annotation)
            result[key] = value if field is None else self._value(value, key, inner, (*path, key))
        return result

    def _value(self, value: Any, key: str, inner: type[BaseModel] | None, path: tuple[str, ...]) -> Any:
        if isinstance(value, dict):
            return value if inner is None else self._table(value, inner, path)
        if isinstance(value, list):
            return tuple(
                self._value(item, key, inner, (*path, str(i + 1))) if not isinstance(item, list) else item
                for i, item in enumerate(value)
            )
        return self._number(value, key, path) if isinstance(value, str) else value

    def _number(self, text: str, key: str, path: tuple[str, ...]) -> float | str:
        place = ".".join(path)
        try:
            if key.endswith("_mhz"):
                number = parse_frequency_mhz(text)
            elif key.endswith("_mm"):
                number = stock_length_mm(text, self._metals.get(path[0]) if key in _SHEET_KEYS else None)
            elif key.endswith("_m"):
                number = parse_length_mm(text) / 1000
            else:
                return text
        except JobError as error:
            self.faults.append(f"{place}: {error}")
            return text
        self.written.append(AsWritten(key=place, text=text, value=number))
        return number


def _metal(raw: dict[str, Any], section: str, model: type[Loop] | type[Can]) -> str:
    table = raw.get(section)
    given = table.get("metal") if isinstance(table, dict) else None
    return given if isinstance(given, str) else str(model.model_fields["metal"].default)


def stock_length_mm(text: str, sheet_metal: str | None) -> float:
    """Millimetres of a length, or of a gauge of wire or sheet; JobError says what is allowed.

    ``sheet_metal``: the metal that a bare gauge ("16 gauge") is of; None where the text is no thickness of sheet."""
    match = _GAUGE.fullmatch(text.strip()[:_MAX_GAUGE_TEXT])
    if match is None:
        return parse_length_mm(text)
    number = match["number"] or match["number_after"]
    word = (match["word"] or match["word_before"]).lower()
    if word == "swg":
        return gauges.swg_mm(number)
    if word in {"awg", "b&s"}:
        return gauges.awg_mm(number)
    if sheet_metal is None or not number.isdecimal():
        raise JobError(f"{text!r}: which gauge? Write '{number} AWG', '{number} SWG' or the size in mm")
    return gauges.sheet_gauge_mm(int(number), sheet_metal)
