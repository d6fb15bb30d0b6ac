"""Heat a joint gives off to still air or wind and to its surroundings, and the resistance that would make it.

A joint is taken for a simple body.  What flows off along its conductors is not counted, nor are the ends of a cylinder
and the edges of a plate: every power is an estimate.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from math import pi
from typing import Final

import numpy as np

from irsurvey.heat import Numbers, air
from irsurvey.heat.convection import (
    churchill_chu,
    cylinder_crossflow,
    forced_plate,
    horizontal_cylinder,
    rayleigh,
    reynolds,
)
from irsurvey.heat.surface import surface_flux

HOURS_OF_A_YEAR: Final = 8760.0
"""Of 365 days."""


@dataclass(frozen=True, slots=True)
class Form:
    """What a joint is taken for: `area(*dimensions)` [m²] and `film(t_surface, t_air, wind, *dimensions)` [W m⁻² K⁻¹].

    Wind is None for still air; each takes the dimensions named beside it, in that order.  `u` is the relative standard
    uncertainty of the film; marks as in `convection`."""

    area: Callable[..., Numbers]
    area_needs: tuple[str, ...]
    film: Callable[..., Numbers]
    film_needs: tuple[str, ...]
    description: str
    validity: str
    source: str
    mark: str
    u: float


def power(
    form: str,
    t_surface: Numbers,
    t_air: Numbers,
    t_surroundings: Numbers,
    emissivity: Numbers,
    *,
    diameter: Numbers | None = None,
    length: Numbers | None = None,
    width: Numbers | None = None,
    area: Numbers | None = None,
    wind: Numbers | None = None,
    film: Numbers | None = None,
) -> Numbers:
    """Heat given off [W]: A[h(Ts − Ta) + εσ(Ts⁴ − Tsur⁴)], negative where the joint is the colder.

    Temperatures [K], lengths and area as in `surface_area`, `wind` [m s⁻¹] or None for still air; `emissivity` is the
    total hemispherical one, 0 to 1.  `film` is h [W m⁻² K⁻¹], where it is not to be that of the form and the wind.
    NaN outside a domain, where a dimension is missing, and where a wind is NaN (not recorded is not calm).  Unknown
    forms raise KeyError.  Bergman et al. (2011), chapters 1, 7 and 9."""
    dimensions = {"diameter": diameter, "length": length, "width": width, "area": area}
    h = film_coefficient(form, t_surface, t_air, wind=wind, **dimensions) if film is None else film
    emissivity = np.where(np.greater_equal(emissivity, 0) & np.less_equal(emissivity, 1), emissivity, np.nan)[()]
    flux = surface_flux(t_surface, t_air, _positive(t_surroundings), emissivity, h)
    return surface_area(form, **dimensions) * flux


def film_coefficient(
    form: str,
    t_surface: Numbers,
    t_air: Numbers,
    *,
    diameter: Numbers | None = None,
    length: Numbers | None = None,
    width: Numbers | None = None,
    area: Numbers | None = None,
    wind: Numbers | None = None,
) -> Numbers:
    """Convective coefficient h [W m⁻² K⁻¹] of a joint of this form; arguments as in `power`."""
    given = {"diameter": diameter, "length": length, "width": width, "area": area}
    body = FORMS[form]
    return body.film(t_surface, t_air, wind, *(_stated(given[name]) for name in body.film_needs))


def surface_area(
    form: str,
    *,
    diameter: Numbers | None = None,
    length: Numbers | None = None,
    width: Numbers | None = None,
    area: Numbers | None = None,
) -> Numbers:
    """Surface that gives off heat [m²]: an `area` that is given, else that of the form from its lengths [m].

    Cylinder πDL, plate 2·length·width (its `length` is its height, both faces count), sphere πD².  NaN where one of
    them is missing or not positive."""
    given = {"diameter": diameter, "length": length, "width": width, "area": area}
    body = FORMS[form]
    return _stated(area) if area is not None else body.area(*(_stated(given[name]) for name in body.area_needs))


def excess_resistance(power_hot: Numbers, power_reference: Numbers, current: Numbers) -> Numbers:
    """Resistance [Ω] that a joint has at least over a sound one under the same current [A]: (P_hot − P_ref)/I².

    A lower bound: what flows off along the conductor is ignored, and it grows with the difference.  NaN unless the
    current is positive; negative where the reference gives off more."""
    return (power_hot - power_reference) / _positive(current) ** 2


def voltage_drop(resistance: Numbers, current: Numbers) -> Numbers:
    """Voltage [V] lost over a resistance [Ω] at this current [A]; NaN unless the current is positive."""
    return resistance * _positive(current)


def yearly_energy(watts: Numbers) -> Numbers:
    """Energy [kWh] of a power [W] that lasts all the year's 8760 h."""
    return watts * (HOURS_OF_A_YEAR / 1000)


