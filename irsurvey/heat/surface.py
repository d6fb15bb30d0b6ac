"""Heat at a surface: flux, what it radiates to, its sign by convention, surface resistance."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from irsurvey.heat import Numbers
from irsurvey.heat.radiation import radiative_coefficient, radiative_flux


def surface_flux(
    t_surface: Numbers, t_air: Numbers, t_radiant: Numbers, emissivity: Numbers, h: Numbers
) -> Numbers:
    """Heat leaving the surface seen [W m⁻²]: h(Ts − Ta) + εσ(Ts⁴ − Tr⁴).

    Temperatures [K]; `h` is the convective coefficient alone [W m⁻² K⁻¹].  ISO 6946:2017, not linearised."""
    return h * (t_surface - t_air) + radiative_flux(t_surface, t_radiant, emissivity)


def mean_radiant(parts: Sequence[tuple[Numbers, Numbers]]) -> Numbers:
    """Mean radiant temperature [K] of several things faced: (Σ F T⁴)^¼ of (share of the view F, temperature T [K]).

    With it, `surface_flux` is exactly the sum Σ εσF(Ts⁴ − T⁴), if the shares add up to 1.  Bergman et al. (2011),
    chapter 13, for black surroundings, which large enclosures are."""
    fourth: Numbers = sum((share * t**4 for share, t in parts), 0.0)
    return fourth**0.25


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
