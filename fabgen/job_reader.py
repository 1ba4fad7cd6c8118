"""Reads a job file: TOML text to a ``Job``, one clear message per fault.

Each message says what was given, what is allowed and what to do. A length or frequency may be written with its own
unit in quotes ("12 AWG", "1.42 GHz", "10 ft"); it is converted once, here, and kept beside the value.

Depends on: errors, units, stock, job.
"""

from __future__ import annotations

import difflib
import tomllib
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from pydantic import BaseModel, ValidationError
from pydantic_core import ErrorDetails

from fabgen.errors import JobError
from fabgen.job import Job
from fabgen.job_units import AS_WRITTEN, UnitReader, model_of
from fabgen.stock import tables

MAX_BYTES = 256 * 1024
_MAX_FAULTS = 8
_MAX_SHOWN = 60

_HINTS = {
    "target.frequency_mhz": "the frequency in megahertz, for example 1420.406",
    "dish.diameter_m": "the dish's diameter in metres",
    "dish.focal_ratio": "focal length divided by diameter; most dishes have 0.3 to 0.5",
    "loop.form": "what the loop is made of",
    "loop.wire_mm": "the wire's diameter in millimetres",
    "loop.sheet_mm": "the sheet's thickness in millimetres",
    "target": "a table [target] with frequency_mhz",
    "dish": "a table [dish] with diameter_m and focal_ratio",
    "loop": "a table [loop] with form and wire_mm or sheet_mm",
}


def read_job(path: Path) -> Job:
    """The job in a file. JobError when it cannot be read or used."""
    try:
        if path.is_dir():
            raise JobError(f"{path} is a folder; give the job file in it (a .toml file)")
        with path.open("rb") as stream:
            data = stream.read(MAX_BYTES + 1)
    except FileNotFoundError:
        raise JobError(f"there is no job file {path}; write one with: fabgen start -o {path}") from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise JobError(f"the job file {path} cannot be read: {reason}") from None
    if len(data) > MAX_BYTES:
        raise JobError(f"{path} is larger than {MAX_BYTES // 1024} KiB; a job file is a short TOML text")
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise JobError(f"{path} is not UTF-8 text (byte {error.start}); save the job file as UTF-8") from None
    return parse_job(text, str(path))


def parse_job(text: str, where: str = "job") -> Job:
    """The job in a TOML text; ``where`` opens the messages."""
    try:
        raw = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise JobError(f"{where} is not valid TOML: {error}; mend that place in the job file") from None
    except (RecursionError, ValueError):
        raise JobError(f"{where} is not usable TOML: nested too deeply or a number too long") from None
    return job_from_data(raw, where)


def job_from_data(raw: dict[str, Any], where: str = "job") -> Job:
    """The job of a parsed TOML table."""
    faults = [_unknown_key((AS_WRITTEN,), Job)] if AS_WRITTEN in raw else []
    reader = UnitReader(raw)
    faults.extend(reader.faults)
    if faults:
        raise JobError(_message(where, faults))
    try:
        job = Job.model_validate({**reader.data, AS_WRITTEN: tuple(reader.written)}, strict=True)
    except ValidationError as error:
        raise JobError(_message(where, _faults(error))) from None
    faults.extend(unknown_names(job))
    if faults:
        raise JobError(_message(where, faults))
    return job


SHORT_TABLE = 20


def unknown_names(job: Job) -> Iterator[str]:
    """Names in the job that no stock table has, each with the nearest that there is."""
    for key, name, kind in _stock_names(job):
        known = [row.key for row in tables.all_rows(kind)]
        if name not in known:
            # a long table is left to the command that lists it
            allowed = f"; allowed: {', '.join(known)}" if len(known) <= SHORT_TABLE else ""
            near = _nearest(name, known)
            yield f"{key} = {name!r} is not in the stock tables{near}{allowed}; see: fabgen stock {kind}"
    for key, metal, temper in (
        ("loop.temper", job.loop.metal, job.loop.temper),
        ("can.temper", job.can.metal, job.can.temper),
    ):
        if temper is not None and metal in {row.key for row in tables.all_rows("metal")}:
            try:
                tables.temper(metal, temper)
            except JobError as error:
                yield f"{key}: {error}"


