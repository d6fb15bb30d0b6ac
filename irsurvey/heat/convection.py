"""Convective film coefficients by name: the registry a survey's `convection` key chooses from.

Every correlation takes only what it needs and returns h [W m⁻² K⁻¹], NaN outside its validity.  Temperatures [K];
`height` [m] is the correlation's characteristic length, `wind` the air speed along the surface [m s⁻¹].  Air is taken
at standard pressure; at 2000 m altitude natural convection is about 15 % weaker (h ∝ ρ^⅔).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Final

import numpy as np

from irsurvey.constants import GRAVITY
from irsurvey.heat import Numbers, air


@dataclass(frozen=True, slots=True)
class Correlation:
    """One way to find h, with what it rests on.  `u` is its relative standard uncertainty.

    `needs` names the arguments among t_surface, t_air, height, wind, viewed_from; marks: P published, S as quoted by
    a secondary text, M from memory."""

    function: Callable[..., Numbers]
    needs: tuple[str, ...]
    description: str
    validity: str
    source: str
    mark: str
    u: float


def film_coefficient(
    name: str,
    t_surface: Numbers,
    t_air: Numbers,
    *,
    height: Numbers,
    wind: Numbers,
    viewed_from: str | None,
) -> Numbers:
    """Convective coefficient h [W m⁻² K⁻¹] of the correlation of this name, broadcast over the inputs it needs.

    A wind that was not recorded is NaN and gives NaN where the correlation needs it (see `Correlation.needs`); which
    substitute to use, and to flag it, is the caller's decision.  Unknown names raise KeyError."""
    given: dict[str, Any] = {
        "t_surface": t_surface,
        "t_air": t_air,
        "height": height,
        "wind": wind,
        "viewed_from": viewed_from,
    }
    correlation = CONVECTION[name]
    return correlation.function(**{argument: given[argument] for argument in correlation.needs})


def rayleigh(t_surface: Numbers, t_air: Numbers, length: Numbers) -> Numbers:
    """Rayleigh number g β|Ts − Ta| L³ Pr/ν² [–] of air at film temperature, β = 1/T_film."""
    t_film = (t_surface + t_air) / 2
    drive = GRAVITY / t_film * np.abs(t_surface - t_air) * _positive(length) ** 3
    return drive * air.prandtl(t_film) / air.kinematic_viscosity(t_film) ** 2


def reynolds(wind: Numbers, length: Numbers, t_film: Numbers) -> Numbers:
    """Reynolds number v L/ν [–] of air at film temperature [K]."""
    return _not_negative(wind) * _positive(length) / air.kinematic_viscosity(t_film)


# --- coefficients of buildings -------------------------------------------------------------------------------------


def iso_6946(wind: Numbers, viewed_from: str | None) -> Numbers:
    """ISO 6946:2017: 2.5 inside (horizontal heat flow, a wall), 4 + 4v outside; NaN for a component."""
    return _iso_6946(2.5, wind, viewed_from)


def iso_6946_up(wind: Numbers, viewed_from: str | None) -> Numbers:
    """ISO 6946:2017: 5.0 inside where heat flows upward (a ceiling losing heat), 4 + 4v outside."""
    return _iso_6946(5.0, wind, viewed_from)


def iso_6946_down(wind: Numbers, viewed_from: str | None) -> Numbers:
    """ISO 6946:2017: 0.7 inside where heat flows downward (a floor losing heat), 4 + 4v outside."""
    return _iso_6946(0.7, wind, viewed_from)


def mcadams(wind: Numbers) -> Numbers:
    """5.7 + 3.8v, 0…5 m/s (McAdams 1954): holds a natural part and probably radiation."""
    return 5.7 + 3.8 * _light(wind)


def juerges(wind: Numbers) -> Numbers:
    """5.8 + 3.94v, 0…5 m/s (Jürges 1924): holds a natural part and probably radiation."""
    return 5.8 + 3.94 * _light(wind)


def wind_only(wind: Numbers) -> Numbers:
    """2.8 + 3v, 0…5 m/s (Watmuff et al. 1977): convection alone."""
    return 2.8 + 3.0 * _light(wind)


def room_wall(t_surface: Numbers, t_air: Numbers) -> Numbers:
    """1.31 ΔT^⅓, turbulent natural convection at a wall of a room (ASHRAE, Walton 1983)."""
    return 1.31 * np.cbrt(np.abs(t_surface - t_air))


