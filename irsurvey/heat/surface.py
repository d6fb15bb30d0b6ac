"""Heat at a surface: flux, its sign by convention, surface resistance."""

from __future__ import annotations

import numpy as np

from irsurvey.heat import Numbers
from irsurvey.heat.radiation import radiative_coefficient, radiative_flux


def surface_flux(
    t_surface: Numbers, t_air: Numbers, t_radiant: Numbers, emissivity: Numbers, h: Numbers
) -> Numbers:
    """Heat leaving the surface seen [W m⁻²]: h(Ts − Ta) + εσ(Ts⁴ − Tr⁴).

    Temperatures [K]; `h` is the convective coefficient alone [W m⁻² K⁻¹].  ISO 6946:2017, not linearised."""
    return h * (t_surface - t_air) + radiative_flux(t_surface, t_radiant, emissivity)


def outward_sign(viewed_from: str | None, t_indoor: Numbers, t_outdoor: Numbers) -> Numbers:
    """+1 or −1: what turns heat leaving the surface seen into heat leaving the heated space, or the component.

    `viewed_from` is "inside" (−1), "outside" (+1) or None for a component (+1, whatever the air).  A building colder
    inside than outside reverses the sign; a temperature that is NaN (not recorded) is taken for a heated building."""
    if viewed_from is None:
        return 1.0
    side = {"inside": -1.0, "outside": 1.0}[viewed_from]
    return np.where(np.less(t_indoor, t_outdoor), -side, side)[()]


def surface_resistance(h: Numbers, emissivity: Numbers, t_mean: Numbers) -> Numbers:
    """Surface resistance R_s = 1/(h + ε 4σT_m³) [m² K W⁻¹]; T_m [K] mean of surface and surroundings.

    ISO 6946:2017."""
    return 1 / (h + radiative_coefficient(t_mean, t_mean, emissivity))