# --- films ------------------------------------------------------------------------------------------------------------


def sphere(t_surface: Numbers, t_air: Numbers, diameter: Numbers) -> Numbers:
    """Natural convection of a sphere, h [W m⁻² K⁻¹], Ra ≤ 1e13; Nu nears 2, conduction alone, as Ra → 0.

    Churchill (1983), Heat Exchanger Design Handbook, the form with the turbulent factor."""
    t_film = (t_surface + t_air) / 2
    ra = rayleigh(t_surface, t_air, diameter)
    ra = np.where(ra <= 1e13, ra, np.nan)[()]
    of_prandtl = 1 + (0.469 / air.prandtl(t_film)) ** (9 / 16)
    turbulent = (1 + 7.44e-8 * ra / of_prandtl ** (16 / 9)) ** (1 / 12)
    nusselt = 2 + 0.589 * ra**0.25 / of_prandtl ** (4 / 9) * turbulent
    return nusselt * air.conductivity(t_film) / _positive(diameter)


def sphere_in_flow(t_surface: Numbers, t_air: Numbers, wind: Numbers, diameter: Numbers) -> Numbers:
    """Forced convection of a sphere, h [W m⁻² K⁻¹], Re 3.5 to 7.6e4: 2 + (0.4Re^½ + 0.06Re^⅔)Pr^0.4 (μ/μs)^¼.

    Properties at air temperature but μs at that of the surface.  Whitaker (1972), AIChE J. 18, 361,
    doi 10.1002/aic.690180219; his data have μ/μs ≥ 1, a hot body in air is a little below, as textbooks use it."""
    re, pr = reynolds(wind, diameter, t_air), air.prandtl(t_air)
    re = np.where((re >= _WHITAKER_RE[0]) & (re <= _WHITAKER_RE[1]), re, np.nan)[()]
    viscosity = (air.viscosity(t_air) / air.viscosity(t_surface)) ** 0.25
    nusselt: Numbers = 2 + (0.4 * np.sqrt(re) + 0.06 * np.cbrt(re) ** 2) * pr**0.4 * viscosity
    return nusselt * air.conductivity(t_air) / _positive(diameter)


_LEAST_RE_PR: Final = 0.2
"""Below it Churchill & Bernstein (1977) do not hold."""
_WHITAKER_RE: Final = (3.5, 7.6e4)


def _cylinder(t_surface: Numbers, t_air: Numbers, wind: Numbers | None, diameter: Numbers) -> Numbers:
    """In wind the larger of natural and forced, as for overhead conductors in light wind (IEEE Std 738, M)."""
    natural = horizontal_cylinder(t_surface, t_air, diameter)
    if wind is None:
        return natural
    t_film = (t_surface + t_air) / 2
    is_too_light = np.less(reynolds(wind, diameter, t_film) * air.prandtl(t_film), _LEAST_RE_PR)
    forced = cylinder_crossflow(t_surface, t_air, diameter, wind)
    return np.where(is_too_light, natural, np.maximum(natural, forced))[()]


