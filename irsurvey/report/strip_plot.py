"""The profile along a strip as a small drawing: temperature against distance, in the coordinates of an SVG."""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, dist

from irsurvey import numbers
from irsurvey.model import StripReport
from irsurvey.numbers import SI, Style
from irsurvey.report.axes import LEFT, RIGHT, TICKS_ACROSS, TICKS_UP, Axis, Tick, upwards
from irsurvey.texts import say

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
    up_unit: str = "°C"


def plot(strip: StripReport, *, style: Style = SI) -> Plot | None:
    """The drawing of one strip; None where there is no profile to draw."""
    to = numbers.scale("extreme_c", style)
    profile = [(at, to.factor * t + to.shift) for at, t in strip.profile if t == t]  # NaN is not itself
    if len(profile) < 2 or not profile[-1][0] > profile[0][0]:
        return None
    profile = profile[:: ceil(len(profile) / _MOST_POINTS)]
    per_pixel, unit = _scale(strip, style)
    x = Axis(profile[0][0] * per_pixel, profile[-1][0] * per_pixel, LEFT, RIGHT)
    level = to.factor * strip.undisturbed_c.value + to.shift if strip.undisturbed_c else None
    temperatures = [t for _, t in profile]
    y = upwards(temperatures if level is None else [*temperatures, level], _LEAST_SPAN_K * to.factor)
    return Plot(
        line=" ".join(f"{x.at(at * per_pixel)},{y.at(t)}" for at, t in profile),
        level=None if level is None else y.at(level),
        across=x.ticks(TICKS_ACROSS, style=style),
        up=y.ticks(TICKS_UP, style=style),
        unit=unit,
        words=_in_words(
            temperatures, numbers.with_symbol(numbers.number(x.high - x.low, 2, style=style), unit), level, style
        ),
        up_unit=to.symbol,
    )


def _scale(strip: StripReport, style: Style) -> tuple[float, str]:
    """Length of a pixel along the strip and its unit; pixels where there is no scale."""
    pixels = dist(strip.from_, strip.to)
    to = numbers.scale("length_m", style)
    return (to.factor * strip.length_m.value / pixels, to.symbol) if strip.length_m and pixels > 0 else (1.0, "px")


def _in_words(temperatures: list[float], over: str, level: float | None, style: Style) -> str:
    symbol = numbers.unit("extreme_c", style=style)
    low, high = (numbers.decimals(end, 1, style=style) for end in (min(temperatures), max(temperatures)))
    told = {"low": low, "high": high, "unit": symbol, "length": over}
    if level is None:
        return say("strip_is", **told)
    return say("strip_is_level", **told, level=numbers.decimals(level, 1, style=style))
