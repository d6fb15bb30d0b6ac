"""Radiative exchange of a small grey surface with large surroundings."""

from __future__ import annotations

from irsurvey.constants import STEFAN_BOLTZMANN
from irsurvey.heat import Numbers


def radiative_flux(t_surface: Numbers, t_surroundings: Numbers, emissivity: Numbers) -> Numbers:
    """Net radiation leaving the surface [W m⁻²], εσ(Ts⁴ − Tr⁴); temperatures [K].  Bergman et al. (2011), eq. 1.7.

    `t_surroundings` is the mean radiant temperature of what the surface faces; `emissivity` is the total
    hemispherical one, for which a camera's in-band value stands in."""
    return emissivity * STEFAN_BOLTZMANN * (t_surface**4 - t_surroundings**4)


def radiative_coefficient(t_surface: Numbers, t_surroundings: Numbers, emissivity: Numbers) -> Numbers:
    """Radiative heat-transfer coefficient [W m⁻² K⁻¹], flux over (Ts − Tr); temperatures [K].

    Exact, and finite where both are equal.  Bergman et al. (2011), eq. 1.9."""
    return emissivity * STEFAN_BOLTZMANN * (t_surface + t_surroundings) * (t_surface**2 + t_surroundings**2)
