"""Two-conductor lines: two wires, two coplanar strips, coaxial cable; and the strip that stands for a wire.

      two wires              coplanar strips            coax
     (d)      (d)           |--w--| s |--w--|          ((d) D )
      |-- D --|

Depends on: errors, stock records, theory.constants, theory.skin.
"""

from __future__ import annotations

import math

from fabgen.errors import JobError
from fabgen.stock.records import Coax
from fabgen.theory.constants import FREE_SPACE_OHM
from fabgen.theory.limits import require_positive
from fabgen.theory.skin import surface_resistance_ohm

PTFE_LOSS_TANGENT = 2e-4
"""Loss tangent of PTFE at UHF (CN-19); from memory."""


def two_wire_ohm(pitch_mm: float, diameter_mm: float) -> float:
    """Impedance of two equal round wires in air, (eta/pi) acosh(D/d), ohm.

    ``pitch_mm`` centre to centre, above ``diameter_mm``; else JobError. Exact. Pozar; ITT Reference Data."""
    require_positive(pitch_mm=pitch_mm, diameter_mm=diameter_mm)
    if pitch_mm <= diameter_mm:
        raise JobError(f"wires of {diameter_mm:g} mm at {pitch_mm:g} mm pitch touch; the pitch must be larger")
    return FREE_SPACE_OHM / math.pi * math.acosh(pitch_mm / diameter_mm)


def coplanar_strips_ohm(gap_mm: float, width_mm: float) -> float:
    """Impedance of two equal coplanar strips in air, eta K(k)/K(k'), k = s/(s + 2w), ohm.

    Zero thickness. Gupta, Garg, Bahl, Microstrip Lines and Slotlines. ``gap_mm``, ``width_mm`` above 0."""
    from scipy.special import ellipk, ellipkm1

    require_positive(gap_mm=gap_mm, width_mm=width_mm)
    k = gap_mm / (gap_mm + 2 * width_mm)
    # scipy takes the parameter m = k^2; K(k') through 1 - m keeps digits for narrow gaps.
    return float(FREE_SPACE_OHM * ellipk(k * k) / ellipkm1(k * k))


def coax_ohm(outer_mm: float, inner_mm: float, relative_permittivity: float = 1.0) -> float:
    """Impedance of a coaxial line, eta ln(D/d) / (2 pi sqrt(er)), ohm. ``outer_mm`` above ``inner_mm``."""
    require_positive(outer_mm=outer_mm, inner_mm=inner_mm, relative_permittivity=relative_permittivity)
    if outer_mm <= inner_mm:
        raise JobError(f"coax with inner {inner_mm:g} mm in bore {outer_mm:g} mm: the bore must be larger")
    return FREE_SPACE_OHM * math.log(outer_mm / inner_mm) / (2 * math.pi * math.sqrt(relative_permittivity))


def coax_loss_db_per_m(coax: Coax, frequency_mhz: float, conductivity_s_per_m: float = 5.8e7) -> float:
    """Loss of a coaxial cable with smooth conductors and PTFE, dB/m.

    alpha = Rs/(4 pi Z0) (1/a + 1/b) + pi f sqrt(er) tan(delta) / c in nepers. Real cables lose a little more."""
    z0 = coax_ohm(coax.dielectric_mm, coax.inner_mm, coax.relative_permittivity)
    resistance = surface_resistance_ohm(frequency_mhz, conductivity_s_per_m)
    conductor = resistance / (2 * math.pi * z0) * 1e3 * (1 / coax.inner_mm + 1 / coax.dielectric_mm)
    wave_number = 2 * math.pi * frequency_mhz / 299.792458
    dielectric = 0.5 * wave_number * math.sqrt(coax.relative_permittivity) * PTFE_LOSS_TANGENT
    return 20 / math.log(10) * (conductor + dielectric)
