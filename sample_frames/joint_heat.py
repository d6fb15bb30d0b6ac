"""Heat that simple bodies give off to air and surroundings, by the textbooks' correlations and their table of air."""

from __future__ import annotations

from math import pi, sqrt
from typing import Any

import numpy as np

SIGMA, GRAVITY, ZERO = 5.670374419e-8, 9.80665, 273.15
# Air at atmospheric pressure, Incropera's table A.4 (from memory): T [K], kinematic viscosity [m²/s],
# conductivity [W/mK], Prandtl number.
AIR = np.array(
    [
        [250, 11.44e-6, 22.3e-3, 0.720],
        [300, 15.89e-6, 26.3e-3, 0.707],
        [350, 20.92e-6, 30.0e-3, 0.700],
        [400, 26.41e-6, 33.8e-3, 0.690],
    ]
)


def power(
    joint: dict[str, Any], t_c: float, air_c: float, radiant_c: float, emissivity: float, wind_m_s: float | None
) -> float:
    """Heat [W] of a joint as the survey file describes it, at the mean temperature [°C] of its surface.

    Cylinder: Churchill and Chu 1975, in wind the larger of that and Churchill and Bernstein 1977.  Area: a vertical
    plate as high as its root, Churchill and Chu 1975, in still air alone.
    """
    viscosity, conductivity, prandtl = (np.interp((t_c + air_c) / 2 + ZERO, AIR[:, 0], AIR[:, j]) for j in (1, 2, 3))
    if "cylinder" in joint:
        length = joint["cylinder"]["diameter_m"]
        area = pi * length * joint["cylinder"]["length_m"]
    else:
        area = joint["area_m2"]
        length = sqrt(area)
    film_k = (t_c + air_c) / 2 + ZERO
    rayleigh = GRAVITY / film_k * abs(t_c - air_c) * length**3 * prandtl / viscosity**2
    if "cylinder" in joint:
        nusselt = (0.60 + 0.387 * rayleigh ** (1 / 6) / (1 + (0.559 / prandtl) ** (9 / 16)) ** (8 / 27)) ** 2
    else:
        nusselt = (0.825 + 0.387 * rayleigh ** (1 / 6) / (1 + (0.492 / prandtl) ** (9 / 16)) ** (8 / 27)) ** 2
    if wind_m_s is not None:
        nusselt = max(nusselt, _in_cross_flow(wind_m_s * length / viscosity, prandtl))
    film = nusselt * conductivity / length
    radiated = emissivity * SIGMA * ((t_c + ZERO) ** 4 - (radiant_c + ZERO) ** 4)
    return float(area * (film * (t_c - air_c) + radiated))


def _in_cross_flow(reynolds: float, prandtl: float) -> float:
    """Nusselt number of a cylinder across the wind: Churchill and Bernstein 1977."""
    laminar = 0.62 * reynolds**0.5 * prandtl ** (1 / 3) / (1 + (0.4 / prandtl) ** (2 / 3)) ** 0.25
    return 0.3 + laminar * (1 + (reynolds / 282_000) ** 0.625) ** 0.8