def alamdari_hammond(t_surface: Numbers, t_air: Numbers, height: Numbers) -> Numbers:
    """{[1.5(ΔT/H)^¼]⁶ + [1.23ΔT^⅓]⁶}^⅙, a wall of a room (Alamdari & Hammond 1983)."""
    delta_t = np.abs(t_surface - t_air)
    return ((1.5 * (delta_t / _positive(height)) ** 0.25) ** 6 + (1.23 * np.cbrt(delta_t)) ** 6) ** (1 / 6)


def khalifa(t_surface: Numbers, t_air: Numbers) -> Numbers:
    """2.07 ΔT^0.23, a wall of a heated room (Khalifa & Marshall 1990)."""
    return 2.07 * np.abs(t_surface - t_air) ** 0.23


# --- plates and cylinders ------------------------------------------------------------------------------------------


def churchill_chu(t_surface: Numbers, t_air: Numbers, height: Numbers) -> Numbers:
    """Natural convection of a vertical plate, laminar and turbulent: Churchill & Chu (1975), eq. for all Ra."""
    ra, pr, scale = _natural(t_surface, t_air, height)
    return scale * (0.825 + 0.387 * ra ** (1 / 6) / (1 + (0.492 / pr) ** (9 / 16)) ** (8 / 27)) ** 2


def churchill_chu_laminar(t_surface: Numbers, t_air: Numbers, height: Numbers) -> Numbers:
    """Natural convection of a vertical plate, laminar, Ra ≤ 1e9: Churchill & Chu (1975)."""
    ra, pr, scale = _natural(t_surface, t_air, height)
    ra = np.where(ra <= 1e9, ra, np.nan)[()]
    return scale * (0.68 + 0.670 * ra**0.25 / (1 + (0.492 / pr) ** (9 / 16)) ** (4 / 9))


def horizontal_plate_up(t_surface: Numbers, t_air: Numbers, height: Numbers) -> Numbers:
    """Natural convection on the upper side of a horizontal plate; `height` is its area over its perimeter."""
    return _horizontal_plate(t_surface, t_air, height, np.greater(t_surface, t_air))


def horizontal_plate_down(t_surface: Numbers, t_air: Numbers, height: Numbers) -> Numbers:
    """Natural convection on the under side of a horizontal plate; `height` is its area over its perimeter."""
    return _horizontal_plate(t_surface, t_air, height, np.less(t_surface, t_air))


def forced_plate(t_surface: Numbers, t_air: Numbers, height: Numbers, wind: Numbers) -> Numbers:
    """Forced flow along a flat plate: 0.664Re^½Pr^⅓ to Re 5e5, (0.037Re^0.8 − 871)Pr^⅓ to 1e8.

    `height` is the length along the wind.  Bergman et al. (2011), chapter 7."""
    t_film = (t_surface + t_air) / 2
    re = reynolds(wind, height, t_film)
    re = np.where(re <= 1e8, re, np.nan)[()]
    laminar, turbulent = 0.664 * np.sqrt(re), 0.037 * re**0.8 - 871
    nusselt = np.where(re <= 5e5, laminar, turbulent)[()] * np.cbrt(air.prandtl(t_film))
    return nusselt * air.conductivity(t_film) / _positive(height)


def mixed_plate(t_surface: Numbers, t_air: Numbers, height: Numbers, wind: Numbers) -> Numbers:
    """Natural and forced together at a wall, wind across the buoyant flow: Nu³ = Nu_forced³ + Nu_natural³."""
    natural = churchill_chu(t_surface, t_air, height)
    forced = forced_plate(t_surface, t_air, height, wind)
    return np.cbrt(natural**3 + forced**3)


def horizontal_cylinder(t_surface: Numbers, t_air: Numbers, height: Numbers) -> Numbers:
    """Natural convection of a long horizontal cylinder, Ra ≤ 1e12: Churchill & Chu (1975); `height` is the diameter."""
    ra, pr, scale = _natural(t_surface, t_air, height)
    ra = np.where(ra <= 1e12, ra, np.nan)[()]
    return scale * (0.60 + 0.387 * ra ** (1 / 6) / (1 + (0.559 / pr) ** (9 / 16)) ** (8 / 27)) ** 2


