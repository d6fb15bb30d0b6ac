"""What readings tell of the time before a moment: pure functions of (seconds, values), each running straight between.

Readings further apart than `LONGEST_GAP` tell nothing of the time between them, so that looking back ends there: what
is found is then a lower bound.  Moments in seconds, temperatures in °C or K, differences in K; NaN where the readings
do not tell.
"""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import nan
from typing import Final

import numpy as np
from numpy.typing import NDArray

HOUR: Final = 3600.0
DAY: Final = 24 * HOUR
SHORT_GAP: Final = HOUR
"""Readings up to this far apart are continuous; a day may lack as much at its start (house rule)."""
LONGEST_GAP: Final = 6 * HOUR
"""A quarter of a day: a straight line over more may pass over a turn of the day's temperatures (house rule)."""
SUNSHINE: Final = 120.0
"""Irradiance [W m⁻²] from which the sun shines: WMO-No. 8, of the direct beam (M); any on the surface counts here."""

Series = tuple[Sequence[float], Sequence[float]]
"""Seconds, rising, and the values read then."""


@dataclass(frozen=True, slots=True)
class Held:
    """For how long before a moment something held [s]; `ended`: it did not before that, else nobody knows."""

    seconds: float
    ended: bool


NEVER_READ: Final = Held(nan, False)


def unbroken_since(seconds: Sequence[float], moment: float, longest_gap: float = LONGEST_GAP) -> float:
    """The earliest reading [s] from which they reach to `moment` without a longer gap; NaN where none do."""
    after = bisect_left(seconds, moment)
    if after == len(seconds) or (after == 0 and seconds[0] != moment):
        return nan
    breaks = np.flatnonzero(np.diff(seconds[: after + 1]) > longest_gap)
    first = seconds[int(breaks[-1]) + 1 if breaks.size else 0]
    return first if first <= moment else nan


def extremes(series: Series, start: float, end: float) -> tuple[float, float]:
    """Lowest and highest value from `start` to `end`; NaN where readings do not cover that time."""
    _, values = _course(series, start, end)
    return (float(values.min()), float(values.max())) if values.size else (nan, nan)


def largest_change(series: Series, moment: float, before: float = DAY) -> float:
    """Largest difference from the value at `moment` in the time `before` it [s]."""
    _, values = _course(series, moment - before, moment)
    return float(np.abs(values - values[-1]).max()) if values.size else nan


def least_difference(indoor: Series, outdoor: Series, moment: float, before: float = DAY) -> float:
    """Smallest difference between two series, its magnitude, in the time `before` the moment [s]."""
    (times, inside), (others, outside) = (_course(series, moment - before, moment) for series in (indoor, outdoor))
    if not times.size or not others.size:
        return nan
    nodes = np.union1d(times, others)
    nodes = nodes[nodes >= max(times[0], others[0])]
    difference = np.interp(nodes, times, inside) - np.interp(nodes, others, outside)
    is_crossed = difference.min() < 0 < difference.max()
    return 0.0 if is_crossed else float(np.abs(difference).min())


def difference_held(indoor: Series, outdoor: Series, moment: float, least: float = 10.0) -> Held:
    """How long two series were at least `least` apart, the same one above, until `moment`."""
    start = float(np.maximum(unbroken_since(indoor[0], moment), unbroken_since(outdoor[0], moment)))  # NaN if one is
    if not start <= moment:
        return NEVER_READ
    nodes = np.union1d(_nodes(indoor[0], start, moment), _nodes(outdoor[0], start, moment))
    difference = np.interp(nodes, *indoor) - np.interp(nodes, *outdoor)
    side = 1.0 if difference[-1] >= 0 else -1.0
    return _held(nodes, side * difference - least)


def steady(series: Series, moment: float, limit: float, longest_gap: float = LONGEST_GAP) -> Held:
    """How long a series stayed within `limit` of its value at `moment`, until then."""
    start = unbroken_since(series[0], moment, longest_gap)
    if not start <= moment:
        return NEVER_READ
    nodes = _nodes(series[0], start, moment)
    change = np.interp(nodes, *series)
    change = change - change[-1]
    rising, falling = _held(nodes, limit - change), _held(nodes, limit + change)
    return min(rising, falling, key=lambda held: (held.seconds, not held.ended))


def since_sun(irradiance: Series, moment: float) -> Held:
    """Time since the first reading without sun after the last one with it; 0 in the sun."""
    seconds, values = irradiance
    start = unbroken_since(seconds, moment)
    if not start <= moment:
        return NEVER_READ
    number = bisect_left(seconds, moment)  # the reading at the moment, or the next after it: the sun may be back
    clear = moment
    while number >= 0 and seconds[number] >= start:
        if values[number] >= SUNSHINE:
            return Held(moment - clear, True)
        clear = min(moment, seconds[number])
        number -= 1
    return Held(moment - clear, False)


def since_rain(rain: Series, moment: float) -> Held:
    """Time since the last reading that counted rain since the one before; 0 where the next after the moment does."""
    seconds, values = rain
    start = unbroken_since(seconds, moment)
    if not start <= moment:
        return NEVER_READ
    number = bisect_left(seconds, moment)
    while number >= 0 and seconds[number] >= start:
        if values[number] > 0:
            return Held(max(moment - seconds[number], 0.0), True)
        number -= 1
    return Held(moment - start, False)


def longest_gap(seconds: Sequence[float], start: float, end: float) -> tuple[float, float] | None:
    """The two neighbouring readings furthest apart around `start` to `end`, if more than `SHORT_GAP`."""
    first, last = max(bisect_right(seconds, start) - 1, 0), bisect_left(seconds, end)
    near = seconds[first : last + 1]
    gaps = [(after - before, before) for before, after in pairwise(near)]
    width, before = max(gaps, default=(0.0, 0.0))
    return (before, before + width) if width > SHORT_GAP else None


def _course(series: Series, start: float, end: float) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Times and values from `start` to `end`, both ends interpolated; empty where readings do not cover that time."""
    since = unbroken_since(series[0], end)
    if not since <= start + SHORT_GAP:
        return np.empty(0), np.empty(0)
    nodes = _nodes(series[0], max(since, start), end)
    return nodes, np.interp(nodes, *series)


def _nodes(seconds: Sequence[float], start: float, end: float) -> NDArray[np.float64]:
    """The two ends and the readings between them."""
    inner = seconds[bisect_right(seconds, start) : bisect_left(seconds, end)]
    return np.array([start, *inner, end] if start < end else [end])


def _held(nodes: NDArray[np.float64], margin: NDArray[np.float64]) -> Held:
    """How long a margin that runs straight between its nodes has not been below 0, back from the last one."""
    failing = np.flatnonzero(margin < 0)
    if not failing.size:
        return Held(float(nodes[-1] - nodes[0]), False)
    bad = failing[-1]
    if bad == len(nodes) - 1:
        return Held(0.0, True)
    share = margin[bad + 1] / (margin[bad + 1] - margin[bad])
    since = nodes[bad + 1] - share * (nodes[bad + 1] - nodes[bad])
    return Held(float(nodes[-1] - since), True)
