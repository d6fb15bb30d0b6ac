"""Properties of dry air at standard pressure, by film temperature [K].

Valid from 200 to 1000 K, NaN outside.  Against CoolProp from −40 to 200 °C: viscosity within 1.5 %, conductivity 2 %,
heat capacity 0.3 %, density 0.2 % (up to 1000 K: 5 %), where the correlations they serve are good to 15 % or worse.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from irsurvey.constants import STANDARD_PRESSURE
from irsurvey.heat import Numbers

GAS_CONSTANT: Final = 287.05
"""Specific gas constant of dry air [J kg⁻¹ K⁻¹] (U.S. Standard Atmosphere 1976)."""


def density(t: Numbers) -> Numbers:
    """Density [kg m⁻³] of an ideal gas at standard pressure."""
    return STANDARD_PRESSURE / (GAS_CONSTANT * _valid(t))


def viscosity(t: Numbers) -> Numbers:
    """Dynamic viscosity [Pa s].  Sutherland's law, U.S. Standard Atmosphere 1976, eq. 51."""
    t = _valid(t)
    return 1.458e-6 * t**1.5 / (t + 110.4)


def conductivity(t: Numbers) -> Numbers:
    """Thermal conductivity [W m⁻¹ K⁻¹].  U.S. Standard Atmosphere 1976, eq. 53."""
    t = _valid(t)
    return 2.64638e-3 * t**1.5 / (t + 245.4 * 10 ** (-12 / t))


def heat_capacity(t: Numbers) -> Numbers:
    """Specific heat capacity at constant pressure [J kg⁻¹ K⁻¹].

    Moran & Shapiro, Fundamentals of Engineering Thermodynamics, table of ideal-gas polynomials (coefficients from
    memory, held against CoolProp)."""
    t = _valid(t)
    return GAS_CONSTANT * (3.653 + t * (-1.337e-3 + t * (3.294e-6 + t * (-1.913e-9 + t * 0.2763e-12))))


def kinematic_viscosity(t: Numbers) -> Numbers:
    """Kinematic viscosity ν = μ/ρ [m² s⁻¹]."""
    return viscosity(t) / density(t)


def prandtl(t: Numbers) -> Numbers:
    """Prandtl number Pr = μ cp/k [–]; about 0.7."""
    return viscosity(t) * heat_capacity(t) / conductivity(t)


def _valid(t: Numbers) -> Numbers:
    return np.where((t >= 200) & (t <= 1000), t, np.nan)[()]