def cylinder_crossflow(t_surface: Numbers, t_air: Numbers, height: Numbers, wind: Numbers) -> Numbers:
    """Wind across a cylinder, Re Pr ≥ 0.2: Churchill & Bernstein (1977); `height` is the diameter."""
    t_film = (t_surface + t_air) / 2
    re, pr = reynolds(wind, height, t_film), air.prandtl(t_film)
    re = np.where(re * pr >= 0.2, re, np.nan)[()]
    slope = 0.62 * np.sqrt(re) * np.cbrt(pr) / (1 + (0.4 / pr) ** (2 / 3)) ** 0.25
    nusselt = 0.3 + slope * (1 + (re / 282_000) ** (5 / 8)) ** (4 / 5)
    return nusselt * air.conductivity(t_film) / _positive(height)


def _iso_6946(inside: float, wind: Numbers, viewed_from: str | None) -> Numbers:
    if viewed_from == "outside":
        return 4 + 4 * _not_negative(wind)
    return inside if viewed_from == "inside" else np.nan


def _horizontal_plate(t_surface: Numbers, t_air: Numbers, height: Numbers, unstable: Any) -> Numbers:
    """Unstable: 0.54Ra^¼ to Ra 1e7, 0.15Ra^⅓ to 1e11; stable: 0.27Ra^¼ to 1e11.  No lower limit on Ra: the ¼ power
    is continued to zero, where the heat vanishes with ΔT, so that no pixel at air temperature is lost."""
    ra, _, scale = _natural(t_surface, t_air, height)
    ra = np.where(ra <= 1e11, ra, np.nan)[()]
    rising = np.where(ra <= 1e7, 0.54 * ra**0.25, 0.15 * np.cbrt(ra))
    return np.where(unstable, rising, 0.27 * ra**0.25)[()] * scale


def _natural(t_surface: Numbers, t_air: Numbers, length: Numbers) -> tuple[Numbers, Numbers, Numbers]:
    """Rayleigh and Prandtl number, and what a Nusselt number is multiplied with, k/L, at film temperature."""
    t_film = (t_surface + t_air) / 2
    return rayleigh(t_surface, t_air, length), air.prandtl(t_film), air.conductivity(t_film) / _positive(length)


def _positive(length: Numbers) -> Numbers:
    return np.where(np.greater(length, 0), length, np.nan)[()]


def _not_negative(wind: Numbers) -> Numbers:
    return np.where(np.greater_equal(wind, 0), wind, np.nan)[()]


def _light(wind: Numbers) -> Numbers:
    """The linear forms end at 5 m/s."""
    return np.where(np.less_equal(wind, 5), _not_negative(wind), np.nan)[()]


_ISO: Final = "ISO 6946:2017"
_CHURCHILL_CHU: Final = "Churchill & Chu (1975), doi 10.1016/0017-9310(75)90243-4"
_HOLDS_RADIATION: Final = "holds a natural part and probably radiation: with radiation added, heat is overstated"

# Relative standard uncertainties are a judgement.  For walls of rooms and façades: correlations in common use differ
# by a factor of two from end to end, taken as rectangular in log h: ln 2/(2√3) = 0.20.  For plates and cylinders as
# in the laboratory: the textbooks' "up to 25 %", rectangular: 0.25/√3 = 0.14, rounded up.
_WALL_U: Final = 0.20
_SHAPE_U: Final = 0.15

