"""How well a building element insulates: film resistance, environmental temperature, U-value, heat in storage.

Temperatures [K], or [°C] where only differences count.  A U-value [W m⁻² K⁻¹] is positive for a wall that conducts from
the warm side to the cold one; a negative one says that the form does not hold for what was measured.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.heat import Numbers

INSIDE_RESISTANCE: Final = {"up": 0.10, "horizontal": 0.13, "down": 0.17}
"""Conventional inner film resistance [m² K W⁻¹] by the direction of heat flow: ISO 6946:2017 [P]."""
OUTSIDE_RESISTANCE: Final = 0.04
"""Conventional outer film resistance [m² K W⁻¹], any direction: ISO 6946:2017 [P]; it holds at a wind of 4 m/s."""

_WALL: Final = np.sin(np.radians(30)) + 1e-9  # heat within 30° of horizontal flows horizontally, 30° itself included


def film_resistance(h: Numbers, radiative: Numbers) -> Numbers:
    """Film resistance 1/(h + h_r) [m² K W⁻¹] of convective and radiative coefficients [W m⁻² K⁻¹].  ISO 6946:2017.

    NaN where together they are not positive: such a film carries no heat."""
    together = h + radiative
    return 1 / np.where(np.greater(together, 0), together, np.nan)[()]


def heat_flow_direction(tilt: Numbers, viewed_from: str, outward: ArrayLike) -> Any:
    """"up", "horizontal" or "down": which way heat flows through a face; "" where the tilt is not within 0…π.

    `tilt` [rad] of the face seen, 0 faces up, π/2 is a wall, π faces down; `outward` whether heat leaves the building.
    A ceiling seen from inside faces down, and heat lost through it flows up.  Horizontal is within 30° of it
    (ISO 6946:2017 [P])."""
    away = {"outside": 1.0, "inside": -1.0}[viewed_from]
    upward = np.cos(tilt) * np.where(outward, away, -away)
    valid = np.greater_equal(tilt, 0) & np.less_equal(tilt, np.pi)
    return np.select([~valid, upward > _WALL, upward < -_WALL], ["", "up", "down"], "horizontal")[()]


def conventional_resistance(viewed_from: str, heat_flow: ArrayLike) -> Numbers:
    """Conventional film resistance [m² K W⁻¹] of the face seen, by `heat_flow_direction`.  ISO 6946:2017 [P].

    It stands for ε 0.9, surroundings at air temperature (20 °C inside, 10 °C outside) and a wind of 4 m/s."""
    directions = np.asarray(heat_flow)
    known = [directions == direction for direction in INSIDE_RESISTANCE]
    inside = np.select(known, list(INSIDE_RESISTANCE.values()), np.nan)
    outside = np.where(np.any(known, axis=0), OUTSIDE_RESISTANCE, np.nan)
    values: NDArray[np.float64] = {"inside": inside, "outside": outside}[viewed_from]
    return values[()]


def environmental_temperature(t_air: Numbers, t_radiant: Numbers, h: Numbers, hr: Numbers) -> Numbers:
    """What the air and the surroundings are to a surface, as one temperature [K]: (h T_a + h_r T_r)/(h + h_r).

    With `h` and `hr` its convective and radiative coefficients, q = (h + h_r)(T_s − T_env), exactly where h_r is the
    exact one (`radiation.radiative_coefficient`).  ISO 6946:2017; ISO 9869-2:2018 [P]."""
    return t_air + hr * film_resistance(h, hr) * (t_radiant - t_air)


def u_value(flux: Numbers, t_seen_environment: Numbers, t_other_air: Numbers) -> Numbers:
    """U = q/|T_seen − T_other| [W m⁻² K⁻¹] after ISO 9869-2:2018 [P]: the steady flux over what drives it.

    `flux` [W m⁻²] positive when heat leaves the warm space (`surface.outward_sign`); the environmental temperature of
    the face seen, the air of the other side.  NaN where the two are equal."""
    return flux / _apart(np.abs(t_seen_environment - t_other_air))


def u_value_simple(t_surface: Numbers, t_seen_air: Numbers, t_other_air: Numbers, resistance: Numbers) -> Numbers:
    """U = (T_seen − T_s)/(R_s (T_seen − T_other)) [W m⁻² K⁻¹]: by air temperatures and a film resistance alone.

    Either face: inside (T_i − T_si)/(R_si(T_i − T_e)), outside (T_so − T_e)/(R_se(T_i − T_e)).  It takes the
    surroundings to be at air temperature: under a clear sky an outer face lies below the air and U comes out negative.
    Common practice [CP]; NaN where the air is equal on both sides or the resistance is not positive."""
    film = np.where(np.greater(resistance, 0), resistance, np.nan)[()]
    return (t_seen_air - t_surface) / (film * _apart(t_seen_air - t_other_air))


def u_value_from_contrast(u_ref: Numbers, contrast: Numbers, resistance: Numbers, delta_t: Numbers) -> Numbers:
    """U of a defect [W m⁻² K⁻¹] beside a wall of U `u_ref`: U_ref + contrast/(R_s |T_i − T_e|) [C].

    `contrast` [K] is positive for more heat lost, a cold patch inside or a warm one outside; `resistance` is the film's
    as it was, not by convention: R_se at 1 m/s is twice that at 4 m/s.  `delta_t` [K] between the air on both sides."""
    film = np.where(np.greater(resistance, 0), resistance, np.nan)[()]
    return u_ref + contrast / (film * _apart(np.abs(delta_t)))


def layers_u_value(
    resistances: Sequence[Numbers],
    *,
    inside: Numbers = INSIDE_RESISTANCE["horizontal"],
    outside: Numbers = OUTSIDE_RESISTANCE,
) -> Numbers:
    """U = 1/(R_si + ΣR + R_se) [W m⁻² K⁻¹] of layers in series, resistances d/λ [m² K W⁻¹].  ISO 6946:2017 [P]."""
    total: Numbers = sum(resistances, inside + outside)
    return 1 / np.where(np.greater(total, 0), total, np.nan)[()]


def storage_factors(layers: Sequence[tuple[Numbers, Numbers]]) -> tuple[Numbers, Numbers]:
    """(F_i, F_e) [J m⁻² K⁻¹]: heat through the inner face stored per kelvin that the inner, outer temperature rose.

    `layers` (resistance [m² K W⁻¹], heat capacity per area [J m⁻² K⁻¹]) from inside to outside between the two
    temperatures; a film is a layer without capacity.  Heat stored at a place came through the inner face in the share
    R_e/R of the resistance beyond it, so F_i = Σ C ∫(R_e/R)² and F_e = Σ C ∫(R_i/R)(R_e/R) over each layer [C]; they
    are the thermal mass factors of ISO 9869-1:2014 [M].  One layer: C/3 and C/6."""
    total: Numbers = sum((resistance for resistance, _ in layers), 0.0)
    before: Numbers = 0.0
    own: Numbers = 0.0
    cross: Numbers = 0.0
    for resistance, capacity in layers:
        beyond = total - before - resistance
        own = own + capacity * (beyond**2 + beyond * resistance + resistance**2 / 3)
        cross = cross + capacity * (before * beyond + resistance * (before + beyond) / 2 + resistance**2 / 6)
        before = before + resistance
    return own / total**2, cross / total**2


def storage_correction(
    layers: Sequence[tuple[Numbers, Numbers]], rise_inside: Numbers, rise_outside: Numbers, seconds: Numbers
) -> Numbers:
    """Mean flux [W m⁻²] through the inner face that went into storage while the temperatures rose [K] in `seconds`.

    Subtract it from the mean flux into the inner face to have the steady one: q − (F_i δT_i + F_e δT_e)/t, as
    ISO 9869-1:2014 does [M]; `layers` as in `storage_factors`.  For an outer face reverse them, change places of the
    two rises, and add.  It holds for slow changes, over many of the wall's time constants."""
    inner, outer = storage_factors(layers)
    return (inner * rise_inside + outer * rise_outside) / np.where(np.greater(seconds, 0), seconds, np.nan)[()]


def _apart(difference: Numbers) -> Numbers:
    return np.where(np.equal(difference, 0), np.nan, difference)[()]
