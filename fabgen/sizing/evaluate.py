"""One solved feed in its dish: efficiencies, beam and noise in one record.

Depends on: job, sizing.dish, sizing.noise, sizing.records, sizing.solver.
"""

from __future__ import annotations

from dataclasses import dataclass

from fabgen.job import Job
from fabgen.sizing.dish import DishFigures, dish_figures, half_angle_rad, sample_pattern
from fabgen.sizing.noise import NoiseFigures, noise_figures
from fabgen.sizing.solver import Solution
from fabgen.theory.constants import FREE_SPACE_OHM

PENALTY_DB = 100.0


@dataclass(frozen=True)
class InDish:
    """What the feed does in the job's dish."""

    dish: DishFigures
    noise: NoiseFigures
    radiation_efficiency: float

    def merit(self, goal: str, least_efficiency: float = 0.0) -> float:
        """The figure that the can search raises: aperture efficiency in hundredths, or G/T in dB less a steep
        penalty where the efficiency falls below ``least_efficiency``."""
        efficiency = self.dish.aperture_efficiency
        if goal == "efficiency":
            return 100 * efficiency
        return self.noise.g_over_t_db_per_k - PENALTY_DB * max(0.0, least_efficiency - efficiency)


def in_dish(job: Job, solution: Solution) -> InDish:
    """Evaluate a solution at the job's target frequency."""
    half_angle = half_angle_rad(job.dish.focal_ratio)
    sample = sample_pattern(solution.far_field, half_angle)
    dish = dish_figures(sample, job.wavelength_mm)
    radiated = dish.power / (2 * FREE_SPACE_OHM)
    efficiency = radiated / (radiated + solution.ohmic_power_w)
    noise = noise_figures(
        sample,
        elevation_deg=job.dish.elevation_deg,
        frequency_mhz=job.target.frequency_mhz,
        radiation_efficiency=efficiency,
        receiver_noise_k=job.wishes.receiver_noise_k,
        aperture_efficiency=dish.aperture_efficiency,
        dish_diameter_m=job.dish.diameter_m,
    )
    return InDish(dish, noise, efficiency)
