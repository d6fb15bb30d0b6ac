"""What small drawings in the documents share: their size, where their axes stand, ticks at round numbers.

They are places in the coordinates of a drawing, which the page sets as SVG and the paper as lines: one look, lettering
that stays text, and quick.  A histogram takes 3 ms and 2 kB so, 65 ms and 18 kB as SVG from matplotlib (its figure used
again and again), which is what the whole analysis of a frame takes.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from math import ceil, floor, log10

from irsurvey import numbers
from irsurvey.numbers import SI, Style
from irsurvey.report.scale import round_step

WIDTH, HEIGHT = 360, 190
"""Of a drawing; small, so that its lettering stays legible on a telephone."""
LEFT, RIGHT, TOP, BOTTOM = 46, 352, 18, 150
"""Ends of the axes."""
TICKS_ACROSS, TICKS_UP = 5, 4
"""Most steps between ticks."""

_MARGIN = 0.08
"""Of the range of an axis, left free at either end."""


@dataclass(frozen=True, slots=True)
class Tick:
    """A mark on an axis: where it stands and what it says."""

    at: float
    text: str


@dataclass(frozen=True, slots=True)
class Axis:
    """Where a number stands along an axis that runs from one place of the drawing to another."""

    low: float
    high: float
    first: float
    last: float

    def at(self, value: float) -> float:
        """The place of a number in the drawing."""
        return round(self.first + (self.last - self.first) * (value - self.low) / (self.high - self.low), 1)

    def ticks(self, most: int, *, style: Style = SI) -> tuple[Tick, ...]:
        """Marks at round numbers, no more steps than `most`."""
        step = round_step((self.high - self.low) / most)
        places = max(0, -floor(log10(step)))
        multiples = range(ceil(self.low / step - 1e-9), floor(self.high / step + 1e-9) + 1)
        return tuple(Tick(self.at(k * step), numbers.decimals(k * step, places, style=style)) for k in multiples)


def upwards(values: Iterable[float], least_span: float) -> Axis:
    """The upright axis that holds all values with some room, and never spans less than `least_span`."""
    shown = list(values)
    span = max(max(shown) - min(shown), least_span)
    missing = (span - (max(shown) - min(shown))) / 2 + _MARGIN * span
    return Axis(min(shown) - missing, max(shown) + missing, BOTTOM, TOP)
