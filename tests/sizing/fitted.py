"""A fitted model of a turned feed with two deviations, made by hand, for tests of tolerances and drift."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from fabgen.sizing.thermal import Bench
from fabgen.sizing.tolerances import Deviation, FittedModel
from tests.samples import sample_job, sample_sizes

JOB = sample_job("wire", "turned")
SIZES = replace(sample_sizes(JOB), series_capacitor_pf=1.0)
TARGET = JOB.target.frequency_mhz
REACTANCE = 1e6 / (2 * math.pi * TARGET * 1.0)
MODEL = FittedModel(
    (Deviation("tap_height_mm", 0.2, 0.2), Deviation("can_bore_mm", 0.5, 0.5)),
    complex(50, REACTANCE),
    np.array([2 + 1j, 0.5j]),
    np.array([0.0j, 0.0j]),
)
BENCH = Bench(np.array([TARGET]), np.array([MODEL.impedance_ohm]), TARGET, 20.0, 2.0)
