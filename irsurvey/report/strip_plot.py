"""The profile along a strip as a small drawing: temperature against distance, in the coordinates of an SVG."""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, dist

from irsurvey import numbers
from irsurvey.model import StripReport
from irsurvey.report.axes import LEFT, RIGHT, TICKS_ACROSS, TICKS_UP, Axis, Tick, upwards

_LEAST_SPAN_K = 0.5
"""A temperature axis never spans less, so that noise does not look like a bridge."""
_MOST_POINTS = 400
"""Points of the line: more than a drawing of this size can show."""


@dataclass(frozen=True, slots=True)
class Plot:
    """The line, the undisturbed level where it is known, and the ticks of both axes."""

    line: str  # points of a polyline
    level: float | None
    across: tuple[Tick, ...]
    up: tuple[Tick, ...]
    unit: str  # of the distance
    words: str


def plot(strip: StripReport) -> Plot | None:
    """The drawing of one strip; None where there is no profile to draw."""
    profile = [(at, t) for at, t in strip.profile if t == t]  # NaN is not itself
    if len(profile) < 2 or not profile[-1][0] > profile[0][0]:
        return None
    profile = profile[:: ceil(len(profile) / _MOST_POINTS)]
    per_pixel, unit = _scale(strip)
    x = Axis(profile[0][0] * per_pixel, profile[-1][0] * per_pixel, LEFT, RIGHT)
    level = strip.undisturbed_c.value if strip.undisturbed_c else None
    temperatures = [t for _, t in profile]
    y = upwards(temperatures if level is None else [*temperatures, level], _LEAST_SPAN_K)
    return Plot(
        line=" ".join(f"{x.at(at * per_pixel)},{y.at(t)}" for at, t in profile),
        level=None if level is None else y.at(level),
        across=x.ticks(TICKS_ACROSS),
        up=y.ticks(TICKS_UP),
        unit=unit,
        words=_in_words(temperatures, x.high - x.low, unit, level),
    )


def _scale(strip: StripReport) -> tuple[float, str]:
    """Length of a pixel along the strip and its unit; pixels where there is no scale."""
    pixels = dist(strip.from_, strip.to)
    return (strip.length_m.value / pixels, "m") if strip.length_m and pixels > 0 else (1.0, "px")


def _in_words(temperatures: list[float], length: float, unit: str, level: float | None) -> str:
    low, high = numbers.decimals(min(temperatures), 1), numbers.decimals(max(temperatures), 1)
    over = numbers.with_symbol(numbers.number(length, 2), unit)
    told = f"Temperature along the strip, {low} to {high} °C over {over}"
    return told if level is None else f"{told}; undisturbed wall {numbers.decimals(level, 1)} °C"
