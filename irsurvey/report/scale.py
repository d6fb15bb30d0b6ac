"""The colour scale beside a picture, with its ticks in °C or K."""

from __future__ import annotations

from math import ceil, floor, log10

import numpy as np

from irsurvey.numbers import SI, Style, decimals, expressed
from irsurvey.report.inks import DARK, LEVELS, LIGHT, Pixels, lettering

LEAST_HEIGHT = 160
"""A scale lower than this many pixels has no room for its ticks."""

_WIDTH = 92
_BAR = slice(12, 28)  # columns
_TICK, _TEXT = 5, 37  # length of a tick; column where its number starts
_TOP, _BOTTOM = 34, 10  # rows left above and below the bar
_SIZE = 15  # of the lettering
_NO_TENTHS = 1000.0  # from here on there is no room for tenths
_ROOM = 24  # rows between two numbers


def strip(
    height: int, low: float, high: float, beyond: tuple[bool, bool], *, unit: str = "°C", style: Style = SI
) -> Pixels:
    """The scale as a block of ink numbers, `height` rows; the light ink alone where `low` and `high` are NaN.

    Its ends carry the display range itself, with ≤ or ≥ where the frame goes on beyond (`beyond`: below,
    above); between them stand round numbers.  `unit` is that of `low` and `high`, "°C" or "K"; they are shown in that
    of the style."""
    block = np.full((height, _WIDTH), LIGHT, dtype=np.uint8)
    if not low < high:
        return block
    to = expressed(unit, style)
    low, high = (to.factor * end + to.shift for end in (low, high))
    ends = 1 if max(abs(low), abs(high)) < _NO_TENTHS else 0
    rows = height - _TOP - _BOTTOM
    block[_TOP - 1 : _TOP + rows + 1, _BAR.start - 1 : _BAR.stop + 1] = DARK
    block[_TOP : _TOP + rows, _BAR] = np.rint(np.linspace(LEVELS - 1, 0, rows))[:, np.newaxis]

    def mark(temperature: float, text: str) -> None:
        row = _TOP + round((rows - 1) * (high - temperature) / (high - low))
        block[row, _BAR.stop : _BAR.stop + _TICK] = DARK
        word = lettering(text, _SIZE)[:, : _WIDTH - _TEXT]
        top = row - word.shape[0] // 2
        block[top : top + word.shape[0], _TEXT : _TEXT + word.shape[1]] = word

    below, above = beyond
    mark(high, ("≥\u2009" if above else "") + decimals(high, ends, style=style))
    mark(low, ("≤\u2009" if below else "") + decimals(low, ends, style=style))
    step = round_step((high - low) * _ROOM * 1.3 / rows)
    places = max(0, -floor(log10(step)))
    margin = (high - low) * _ROOM / rows
    for multiple in range(ceil((low + margin) / step), floor((high - margin) / step) + 1):
        mark(multiple * step, decimals(multiple * step, places, style=style))
    word = lettering(to.symbol, _SIZE)
    block[4 : 4 + word.shape[0], _BAR.start : _BAR.start + word.shape[1]] = word
    return block


def round_step(at_least: float) -> float:
    """The smallest of …, 0.1, 0.2, 0.5, 1, 2, 5, 10, … that is not below `at_least`."""
    decade = 10.0 ** floor(log10(at_least))
    return next(factor * decade for factor in (1, 2, 5, 10) if factor * decade >= at_least * (1 - 1e-9))
