"""The profile along a strip as a small drawing: temperature against distance, in the coordinates of an SVG."""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, dist, floor, log10

from irsurvey import numbers
from irsurvey.model import StripReport
from irsurvey.report.scale import round_step

WIDTH, HEIGHT = 360, 190
"""Of the drawing; small, so that its lettering stays legible on a telephone."""
LEFT, RIGHT, TOP, BOTTOM = 46, 352, 18, 150
"""Ends of the axes."""

_LEAST_SPAN_K = 0.5
"""A temperature axis never spans less, so that noise does not look like a bridge."""
_TICKS_X, _TICKS_Y = 5, 4
"""Most steps between ticks."""
_MOST_POINTS = 400
"""Points of the line: more than a drawing of this size can show."""


@dataclass(frozen=True, slots=True)
class Tick:
    """A mark on an axis: where it stands and what it says."""

    at: float
    text: str


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
    start, end = profile[0][0] * per_pixel, profile[-1][0] * per_pixel
    level = strip.undisturbed_c.value if strip.undisturbed_c else None
    low, high = _range([t for _, t in profile], level)

    def x(distance: float) -> float:
        return round(LEFT + (RIGHT - LEFT) * (distance - start) / (end - start), 1)

    def y(temperature: float) -> float:
        return round(BOTTOM - (BOTTOM - TOP) * (temperature - low) / (high - low), 1)

    return Plot(
        line=" ".join(f"{x(at * per_pixel)},{y(t)}" for at, t in profile),
        level=None if level is None else y(level),
        across=tuple(Tick(x(at), text) for at, text in _ticks(start, end, _TICKS_X)),
        up=tuple(Tick(y(at), text) for at, text in _ticks(low, high, _TICKS_Y)),
        unit=unit,
        words=_in_words([t for _, t in profile], end - start, unit, level),
    )


def _scale(strip: StripReport) -> tuple[float, str]:
    """Length of a pixel along the strip and its unit; pixels where there is no scale."""
    pixels = dist(strip.from_, strip.to)
    return (strip.length_m.value / pixels, "m") if strip.length_m and pixels > 0 else (1.0, "px")


def _range(temperatures: list[float], level: float | None) -> tuple[float, float]:
    shown = temperatures if level is None else [*temperatures, level]
    missing = max(0.0, _LEAST_SPAN_K - (max(shown) - min(shown))) / 2
    margin = 0.08 * max(max(shown) - min(shown), _LEAST_SPAN_K)
    return min(shown) - missing - margin, max(shown) + missing + margin


def _ticks(low: float, high: float, most: int) -> list[tuple[float, str]]:
    step = round_step((high - low) / most)
    places = max(0, -floor(log10(step)))
    multiples = range(ceil(low / step - 1e-9), floor(high / step + 1e-9) + 1)
    return [(multiple * step, numbers.decimals(multiple * step, places)) for multiple in multiples]


def _in_words(temperatures: list[float], length: float, unit: str, level: float | None) -> str:
    low, high = numbers.decimals(min(temperatures), 1), numbers.decimals(max(temperatures), 1)
    over = numbers.with_symbol(numbers.number(length, 2), unit)
    told = f"Temperature along the strip, {low} to {high} °C over {over}"
    return told if level is None else f"{told}; undisturbed wall {numbers.decimals(level, 1)} °C"
