"""One solved feed in its dish: efficiencies, beam and noise in one record.

Depends on: job, sizing.dish, sizing.noise, sizing.records, sizing.solver.
"""

from __future__ import annotations

from dataclasses import dataclass

from fabgen.job import Job
from fabgen.sizing.dish import DishFigures, dish_figures, half_angle_rad
from fabgen.sizing.noise import NoiseFigures, noise_figures
from fabgen.sizing.solver import Solution


@dataclass(frozen=True)
class InDish:
    """What the feed does in the job's dish."""

    dish: DishFigures
    noise: NoiseFigures
    radiation_efficiency: float

    def merit(self, goal: str) -> float:
        """The figure that the can search raises: G/T in dB, or aperture efficiency in hundredths."""
        return self.noise.g_over_t_db_per_k if goal == "g_over_t" else 100 * self.dish.aperture_efficiency


def in_dish(job: Job, solution: Solution) -> InDish:
    """Evaluate a solution at the job's target frequency."""
    half_angle = half_angle_rad(job.dish.focal_ratio)
    dish = dish_figures(solution.far_field, half_angle, job.wavelength_mm)
    radiated = solution.radiated_power_w
    efficiency = radiated / (radiated + solution.ohmic_power_w)
    noise = noise_figures(
        solution.far_field,
        half_angle,
        elevation_deg=job.dish.elevation_deg,
        frequency_mhz=job.target.frequency_mhz,
        radiation_efficiency=efficiency,
        receiver_noise_k=job.wishes.receiver_noise_k,
        aperture_efficiency=dish.aperture_efficiency,
        dish_diameter_m=job.dish.diameter_m,
    )
    return InDish(dish, noise, efficiency)
