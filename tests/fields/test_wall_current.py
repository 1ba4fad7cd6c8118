"""Currents at seams and joints: against the dominant mode of a round guide, and by the balance of power."""

from __future__ import annotations

import math

import numpy as np
import pytest

from fabgen.errors import NumericalError
from fabgen.fields.far_field import CurrentElements
from fabgen.fields.geometry import SPEED_OF_LIGHT, CanGeometry, ChokeGeometry, FeedGeometry, LoopGeometry
from fabgen.fields.model import FeedSolver, FieldSolution, SurfaceImpedance
from fabgen.fields.plan import plan_mesh
from fabgen.fields.wall_current import Sheet, can_current, ohmic_power_w, sheet_of, upright_crossings

WAVELENGTH = 0.2
FREQUENCY = SPEED_OF_LIGHT / WAVELENGTH
ETA = 376.730313412
TE11_ROOT = 1.8411837813  # first zero of J1'; Abramowitz and Stegun, table 9.5


def solved(can: CanGeometry, surface: SurfaceImpedance | None = None, density: float = 16.0) -> FieldSolution:
    """A loop in a can; sizes by ratio to the wavelength."""
    unit = WAVELENGTH
    loop = LoopGeometry(
        "wire", unit / 2 / math.pi, 0.15 * unit, 0.03 * unit, 0.03 * unit, 0.07 * unit, 0.0, 0.03 * unit, 0.06 * unit,
        0.02 * unit,
    )  # fmt: skip
    feed = FeedGeometry(can, loop)
    return FeedSolver(plan_mesh(feed, WAVELENGTH, density)).solve(feed, FREQUENCY, surface)


@pytest.fixture(scope="module")
def guide() -> tuple[CanGeometry, FieldSolution]:
    """A can so long, and so narrow (TM01 needs 0.766 wavelengths of bore), that TE11 alone reaches its upper part."""
    can = CanGeometry(0.35 * WAVELENGTH, 1.4 * WAVELENGTH)
    return can, solved(can)


def test_wall_current_of_a_long_can_is_that_of_te11(guide: tuple[CanGeometry, FieldSolution]) -> None:
    # H_z = H J1(kc r) cos(phi) e^{-j beta z} carries P = pi omega mu beta H^2 / (4 kc^4) (x^2 - 1) J1(x)^2, and
    # |J_phi| = |H_z| at the wall. Pozar, Microwave Engineering, eq. 3.131; from memory.
    can, solution = guide
    whole = sheet_of(solution.elements)
    sheet = Sheet(whole.corners_m, whole.density_a_per_m / math.sqrt(solution.input_power_w))
    near = np.hypot(sheet.corners_m[..., 0], sheet.corners_m[..., 1]).min(1) > 0.98 * can.radius_m
    rows = upright_crossings(sheet.where(sheet.upright & near))
    z, phi, density = (np.array(column) for column in zip(*rows, strict=True))
    z, phi = z * 1e-6, np.radians(phi)
    # above what the loop excites besides, and under the rim, near which the outer face carries current too
    middle = (z > 0.5 * WAVELENGTH) & (z < 1.0 * WAVELENGTH)
    z, phi, density = z[middle], phi[middle], density[middle]
    kc, k = TE11_ROOT / can.radius_m, 2 * math.pi / WAVELENGTH
    beta = math.sqrt(k**2 - kc**2)
    waves = np.stack([np.cos(phi) * np.exp(-1j * beta * z), np.cos(phi) * np.exp(1j * beta * z)], 1)
    (out, back), *_ = np.linalg.lstsq(waves, density, rcond=None)
    left = density - waves @ np.array([out, back])
    # the shape and the wavelength in the guide are those of the mode
    assert np.sqrt(np.mean(np.abs(left) ** 2) / np.mean(np.abs(density) ** 2)) < 0.03
    power = math.pi * k * ETA * beta / (4 * kc**4) * (TE11_ROOT**2 - 1) * (abs(out) ** 2 - abs(back) ** 2)
    # one watt goes in at the port; a longer can gives 1.00 to 1.02
    assert power == pytest.approx(1.0, abs=0.03)


def test_a_seam_is_crossed_by_the_place_where_it_lies(guide: tuple[CanGeometry, FieldSolution]) -> None:
    can, solution = guide
    wall = can_current(solution.elements, can, solution.input_power_w).upright["wall"]
    crossing = dict(zip(wall.angle_deg, wall.crossing_a_per_m, strict=True))
    assert crossing[0.0] == pytest.approx(wall.peak_a_per_m, rel=0.02)
    assert crossing[60.0] == pytest.approx(0.5 * crossing[0.0], rel=0.2)
    # gap and bars on one side leave a little in the E-plane, which the mode alone would not
    assert 0.0 < crossing[90.0] < 0.12 * crossing[0.0]


def test_losses_by_the_densities_are_the_solvers_own() -> None:
    can = CanGeometry(0.5 * WAVELENGTH, 0.3 * WAVELENGTH)
    solution = solved(can, SurfaceImpedance(0.7, 0.7), 12.0)
    sheet = sheet_of(solution.elements)
    lost = ohmic_power_w(sheet, np.full(len(sheet.corners_m), 0.7))
    assert lost == pytest.approx(solution.ohmic_power_w, rel=1e-9)
    assert solution.power_balance == pytest.approx(0.0, abs=1e-3)


def test_joints_of_a_choke_share_the_current_of_the_wall() -> None:
    unit = WAVELENGTH
    can = CanGeometry(0.45 * unit, 0.35 * unit, 0, ChokeGeometry(0.7 * unit, 0.1 * unit, 0.22 * unit))
    found = can_current((solution := solved(can, density=12.0)).elements, can, solution.input_power_w)
    assert set(found.level) == {"wall on floor", "choke wall on its floor", "choke floor on wall"}
    assert set(found.upright) == {"wall", "choke wall"}
    for line in found.level.values():
        assert 0 < line.crossing_a_per_m <= line.peak_a_per_m
        # the integral of the square lies under the largest square on the whole line
        assert 0 < line.crossing_square_a2_per_m < line.crossing_a_per_m**2 * 2 * math.pi * 0.7 * unit
    # the choke's wall carries less than the can's own
    assert found.upright["choke wall"].peak_a_per_m < found.upright["wall"].peak_a_per_m
    level = CanGeometry(0.45 * unit, 0.35 * unit, 8)
    flat = can_current((solution := solved(level, density=12.0)).elements, level, solution.input_power_w)
    assert set(flat.level) == {"wall on floor"}
    assert flat.upright["wall"].crossing_a_per_m[18] < 0.25 * flat.upright["wall"].peak_a_per_m


def test_elements_of_another_rule_are_refused() -> None:
    with pytest.raises(NumericalError, match="not three for each triangle"):
        sheet_of(CurrentElements(np.zeros((8, 3)), np.zeros((8, 3), dtype=complex)))