def _stock_names(job: Job) -> Iterator[tuple[str, str, str]]:
    yield "loop.metal", job.loop.metal, "metal"
    yield "can.metal", job.can.metal, "metal"
    yield "can.plastic", job.can.plastic, "plastic"
    yield "can.lining", job.can.lining, "lining"
    yield "cable.coax", job.cable.coax, "coax"
    yield "cable.connector", job.cable.connector, "connector"
    yield "can.flange.screw", job.can.flange.screw, "screw"
    for name in job.overrides:
        yield f"overrides.{name[:_MAX_SHOWN]}", name[:_MAX_SHOWN], "limit"


def _message(where: str, faults: list[str]) -> str:
    if len(faults) == 1:
        return f"{where}: {faults[0]}"
    shown = faults[:_MAX_FAULTS]
    rest = len(faults) - len(shown)
    lines = [f"{where}: {len(faults)} faults", *(f"  - {fault}" for fault in shown)]
    if rest:
        lines.append(f"  - and {rest} more")
    return "\n".join(lines)


def _faults(error: ValidationError) -> list[str]:
    details = error.errors(include_url=False)
    texts = [_fault(item) for item in details if not _idle_branch(item, details)]
    return list(dict.fromkeys(texts))


def _idle_branch(item: ErrorDetails, details: list[ErrorDetails]) -> bool:
    """A union reports each branch; only the branch that the user meant is of use."""
    loc = item["loc"]
    if "bool" in loc:
        return isinstance(item["input"], dict)
    if item["type"] in {"model_type", "model_attributes_type"} and loc[-1:] == ("Choke",):
        return any("bool" in other["loc"] for other in details)
    return False


def _fault(item: ErrorDetails) -> str:
    path = tuple(str(p + 1) if isinstance(p, int) else p for p in item["loc"] if p not in {"bool", "Choke"})
    name = ".".join(path)
    kind = item["type"]
    if kind == "extra_forbidden":
        return _unknown_key(path, Job)
    if kind == "missing":
        hint = _HINTS.get(name, "")
        return f"{name} is missing; add it" + (f": {hint}" if hint else "")
    if kind == "string_pattern_mismatch":
        return f"{name} = {_shown(item['input'])}; allowed: one or two capital letters or digits, like A or B2"
    if kind == "value_error":
        return str(item["msg"]).removeprefix("Value error, ")
    given = _shown(item["input"])
    allowed = _allowed(path, item)
    hint = _wrong_unit(name, item["input"]) or _HINTS.get(name, "")
    return f"{name} = {given}; allowed: {allowed}" + (f". {hint[0].upper()}{hint[1:]}" if hint else "")


def _shown(value: Any) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list | tuple):
        return "a list"
    text = f"{value:g}" if isinstance(value, float) and abs(value) < 1e6 else repr(value)
    return text if len(text) <= _MAX_SHOWN else text[:_MAX_SHOWN] + "..."


def _allowed(path: tuple[str, ...], item: ErrorDetails) -> str:
    context = item.get("ctx", {})
    if item["type"] == "literal_error":
        words = str(context["expected"])
        return words + _nearest(str(item["input"]), [w.strip("'") for w in words.replace(" or ", ", ").split(", ")])
    bounds = bounds_of(path)
    kinds = {"float": "a number", "int": "a whole number", "bool": "true or false", "string": "text in quotes"}
    noun = next((text for kind, text in kinds.items() if item["type"].startswith(kind)), "")
    if item["type"] == "finite_number":
        noun = "a finite number"
    if bounds:
        return f"{noun} {bounds}".strip()
    if noun and item["type"].endswith(("_type", "_parsing", "number")):
        return noun
    return str(item["msg"])[0].lower() + str(item["msg"])[1:]


