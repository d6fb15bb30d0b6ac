"""What wind outdoors does to the rise of a part above the air: the factor by which a calm day would raise it."""

from __future__ import annotations

from typing import Final

import numpy as np

from irsurvey.heat import Numbers

REFERENCE_SPEED: Final = 1.0
"""Wind [m s⁻¹] that a rise is brought to: light air, not still air."""
HIGHEST: Final = 10.0
"""Wind [m s⁻¹] above which no rise can be corrected."""
WIND_FACTOR_U: Final = 0.08
"""Relative standard uncertainty of the factor above 1 m/s; where nothing is corrected it has none.

The energy balance of a cylinder in cross-flow (20 to 100 mm, ε 0.8, 5 to 50 K at 1 m/s) departs by up to 7 % from the
power law.  That is no half-width here: parts are no cylinders, wind is gusty, and of a bright part (ε 0.1), which wind
alone cools, the balance asks for up to 24 % more."""

_EXPONENT: Final = 0.448
_GROWS_TO: Final = 7.0


def wind_factor(wind: Numbers) -> Numbers:
    """Rise at 1 m/s over the rise in this wind [–], the load being the same: v^0.448 from 1 to 7 m/s.

    `wind` [m s⁻¹] at the part.  Up to 1 m/s it is 1; from 7 to 10 m/s it stays at its value for 7; above 10 m/s, below
    0 and where the wind is not known it is NaN.  A rule of the trade [M]; it may raise a severity, never lower one."""
    valid = np.where(np.greater_equal(wind, 0) & np.less_equal(wind, HIGHEST), wind, np.nan)[()]
    return np.clip(valid / REFERENCE_SPEED, 1.0, _GROWS_TO) ** _EXPONENT
