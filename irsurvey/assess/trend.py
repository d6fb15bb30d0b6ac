"""A rise over the years: brought to one load first, then its slope, robust against a single odd survey."""

from __future__ import annotations

from math import nan
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.assess.twins import LOAD_EXPONENT, LOAD_EXPONENT_U, load_factor

_TAIL = 0.025
"""Probability left at each side of a 95 % interval."""


class Slope(NamedTuple):
    """A slope and the ends of its 95 % interval, per unit of time; NaN where there is none."""

    slope: float
    low: float
    high: float


def normalised_rise(
    delta: ArrayLike,
    load_ratio: ArrayLike,
    exponent: ArrayLike = LOAD_EXPONENT,
    exponent_u: ArrayLike = LOAD_EXPONENT_U,
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """A rise [K] brought to rated load, ΔT·(load/rated)^−n, and the standard uncertainty [K] that n leaves in it.

    n is 1.6 to 2.0, taken as rectangular.  Both NaN unless the ratio is positive.
    """
    rise = np.asarray(delta, dtype=float) / load_factor(load_ratio, exponent)
    ratio = np.asarray(load_ratio, dtype=float)
    per_exponent = rise * np.log(np.where(ratio > 0, ratio, np.nan))
    return rise, np.asarray(np.abs(per_exponent) * exponent_u)


def theil_sen(times: ArrayLike, values: ArrayLike) -> Slope:
    """Median of the slopes of all pairs, and its distribution-free 95 % interval; pairs at one time do not count.

    The interval runs between the slopes so far from either end that Kendall's count of inversions, exact for n distinct
    times, leaves at most 2.5 % beyond each: at least 95 %, and none at all (NaN) for fewer than five.
    Theil (1950); Sen (1968), Journal of the American Statistical Association 63:1379.
    """
    t, y = np.asarray(times, dtype=float), np.asarray(values, dtype=float)
    known = np.isfinite(t) & np.isfinite(y)
    t, y = t[known], y[known]
    first, second = np.triu_indices(t.size, 1)
    apart = t[second] != t[first]
    slopes = np.sort((y[second] - y[first])[apart] / (t[second] - t[first])[apart])
    if slopes.size == 0:
        return Slope(nan, nan, nan)
    # With ties in time: counted for as many times as differ, which leaves out fewer.
    beyond = _left_out(np.unique(t).size)
    if beyond is None:
        return Slope(float(np.median(slopes)), nan, nan)
    return Slope(float(np.median(slopes)), float(slopes[beyond]), float(slopes[-1 - beyond]))


def _left_out(count: int) -> int | None:
    """How many slopes an interval may leave out at each end: the most k with P(inversions ≤ k) ≤ 2.5 %; None: no k.

    The inversions of a random order of n are distributed as a sum of independent uniform numbers 0…i, i < n.
    """
    distribution = np.ones(1)
    for i in range(1, count):
        distribution = np.convolve(distribution, np.full(i + 1, 1 / (i + 1)))
    within = np.flatnonzero(np.cumsum(distribution) <= _TAIL)
    return int(within[-1]) if within.size else None