def bounds_of(path: tuple[str, ...]) -> str:
    """The bounds of a numeric key as words, from the schema itself."""
    model: type[BaseModel] | None = Job
    field = None
    for name in path:
        if model is None or name not in model.model_fields:
            continue
        field = model.model_fields[name]
        model = model_of(field.annotation)
    if field is None:
        return ""
    marks = list(field.metadata)
    for part in getattr(field.annotation, "__args__", ()):
        for mark in getattr(part, "__metadata__", ()):
            marks.extend(getattr(mark, "metadata", ()) or [mark])
    low = next((("more than" if hasattr(m, "gt") else "at least", v) for m in marks
                for v in [getattr(m, "gt", getattr(m, "ge", None))] if v is not None), None)  # fmt: skip
    high = next((("less than" if hasattr(m, "lt") else "at most", v) for m in marks
                 for v in [getattr(m, "lt", getattr(m, "le", None))] if v is not None), None)  # fmt: skip
    unit = _unit_word(path[-1] if path else "")
    return " and ".join(f"{word} {value:g}{unit}" for word, value in (p for p in (low, high) if p))


def _unit_word(key: str) -> str:
    words = {"_mhz": " MHz", "_mm": " mm", "_m": " m", "_deg": " degrees", "_ohm": " ohm", "_db": " dB", "_k": " K"}
    if key.endswith("test_bend_k"):
        return ""
    return next((word for end, word in words.items() if key.endswith(end)), "")


def _wrong_unit(name: str, value: Any) -> str:
    """A hint when a frequency looks as if it were written in another unit."""
    if not name.endswith("frequency_mhz") or isinstance(value, bool) or not isinstance(value, int | float):
        return ""
    for unit, factor in (("hertz", 1e-6), ("kilohertz", 1e-3), ("gigahertz", 1e3)):
        if 300 <= value * factor <= 12_000:
            return f"that looks like {unit}: write frequency_mhz = {value * factor:.10g}"
    return ""


def _nearest(name: str, known: Any) -> str:
    match = difflib.get_close_matches(name.lower()[:_MAX_SHOWN], [str(k) for k in known], n=1, cutoff=0.5)
    return f"; nearest: {match[0]}" if match else ""


def _keys(model: type[BaseModel], path: tuple[str, ...] = ()) -> Iterator[tuple[str, ...]]:
    """Every key of the schema as a path."""
    for name, field in model.model_fields.items():
        if name != AS_WRITTEN:
            yield (*path, name)
            inner = model_of(field.annotation)
            if inner is not None:
                yield from _keys(inner, (*path, name))


def _unknown_key(path: tuple[str, ...], model: type[BaseModel]) -> str:
    parent = tuple(p for p in path[:-1] if not p.isdigit())
    wrong = path[-1]
    shown = _shown(wrong).strip("'\"")
    keys = list(_keys(model))
    same = [k[-1] for k in keys if k[:-1] == parent]
    close = difflib.get_close_matches(wrong[:_MAX_SHOWN], same, n=1, cutoff=0.6)
    place = f"table [{'.'.join(parent)}]" if parent else "job file"
    if close:
        return f"unknown key {shown!r} in the {place}; did you mean {close[0]!r}?"
    near = [wrong, *difflib.get_close_matches(wrong[:_MAX_SHOWN], [k[-1] for k in keys], n=1, cutoff=0.75)]
    elsewhere = [k for name in near for k in keys if k[-1] == name]
    if elsewhere:
        home = ".".join(elsewhere[0][:-1])
        return f"unknown key {shown!r} in the {place}; {elsewhere[0][-1]!r} belongs in [{home}]"
    return f"unknown key {shown!r} in the {place}; allowed: {', '.join(same)}"
