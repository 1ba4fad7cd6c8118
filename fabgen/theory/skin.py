"""Skin effect: depth, surface impedance of thick metal, of films on a backing and of rough surfaces.

Depends on: errors, stock records, theory.constants.
"""

from __future__ import annotations

import cmath
import math

from fabgen.stock.records import Lining, Metal
from fabgen.theory.constants import FREE_SPACE_OHM, MU_0_H_PER_M
from fabgen.theory.limits import require_positive


def skin_depth_mm(frequency_mhz: float, conductivity_s_per_m: float, relative_permeability: float = 1.0) -> float:
    """Skin depth 1 / sqrt(pi f mu sigma), mm.

    Good conductor, plane surface, curvature much larger than the depth. Pozar, Microwave Engineering, sec. 1.7.
    Raises JobError unless all arguments are above zero."""
    require_positive(
        frequency_mhz=frequency_mhz,
        conductivity_s_per_m=conductivity_s_per_m,
        relative_permeability=relative_permeability,
    )
    mu = relative_permeability * MU_0_H_PER_M
    return 1e3 / math.sqrt(math.pi * frequency_mhz * 1e6 * mu * conductivity_s_per_m)


def surface_resistance_ohm(
    frequency_mhz: float, conductivity_s_per_m: float, relative_permeability: float = 1.0
) -> float:
    """Surface resistance of thick metal, 1 / (sigma delta), ohm per square. Pozar sec. 1.7."""
    depth_m = skin_depth_mm(frequency_mhz, conductivity_s_per_m, relative_permeability) / 1e3
    return 1 / (conductivity_s_per_m * depth_m)


def film_impedance_ohm(
    frequency_mhz: float,
    thickness_mm: float,
    conductivity_s_per_m: float,
    relative_permeability: float = 1.0,
    backing_ohm: complex | None = None,
) -> complex:
    """Surface impedance of a layer of finite thickness, ohm per square.

    A layer is a short line of impedance Zc = (1 + j) / (sigma delta) and constant (1 + j) / delta. Behind it:
    nothing (``None``, Z = Zc coth(gamma t), which is 1/(sigma t) for thin films and Zc for thick ones) or the
    surface impedance of the metal that it lies on, Z = Zc (Zb + Zc tanh) / (Zc + Zb tanh).
    Ramo, Whinnery, Van Duzer, Fields and Waves in Communication Electronics, coated conductors; from memory."""
    require_positive(thickness_mm=thickness_mm)
    depth = skin_depth_mm(frequency_mhz, conductivity_s_per_m, relative_permeability)
    bulk = (1 + 1j) * surface_resistance_ohm(frequency_mhz, conductivity_s_per_m, relative_permeability)
    # tanh is 1 to double precision beyond 20 depths; larger arguments only risk overflow.
    tangent = cmath.tanh((1 + 1j) * min(thickness_mm / depth, 20.0))
    if backing_ohm is None:
        return bulk / tangent
    return bulk * (backing_ohm + bulk * tangent) / (bulk + backing_ohm * tangent)


def metal_impedance_ohm(metal: Metal, frequency_mhz: float, thickness_mm: float | None = None) -> complex:
    """Surface impedance of a sheet of the metal (thick when ``thickness_mm`` is None), ohm per square."""
    rows = metal.conductivity_s_per_m, metal.relative_permeability
    if thickness_mm is None:
        return (1 + 1j) * surface_resistance_ohm(frequency_mhz, *rows)
    return film_impedance_ohm(frequency_mhz, thickness_mm, *rows)


def lining_conductivity_s_per_m(lining: Lining, sheet_resistance_ohm: float | None = None) -> float:
    """Conductivity of a lining: stated, or 1 / (R t) from a direct-current sheet resistance (the user's first)."""
    measured = sheet_resistance_ohm if sheet_resistance_ohm is not None else lining.sheet_resistance_ohm
    if measured is not None:
        require_positive(sheet_resistance_ohm=measured)
        return 1e3 / (measured * lining.thickness_mm)
    require_positive(conductivity_s_per_m=lining.conductivity_s_per_m or 0.0)
    return float(lining.conductivity_s_per_m or 0.0)


def lining_impedance_ohm(
    lining: Lining, frequency_mhz: float, sheet_resistance_ohm: float | None = None
) -> complex:
    """Surface impedance of a lining on plastic, ohm per square; a measured sheet resistance rules if given.

    Nothing is behind the layer, so a thin one shows its direct-current sheet resistance (SK-57)."""
    conductivity = lining_conductivity_s_per_m(lining, sheet_resistance_ohm)
    return film_impedance_ohm(frequency_mhz, lining.thickness_mm, conductivity)


def through_loss_db(frequency_mhz: float, thickness_mm: float, conductivity_s_per_m: float) -> float:
    """Loss of a plane wave on its way through a layer between two half spaces of air, dB.

    The layer as a line section between two impedances of free space; exact for normal incidence."""
    depth = skin_depth_mm(frequency_mhz, conductivity_s_per_m)
    bulk = (1 + 1j) / (conductivity_s_per_m * depth / 1e3)
    argument = (1 + 1j) * thickness_mm / depth
    if argument.real > 300:
        return 8.686 * argument.real
    ratio = bulk / FREE_SPACE_OHM
    transmitted = 1 / (cmath.cosh(argument) + 0.5 * (ratio + 1 / ratio) * cmath.sinh(argument))
    return -20 * math.log10(abs(transmitted))


def roughness_factor(roughness_rms_um: float, skin_depth_um: float) -> float:
    """Rise of surface resistance by roughness, 1 + (2/pi) atan(1.4 (R/delta)^2), between 1 and 2.

    ``roughness_rms_um``: root mean square height, at or above 0. Hammerstad and Jensen, IEEE MTT-S Digest 1980,
    p. 407; from memory. Saturates at 2: not valid for a surface much rougher than the skin depth."""
    require_positive(skin_depth_um=skin_depth_um)
    return 1 + 2 / math.pi * math.atan(1.4 * (roughness_rms_um / skin_depth_um) ** 2)
