"""Water vapour in air: saturation over liquid water, vapour content and dew point.

One convention throughout, also below 0 °C: relative humidity and dew point refer to liquid water (WMO), not to ice;
the two differ by up to 1 K of dew point at −13 °C.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from irsurvey.constants import ZERO_CELSIUS
from irsurvey.heat import Numbers

GAS_CONSTANT: Final = 461.523
"""Specific gas constant of water vapour [J kg⁻¹ K⁻¹]: R = 8.314 462 618 J/(mol K) over M = 18.015 28 g/mol (IAPWS)."""

# Sonntag (1990), Z. Meteorol. 70(5), 340–344, as adopted by WMO-No. 8, for −45…60 °C over liquid water.
_PRESSURE: Final = 611.2  # [Pa]
_SLOPE: Final = 17.62
_SHIFT: Final = 243.12  # [K]
_LOWEST: Final = ZERO_CELSIUS - 45
_HIGHEST: Final = ZERO_CELSIUS + 60


def saturation_pressure(t: Numbers) -> Numbers:
    """Saturation vapour pressure over liquid water [Pa] at t [K]; NaN outside −45…60 °C.  Sonntag (1990), WMO-No. 8.

    Within 0.3 % of Hyland–Wexler over liquid from −20 to 45 °C."""
    theta = np.where((t >= _LOWEST) & (t <= _HIGHEST), t, np.nan)[()] - ZERO_CELSIUS
    return _PRESSURE * np.exp(_SLOPE * theta / (_SHIFT + theta))


def vapour_pressure(t: Numbers, relative_humidity: Numbers) -> Numbers:
    """Partial pressure of water vapour [Pa] in air at t [K]; relative humidity 0…1 over liquid water, NaN outside."""
    fraction = np.where((relative_humidity >= 0) & (relative_humidity <= 1), relative_humidity, np.nan)[()]
    return fraction * saturation_pressure(t)


def vapour_density(t: Numbers, relative_humidity: Numbers) -> Numbers:
    """Water vapour per volume of air [kg m⁻³] at t [K], as an ideal gas; relative humidity 0…1."""
    return vapour_pressure(t, relative_humidity) / (GAS_CONSTANT * t)


def dew_point(t: Numbers, relative_humidity: Numbers) -> Numbers:
    """Dew point over liquid water [K] of air at t [K]; NaN in perfectly dry air, which has none.

    The inverse of `saturation_pressure`, so a surface at the dew point is at saturation exactly; dew points
    below −45 °C continue the formula.  Within 0.045 K of ASHRAE and CoolProp for dew points from 0 to 50 °C."""
    return dew_point_of(vapour_pressure(t, relative_humidity))


def dew_point_of(pressure: Numbers) -> Numbers:
    """Dew point over liquid water [K] of air with that vapour pressure [Pa]; NaN where there is none."""
    ratio = np.log(np.where(np.greater(pressure, 0), pressure, np.nan)[()] / _PRESSURE)
    return ZERO_CELSIUS + _SHIFT * ratio / (_SLOPE - ratio)
