"""The kept examples' sizes on a mesh of half the edge length."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from fabgen.sizing.field_model import FieldModel
from fabgen.sizing.records import Sizes

ROOT = Path(__file__).parent.parent.parent
NAMES = ("hydrogen-wire", "hydrogen-brass", "satellite-1690")


def _sizes(name: str) -> tuple[Sizes, float]:
    record = json.loads((ROOT / "out_examples" / name / "record.json").read_text(encoding="utf-8"))
    known = {key: record["sizes"].get(key) for key in Sizes.__dataclass_fields__}
    return replace(Sizes(**known), choke=None), float(record["frequency_mhz"])


@pytest.mark.slow
@pytest.mark.thorough
@pytest.mark.parametrize("name", NAMES)
def test_half_the_edge_length_moves_little(name: str) -> None:
    # limits of the project: reflection at the target by 0.03, resonance by 0.4 percent
    sizes, target = _sizes(name)
    near = target * np.array([1.0, 1.004])
    total = []
    for density in (16.0, 32.0):
        model = FieldModel(target, density)
        z = np.array([model.solve(sizes, float(f)).impedance_ohm for f in near])
        total.append(z - 1j / (2e-6 * np.pi * near * sizes.series_capacitor_pf))
    gamma = [(z[0] - 50) / (z[0] + 50) for z in total]
    assert abs(gamma[0] - gamma[1]) < 0.03
    slope = (total[0][1].imag - total[0][0].imag) / (near[1] - near[0])
    shift = (total[1][0].imag - total[0][0].imag) / slope
    assert abs(shift) < 0.004 * target
