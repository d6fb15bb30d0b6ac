"""What a heat loss costs in a season, from degree days: an estimate, the same loss all season and no sun."""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from irsurvey.heat import Numbers

DAY: Final = 86_400.0
"""Seconds."""
KWH: Final = 3.6e6
"""Joules."""


def degree_days(seconds: NDArray[np.float64], t_outdoor: NDArray[np.float64], t_base: Numbers, sense: str) -> Numbers:
    """Degree days [K d]: max(T_base − T, 0) integrated over time for "heating", max(T − T_base, 0) for "cooling".

    `seconds` (n,) in rising order and `t_outdoor` (…, n) [K] at those times, between which it runs in straight lines;
    `t_base` (…) [K].  NaN where a temperature is NaN or times do not rise."""
    sign = {"heating": 1.0, "cooling": -1.0}[sense]
    lacking = np.maximum(sign * (np.asarray(t_base)[..., None] - t_outdoor), 0)
    steps = np.diff(seconds)
    days = np.where(steps > 0, steps, np.nan) / DAY
    total: NDArray[np.float64] = np.sum(days * (lacking[..., 1:] + lacking[..., :-1]) / 2, axis=-1)
    return total[()]


def season_energy(heat: Numbers, degree_days: Numbers, efficiency: Numbers) -> Numbers:
    """Energy of a season [kWh] for a heat loss per kelvin [W K⁻¹] = ΔU·A: 24·ΔU·A·DD/1000 over the efficiency.

    `efficiency` of the heating, or the seasonal performance factor of the cooling; NaN where it is not positive."""
    return heat * degree_days * DAY / KWH / np.where(np.greater(efficiency, 0), efficiency, np.nan)[()]


def cost(kwh: Numbers, price: Numbers) -> Numbers:
    """What that energy costs, in the currency of the price per kWh."""
    return kwh * price
