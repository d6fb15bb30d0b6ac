"""Moisture at an inner surface: the temperature it must not fall below, and a room's humidity where nobody measured it.

Saturation here is that of ISO 13788, over ice below 0 °C, because frost forms there; the humidity of air (`humid_air`)
refers to liquid water throughout, as instruments do.  The two differ by 0.2 % of pressure at most from 0 to 40 °C.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from irsurvey.constants import ZERO_CELSIUS
from irsurvey.heat import Numbers
from irsurvey.heat.humid_air import vapour_pressure

MOULD_HUMIDITY: Final = 0.8
"""Relative humidity at a surface from which mould grows: ISO 13788 [M]."""
CLASS_STEP: Final = 270.0
"""Vapour pressure [Pa] by which one class's upper bound exceeds the last, at 0 °C and below: ISO 13788 [M]."""

_AT_ZERO: Final = 610.5  # [Pa]
_WATER: Final = (17.269, 237.3)
_ICE: Final = (21.875, 265.5)


def saturation_pressure_13788(t: Numbers) -> Numbers:
    """Saturation vapour pressure [Pa] at t [K], over ice below 0 °C; NaN outside −45…60 °C.

    610.5 exp(17.269θ/(237.3 + θ)), below 0 °C 610.5 exp(21.875θ/(265.5 + θ)), θ [°C]: ISO 13788 [M]."""
    theta = _valid(t) - ZERO_CELSIUS
    (slope, shift), (ice_slope, ice_shift) = _WATER, _ICE
    exponent = np.where(theta < 0, ice_slope * theta / (ice_shift + theta), slope * theta / (shift + theta))
    return np.asarray(_AT_ZERO * np.exp(exponent))[()]


def temperature_of_saturation_13788(pressure: Numbers) -> Numbers:
    """Temperature [K] at which vapour of this pressure [Pa] saturates: the inverse, NaN outside the same range."""
    ratio = np.log(np.where(np.greater(pressure, 0), pressure, np.nan) / _AT_ZERO)
    (slope, shift), (ice_slope, ice_shift) = _WATER, _ICE
    bounded = np.where(ratio < 5, ratio, np.nan)  # 60 °C is 3.5; at the formula's slope its pole would follow
    theta = np.where(bounded < 0, ice_shift * bounded / (ice_slope - bounded), shift * bounded / (slope - bounded))
    return _valid(theta + ZERO_CELSIUS)


def surface_temperature_at(pressure: Numbers, relative_humidity: Numbers) -> Numbers:
    """Surface temperature [K] at which air of vapour pressure [Pa] has this relative humidity at the surface.

    p_sat(T) = p/φ, ISO 13788 clause 5 [M]: φ 0.8 the least against mould, 1 against condensation (glazing, frames).
    NaN for φ outside (0, 1]."""
    possible = np.greater(relative_humidity, 0) & np.less_equal(relative_humidity, 1)
    return temperature_of_saturation_13788(pressure / np.where(possible, relative_humidity, np.nan)[()])


def humidity_excess(humidity_class: Numbers, t_outdoor: Numbers) -> Numbers:
    """Vapour pressure [Pa] of a room above that outdoors: the upper bound of its class, at outdoor air [K].

    270, 540, 810, 1080 Pa for classes 1…4 at 0 °C and below, falling in a line to 0 at 20 °C: ISO 13788 [M].  Class 5
    (laundries, swimming pools) has no upper bound and is NaN, as is any other number: measure there."""
    bounded = np.isin(humidity_class, (1, 2, 3, 4))
    at_zero: Numbers = np.where(bounded, CLASS_STEP * np.asarray(humidity_class), np.nan)[()]
    return at_zero * np.clip((ZERO_CELSIUS + 20 - t_outdoor) / 20, 0, 1)


def vapour_pressure_of_class(humidity_class: Numbers, t_outdoor: Numbers, relative_humidity: Numbers) -> Numbers:
    """Vapour pressure [Pa] of a room of this class, an upper bound: outdoor air's plus `humidity_excess`.

    Outdoor air [K] at `relative_humidity` 0…1 over liquid water.  ISO 13788 [M]; its own safety margin on the excess
    is not added, for the class is already taken at its upper bound."""
    return vapour_pressure(t_outdoor, relative_humidity) + humidity_excess(humidity_class, t_outdoor)


def _valid(t: Numbers) -> Numbers:
    return np.where(np.greater_equal(t, ZERO_CELSIUS - 45) & np.less_equal(t, ZERO_CELSIUS + 60), t, np.nan)[()]
