"""record.json: every number of the feed with its unit in the key; the contract for other tools.

Sizes are written as they are; results of the field computation with six significant digits, which is far finer
than their uncertainty and keeps the text the same on machines whose arithmetic differs in the last bits.

Depends on: folder, sizing.records, parts.records, checks.records.
"""

from __future__ import annotations

import json
import math
from collections.abc import Mapping, Sequence
from dataclasses import asdict, is_dataclass, replace
from typing import Any

from fabgen import __version__
from fabgen.checks.records import Finding
from fabgen.folder import CHECKSUM_KEY, record_checksum
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed, Predicted

SIGNIFICANT_DIGITS = 6
_LENGTH_DIGITS = 6


def record_data(
    feed: Feed,
    parts: Sequence[Part] = (),
    findings: Sequence[Finding] = (),
    files: Mapping[str, str] | None = None,
    despite: Sequence[str] = (),
) -> dict[str, Any]:
    """The record as plain data with its own checksum; ``files`` maps relative path to SHA-256."""
    job = feed.job
    data = {
        "fabgen_version": __version__,
        "job": job.model_dump(mode="json"),
        "frequency_mhz": job.target.frequency_mhz,
        "wavelength_mm": _significant(job.wavelength_mm, 9),
        "frame": "origin in the centre of the floor's inner face, +z out of the aperture, gap of the loop on +x, "
        "electric field on the axis along y",
        "sizes": {key: _size(value) for key, value in asdict(feed.sizes).items()},
        "predicted": predicted_data(feed.predicted),
        "capacitor": _plain(feed.capacitor),
        "sensitivities": [_plain(item) for item in feed.sensitivities],
        "yields": _plain(feed.yields),
        "modes": [_plain(item) for item in feed.modes],
        "self_checks": [_plain(item) for item in feed.self_checks],
        "settings": _plain(feed.settings),
        "remarks": list(feed.remarks),
        "parts": [part_data(part) for part in parts],
        "findings": [_plain(item) for item in findings],
        "despite": sorted(despite),
        "files": dict(sorted((files or {}).items())),
    }
    return {**data, CHECKSUM_KEY: record_checksum(data)}


def as_recorded(feed: Feed) -> Feed:
    """The feed with its numbers rounded as the record holds them, so that whatever is made of it also follows from
    the record alone. Job, pattern and sweep stay as they are."""
    sizes = replace(feed.sizes, **{key: _rounded_size(value) for key, value in vars(feed.sizes).items()})
    kept = {"patterns", "response"}
    predicted = {key: _rounded(value) for key, value in vars(feed.predicted).items() if key not in kept}
    rest = {
        key: _rounded(value)
        for key, value in vars(feed).items()
        if key not in {"job", "sizes", "predicted", "can_trials"}
    }
    return replace(feed, sizes=sizes, predicted=replace(feed.predicted, **predicted), **rest)


def _rounded_size(value: Any) -> Any:
    if is_dataclass(value) and not isinstance(value, type):
        return replace(value, **{key: _size(inner) for key, inner in vars(value).items()})
    return _size(value)


def _rounded(value: Any) -> Any:
    """Like ``_plain``, keeping records, tuples and complex numbers what they are."""
    if is_dataclass(value) and not isinstance(value, type):
        return replace(value, **{key: _rounded(inner) for key, inner in vars(value).items()})
    if isinstance(value, tuple):
        return tuple(map(_rounded, value))
    if isinstance(value, complex):
        return complex(*_plain(value))
    return _plain(value) if isinstance(value, float) and math.isfinite(value) else value


def record_text(data: Mapping[str, Any]) -> str:
    """The record as JSON text: UTF-8, two spaces, a newline at the end; no NaN or infinity."""
    return json.dumps(data, indent=2, ensure_ascii=False, allow_nan=False) + "\n"


def predicted_data(predicted: Predicted) -> dict[str, Any]:
    """The predictions; patterns and the full response go to pattern.csv and predicted.s1p."""
    plain: dict[str, Any] = {
        key: _plain(value) for key, value in vars(predicted).items() if key not in {"gain", "patterns", "response"}
    }
    plain["gain_dbi"] = [_plain(point) for point in predicted.gain]
    return plain


def part_data(part: Part) -> dict[str, Any]:
    """A part's sizes and stock, without its geometry."""
    return {
        "key": part.key,
        "name": part.name,
        "process": list(part.process),
        "material": part.material,
        "material_name": part.material_name,
        "temper": part.temper,
        "thickness_mm": _plain(part.thickness_mm),
        "quantity": part.quantity,
        "mass_kg": _plain(part.mass_kg),
        "sizes": {name: _size(value) for name, value in part.sizes},
        "tolerance": part.tolerance,
        "finish": part.finish,
        "notes": list(part.notes),
    }


def _size(value: Any) -> Any:
    if isinstance(value, dict):
        return {key: _size(inner) for key, inner in value.items()}
    return round(value, _LENGTH_DIGITS) if isinstance(value, float) and math.isfinite(value) else _plain(value)


def _plain(value: Any) -> Any:
    """Plain data with rounded numbers; a number that is not finite becomes null."""
    if isinstance(value, bool | int | str) or value is None:
        return value
    if isinstance(value, float):
        return _significant(value)
    if isinstance(value, complex):
        return [_significant(value.real), _significant(value.imag)]
    if is_dataclass(value) and not isinstance(value, type):
        return {key: _plain(inner) for key, inner in vars(value).items()}
    return [_plain(inner) for inner in value] if isinstance(value, Sequence) else _plain(value.item())


def _significant(value: float, digits: int = SIGNIFICANT_DIGITS) -> float | None:
    return float(f"{value:.{digits}g}") + 0.0 if math.isfinite(value) else None
