"""Exact constants of the SI (2019) and fixed points used everywhere."""

from __future__ import annotations

from math import pi
from typing import Final

PLANCK: Final = 6.62607015e-34
"""Planck constant h [J s], exact since 2019."""
SPEED_OF_LIGHT: Final = 299_792_458.0
"""Speed of light c [m s⁻¹], exact."""
BOLTZMANN: Final = 1.380649e-23
"""Boltzmann constant k [J K⁻¹], exact since 2019."""

FIRST_RADIATION: Final = 2 * PLANCK * SPEED_OF_LIGHT**2
"""First radiation constant for spectral radiance c₁L = 2hc² [W m² sr⁻¹]."""
SECOND_RADIATION: Final = PLANCK * SPEED_OF_LIGHT / BOLTZMANN
"""Second radiation constant c₂ = hc/k [m K]."""
STEFAN_BOLTZMANN: Final = 2 * pi**5 * BOLTZMANN**4 / (15 * PLANCK**3 * SPEED_OF_LIGHT**2)
"""Stefan–Boltzmann constant σ [W m⁻² K⁻⁴]."""
WIEN_DISPLACEMENT: Final = 2.897771955e-3
"""Wien's displacement constant b [m K] (CODATA 2018)."""

ZERO_CELSIUS: Final = 273.15
"""0 °C [K], exact by definition of the Celsius scale."""
STANDARD_PRESSURE: Final = 101_325.0
"""Standard atmosphere [Pa], exact by definition."""
GRAVITY: Final = 9.80665
"""Standard acceleration of free fall [m s⁻²], exact by definition."""