CONVECTION: Final[dict[str, Correlation]] = {
    "iso-6946": Correlation(
        iso_6946, ("wind", "viewed_from"),
        "conventional value of a wall: 2.5 inside, 4 + 4v outside",
        "building surfaces; heat flow within 30° of horizontal inside", _ISO, "P", _WALL_U,
    ),
    "iso-6946-up": Correlation(
        iso_6946_up, ("wind", "viewed_from"),
        "conventional value for heat flowing upward: 5.0 inside, 4 + 4v outside",
        "building surfaces; ceilings and roofs losing heat", _ISO, "P", _WALL_U,
    ),
    "iso-6946-down": Correlation(
        iso_6946_down, ("wind", "viewed_from"),
        "conventional value for heat flowing downward: 0.7 inside, 4 + 4v outside",
        "building surfaces; floors losing heat", _ISO, "P", _WALL_U,
    ),
    "room-wall": Correlation(
        room_wall, ("t_surface", "t_air"),
        "1.31 ΔT^⅓, a wall of a room",
        "inside, still air, turbulent", "ASHRAE Fundamentals; Walton (1983)", "P", _WALL_U,
    ),
    "alamdari-hammond": Correlation(
        alamdari_hammond, ("t_surface", "t_air", "height"),
        "blend of 1.5(ΔT/H)^¼ and 1.23ΔT^⅓, a wall of a room",
        "inside, still air", "Alamdari & Hammond (1983), Build. Serv. Eng. Res. Technol. 4(3), 106", "P", _WALL_U,
    ),
    "khalifa": Correlation(
        khalifa, ("t_surface", "t_air"),
        "2.07 ΔT^0.23, a wall of a heated room",
        "inside, measured in room-sized cells", "Khalifa & Marshall (1990), Int. J. Heat Mass Transfer 33, 2219",
        "P", _WALL_U,
    ),
    "mcadams": Correlation(
        mcadams, ("wind",), f"5.7 + 3.8v; {_HOLDS_RADIATION}",
        "outside, 0…5 m/s", "McAdams (1954), Heat Transmission", "S", _WALL_U,
    ),
    "juerges": Correlation(
        juerges, ("wind",), f"5.8 + 3.94v; {_HOLDS_RADIATION}",
        "outside, 0…5 m/s", "Jürges (1924)", "S", _WALL_U,
    ),
    "wind-only": Correlation(
        wind_only, ("wind",), "2.8 + 3v, convection alone",
        "outside, 0…5 m/s", "Watmuff, Charters & Proctor (1977)", "M", _WALL_U,
    ),
    "churchill-chu": Correlation(
        churchill_chu, ("t_surface", "t_air", "height"),
        "natural convection of a vertical plate, laminar and turbulent",
        "still air, all Ra; height along the flow", _CHURCHILL_CHU, "P", _WALL_U,
    ),
    "churchill-chu-laminar": Correlation(
        churchill_chu_laminar, ("t_surface", "t_air", "height"),
        "natural convection of a vertical plate, laminar",
        "still air, Ra ≤ 1e9 (0.3 m at 20 K is 5e7)", _CHURCHILL_CHU, "P", _SHAPE_U,
    ),
    "horizontal-plate-up": Correlation(
        horizontal_plate_up, ("t_surface", "t_air", "height"),
        "natural convection on the upper side of a horizontal plate; height is area over perimeter",
        "still air, Ra ≤ 1e11", "McAdams (1954); Lloyd & Moran (1974)", "P", _SHAPE_U,
    ),
    "horizontal-plate-down": Correlation(
        horizontal_plate_down, ("t_surface", "t_air", "height"),
        "natural convection on the under side of a horizontal plate; height is area over perimeter",
        "still air, Ra ≤ 1e11", "McAdams (1954); Lloyd & Moran (1974)", "P", _SHAPE_U,
    ),
    "forced-plate": Correlation(
        forced_plate, ("t_surface", "t_air", "height", "wind"),
        "wind along a smooth flat plate; height is the length along the wind",
        "Re ≤ 1e8, turbulent above 5e5", "Bergman et al. (2011), chapter 7", "P", _SHAPE_U,
    ),
    "mixed-plate": Correlation(
        mixed_plate, ("t_surface", "t_air", "height", "wind"),
        "natural and forced convection together at a wall, Nu³ added",
        "wind across the buoyant flow, Re ≤ 1e8", "Bergman et al. (2011), chapter 9", "P", _WALL_U,
    ),
    "horizontal-cylinder": Correlation(
        horizontal_cylinder, ("t_surface", "t_air", "height"),
        "natural convection of a long horizontal cylinder; height is the diameter",
        "still air, Ra ≤ 1e12", "Churchill & Chu (1975), doi 10.1016/0017-9310(75)90222-7", "P", _SHAPE_U,
    ),
    "cylinder-crossflow": Correlation(
        cylinder_crossflow, ("t_surface", "t_air", "height", "wind"),
        "wind across a cylinder; height is the diameter",
        "Re Pr ≥ 0.2", "Churchill & Bernstein (1977), doi 10.1115/1.3450685", "P", _SHAPE_U,
    ),
}
"""The correlations a survey may name."""
