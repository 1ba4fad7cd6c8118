"""What the rounded sizes will do, all from the last solve and the sweep at these sizes.

Depends on: job, sizing.dish, sizing.evaluate, sizing.match, sizing.records, sizing.response, sizing.solver.
"""

from __future__ import annotations

import math

import numpy as np

from fabgen.job import Job
from fabgen.sizing.dish import Cut, beam, edge_taper_db, half_angle_rad, plane_cut
from fabgen.sizing.evaluate import in_dish
from fabgen.sizing.match import reflection, return_loss_db
from fabgen.sizing.records import PatternCut, Predicted, Sizes
from fabgen.sizing.response import band_of, build_response, gain_points
from fabgen.sizing.solver import Real, Solution, Sweep

CUTS_DEG = (90.0, 0.0, 45.0)
"""E-plane, H-plane, and the plane between, where the cross-polar field is largest."""


def predict(job: Job, sizes: Sizes, solution: Solution, sweep: Sweep) -> Predicted:
    """Everything the record promises about the feed."""
    target, half_angle = job.target.frequency_mhz, half_angle_rad(job.dish.focal_ratio)
    figures = in_dish(job, solution)
    cuts = {phi: plane_cut(solution.far_field, phi) for phi in CUTS_DEG}
    shape = beam(solution.far_field, figures.dish.power, (cuts[90.0], cuts[0.0]))
    response = build_response(sweep, sizes, job)
    wanted = job.wishes.return_loss_db
    return Predicted(
        impedance_ohm=complex(solution.impedance_ohm),
        return_loss_db=return_loss_db(reflection(solution.impedance_ohm, sizes.series_capacitor_pf, target)),
        bandwidth_mhz=band_of(response, target, wanted).width_mhz,
        bandwidth_return_loss_db=wanted,
        aperture_efficiency=figures.dish.aperture_efficiency,
        illumination_efficiency=figures.dish.illumination_efficiency,
        phase_efficiency=figures.dish.phase_efficiency,
        polarisation_efficiency=figures.dish.polarisation_efficiency,
        spillover=figures.dish.spillover,
        edge_taper_db=edge_taper_db(solution.far_field, half_angle),
        half_power_beamwidth_e_deg=shape.half_power_e_deg,
        half_power_beamwidth_h_deg=shape.half_power_h_deg,
        directivity_dbi=shape.directivity_dbi,
        front_to_back_db=shape.front_to_back_db,
        phase_centre_mm=figures.dish.phase_centre_mm,
        ohmic_loss_db=-10 * math.log10(figures.radiation_efficiency),
        radiation_efficiency=figures.radiation_efficiency,
        spillover_noise_k=figures.noise.spillover_noise_k,
        feed_noise_k=figures.noise.feed_noise_k,
        system_noise_k=figures.noise.system_noise_k,
        g_over_t_db_per_k=figures.noise.g_over_t_db_per_k,
        wall_current=solution.wall_current(sizes),
        gain=gain_points(sweep, sizes, job),
        patterns=tuple(_cut(phi, cut, figures.dish.power) for phi, cut in cuts.items()),
        response=response,
    )


def _cut(phi_deg: float, cut: Cut, power: float) -> PatternCut:
    angle, co, cross = cut

    def directivity(values: Real) -> tuple[float, ...]:
        level = 10 * np.log10(np.maximum(4 * math.pi * values / power, 1e-10))
        return tuple(float(v) for v in level)

    return PatternCut(phi_deg, tuple(map(float, angle)), directivity(co), directivity(cross))
