"""Many like components held against what is usual among them: from which rise on one stands out."""

from __future__ import annotations

from typing import Final, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

LEAST_COUNT: Final = 5
"""Fewer than this are no population: they are twins, compared one by one."""
ROBUST_COUNT: Final = 20
"""From this number on median and MAD count.  The MAD of fewer is itself so uncertain that too many sound groups would
hold one beyond 3.5 of them (simulated: 12 % of groups of 5, 7 % of 10, 6 % of 20); from it on they see two bad ones of
a group, which mask each other in a standard deviation (simulated, both 6 s above: 92 against 72 %)."""
ROBUST_FACTOR: Final = 3.5
"""k of median + k·1.4826·MAD: the modified z-score from which Iglewicz and Hoaglin (1993) call a value an outlier [M];
one normal value in 4000 lies beyond."""
FALSE_ALARMS: Final = 0.05
"""Share of sound groups, fewer than `ROBUST_COUNT`, of which one is said to stand out all the same."""
LEAST_SPREAD: Final = 0.5
"""Standard deviation [K] that the rises of like parts are taken to have at least [house]: spots of alike parts in
pictures of several places agree to some tenths of a kelvin, no better."""

_MAD_TO_SIGMA = 1.4826
"""1/Φ⁻¹(¾): of a normal distribution."""

MEDIAN, MEAN = "median", "mean"


class Alarm(NamedTuple):
    """By what, `MEDIAN` or `MEAN`, and above which value one of a population stands out; NaN: no population."""

    how: str
    level: float


def alarm(values: ArrayLike) -> Alarm:
    """Rise [K] above which one of at least five like components stands out; what is not finite does not count.

    Of 20 or more: median + 3.5·1.4826·MAD.  Of fewer: `prediction_limit` of one more value, by mean and standard
    deviation of all but the hottest, which is the one in question: within its own sample it would hide itself, as no
    value lies further than (n − 1)/√n standard deviations from the mean of n.  The hottest of n is judged, not any
    one, so the coverage is 1 − 0.05/n, and one sound group in twenty raises an alarm: Grubbs' test (1950) for one
    outlier, in the form of an externally studentised residual.
    """
    sample = np.sort(np.asarray(values, dtype=float).ravel())
    sample = sample[np.isfinite(sample)]
    count = sample.size
    if count < LEAST_COUNT:
        return Alarm(MEAN, float("nan"))
    if count >= ROBUST_COUNT:
        middle = float(np.median(sample))
        spread = _MAD_TO_SIGMA * float(np.median(np.abs(sample - middle)))
        return Alarm(MEDIAN, middle + ROBUST_FACTOR * max(spread, LEAST_SPREAD))
    others = sample[:-1]
    spread = max(float(others.std(ddof=1)), LEAST_SPREAD)
    limit = prediction_limit(float(others.mean()), spread, others.size, 1 - FALSE_ALARMS / count)
    return Alarm(MEAN, float(limit))


def prediction_limit(
    mean: ArrayLike, deviation: ArrayLike, count: ArrayLike, coverage: ArrayLike
) -> NDArray[np.float64]:
    """Value that one more of the same normal population stays below with probability `coverage`: x̄ + t s √(1 + 1/n).

    `mean` and standard `deviation` of a sample of `count`, t the one-sided quantile of Student's distribution with
    n − 1 degrees of freedom.  NaN for fewer than two, a negative deviation, a coverage outside (0, 1).  ISO 16269-8.
    """
    from scipy.stats import t

    mean, deviation, count, coverage = (np.asarray(a, dtype=float) for a in (mean, deviation, count, coverage))
    usable = (count >= 2) & (deviation >= 0) & (coverage > 0) & (coverage < 1)
    degrees, n = np.where(usable, count - 1, 1.0), np.where(usable, count, 1.0)
    factor = t.ppf(np.where(usable, coverage, 0.5), degrees) * np.sqrt(1 + 1 / n)
    return np.where(usable, mean + factor * deviation, np.nan)