def _sphere(t_surface: Numbers, t_air: Numbers, wind: Numbers | None, diameter: Numbers) -> Numbers:
    """In wind the larger of natural and forced, as for the cylinder."""
    natural = sphere(t_surface, t_air, diameter)
    if wind is None:
        return natural
    is_too_light = np.less(reynolds(wind, diameter, t_air), _WHITAKER_RE[0])
    forced = sphere_in_flow(t_surface, t_air, wind, diameter)
    return np.where(is_too_light, natural, np.maximum(natural, forced))[()]


def _plate(t_surface: Numbers, t_air: Numbers, wind: Numbers | None, length: Numbers, width: Numbers) -> Numbers:
    """Air rises along its height and wind blows along its width: Nu³ added, as in the registry of convection."""
    natural = churchill_chu(t_surface, t_air, length)
    if wind is None:
        return natural
    return np.cbrt(natural**3 + forced_plate(t_surface, t_air, width, wind) ** 3)[()]


def _body(t_surface: Numbers, t_air: Numbers, wind: Numbers | None, area: Numbers) -> Numbers:
    return _plate(t_surface, t_air, wind, np.sqrt(area), np.sqrt(area))


def _stated(value: Numbers | None) -> Numbers:
    return np.nan if value is None else _positive(value)


def _positive(value: Numbers) -> Numbers:
    return np.where(np.greater(value, 0), value, np.nan)[()]


# Relative standard uncertainties are a judgement.  Simple bodies: the textbooks' "up to 25 %", rectangular, 0.14,
# rounded up as in the registry of convection.  A body known by its area alone: cylinders, spheres and plates of 0.001
# to 0.1 m² have 0.93 to 1.6 times its coefficient in still air and 1.1 to 2.1 times in wind, so it is low rather than
# high, as befits a lower bound; half of that range in wind, rectangular, is 0.29.
_BODY_U: Final = 0.15
_AREA_U: Final = 0.30
_CHURCHILL_CHU: Final = "Churchill & Chu (1975), doi 10.1016/0017-9310(75)90243-4; Bergman et al. (2011), chapters 7, 9"
_PLATE_DOMAIN: Final = "still air, all Ra; wind along the width, Re ≤ 1e8"

FORMS: Final[dict[str, Form]] = {
    "cylinder": Form(
        lambda diameter, length: pi * diameter * length, ("diameter", "length"), _cylinder, ("diameter",),
        "long horizontal cylinder; in wind across it the larger of natural and forced convection",
        "Ra ≤ 1e12; forced from Re Pr 0.2",
        "Churchill & Chu (1975), doi 10.1016/0017-9310(75)90222-7; Churchill & Bernstein (1977), doi 10.1115/1.3450685",
        "P", _BODY_U,
    ),
    "plate": Form(
        lambda length, width: 2 * length * width, ("length", "width"), _plate, ("length", "width"),
        "vertical plate, length is its height, both faces; in wind natural and forced convection together, Nu³ added",
        _PLATE_DOMAIN, _CHURCHILL_CHU, "P", _BODY_U,
    ),
    "sphere": Form(
        lambda diameter: pi * diameter**2, ("diameter",), _sphere, ("diameter",),
        "sphere; in wind the larger of natural and forced convection",
        "Ra ≤ 1e13; forced from Re 3.5 to 7.6e4",
        "Churchill (1983), Heat Exchanger Design Handbook; Whitaker (1972), doi 10.1002/aic.690180219", "P", _BODY_U,
    ),
    "area": Form(
        lambda area: area, ("area",), _body, ("area",),
        "anything of a given area, with the coefficient of a vertical plate as high and as wide as its root",
        _PLATE_DOMAIN, _CHURCHILL_CHU, "P", _AREA_U,
    ),
}
"""What a joint may be taken for."""
