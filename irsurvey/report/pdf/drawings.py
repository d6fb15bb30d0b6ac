"""Small drawings in vectors: the colour band, a profile along a strip, a trend, the bars of a budget."""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache
from typing import TYPE_CHECKING

from irsurvey.report import axes, strip_plot, trend_plot
from irsurvey.report.inks import COLORMAP
from irsurvey.report.pdf import letters
from irsurvey.report.pdf.blocks import Column, beside, paragraph, text
from irsurvey.report.pdf.layout import Piece
from irsurvey.report.pdf.paper import RULE
from irsurvey.report.pdf.runs import DEEP, QUIET, Colour, Face
from irsurvey.report.results import Line
from irsurvey.texts import say

if TYPE_CHECKING:
    from irsurvey.report.pdf.paper import Paper

_STEPS = 128
_AXIS: Colour = (141, 148, 158)
_BAR: Colour = (91, 111, 150)
_TROUGH: Colour = (238, 236, 230)
_LETTERS = Face(6.2, ink=QUIET)
_NAME, _SHARE = 62.0, 12.0  # mm, of the columns beside a bar


def band(x: float, y: float, width: float, height: float) -> Piece:
    """The colours of the pictures from cold to warm."""

    def draw(paper: Paper, _left: float, _top: float) -> None:
        step = width / _STEPS
        for number, colour in enumerate(_colours()):
            paper.block(x + number * step, y, step + (0.1 if number < _STEPS - 1 else 0.0), height, colour)

    return Piece(0.0, draw)


def profile(plot: strip_plot.Plot, unit: str, x: float, width: float) -> Piece:
    """Temperature along a strip."""

    def draw(paper: Paper, left: float, top: float) -> None:
        frame = _Frame(paper, left + x, top, width)
        frame.axes(plot.across, plot.up, unit, say("distance", unit=plot.unit))
        if plot.level is not None:
            frame.path([(axes.LEFT, plot.level), (axes.RIGHT, plot.level)], QUIET, 0.2, dash=1.2)
        frame.path(_points(plot.line), DEEP, 0.45)

    return Piece(_height(width), draw)


def trend(plot: trend_plot.Plot, unit: str, x: float, width: float) -> Piece:
    """A rise over the surveys."""

    def draw(paper: Paper, left: float, top: float) -> None:
        frame = _Frame(paper, left + x, top, width)
        frame.axes(plot.across, plot.up, unit, say("date_of_survey"))
        if plot.line:
            frame.path(_points(plot.line), QUIET, 0.3, dash=1.2)
        for point in plot.points:
            paper.dot(*frame.at(*point), 0.75, DEEP)

    return Piece(_height(width), draw)


def bars(lines: Sequence[Line], *, width: float) -> list[Piece]:
    """Shares of a variance, the longest first."""
    pieces = []
    for line in lines:
        named = paragraph(text(line.name, Face(7)), width=_NAME, gap=0)
        room = width - _NAME - _SHARE - 4

        def draw(paper: Paper, x: float, y: float, line: Line = line, room: float = room) -> None:
            paper.block(x + _NAME + 2, y + 0.9, room, 1.9, _TROUGH)
            paper.block(x + _NAME + 2, y + 0.9, room * line.bar / 100, 1.9, _BAR)

        share = paragraph(text(line.share, Face(7)), x=width - _SHARE, width=_SHARE, gap=0, at_right=True)
        pieces += beside([Column(0, named), Column(0, [Piece(3.4, draw)]), Column(0, share)], gap=0.15)
    return pieces


class _Frame:
    """A drawing of `axes` on paper: its coordinates scaled to a width."""

    def __init__(self, paper: Paper, x: float, y: float, width: float) -> None:
        self.paper, self.x, self.y = paper, x, y
        self.scale = width / axes.WIDTH

    def at(self, x: float, y: float) -> tuple[float, float]:
        return self.x + x * self.scale, self.y + y * self.scale

    def path(self, points: Sequence[tuple[float, float]], ink: Colour, width: float, dash: float = 0.0) -> None:
        if len(points) > 1:
            self.paper.path([self.at(*point) for point in points], ink, width=width, dash=dash)

    def axes(self, across: Sequence[axes.Tick], up: Sequence[axes.Tick], unit: str, along: str) -> None:
        for tick in up:
            self.path([(axes.LEFT, tick.at), (axes.RIGHT, tick.at)], RULE, 0.12)
            self.letters(tick.text, axes.LEFT - 5, tick.at + 4, 1.0)
        for tick in across:
            self.path([(tick.at, axes.BOTTOM), (tick.at, axes.BOTTOM + 4)], _AXIS, 0.2)
            self.letters(tick.text, tick.at, axes.BOTTOM + 16, 0.5)
        corner = [(axes.LEFT, axes.TOP), (axes.LEFT, axes.BOTTOM), (axes.RIGHT, axes.BOTTOM)]
        self.path(corner, _AXIS, 0.2)
        self.letters(unit, axes.LEFT - 5, axes.TOP - 6, 1.0)
        self.letters(along, axes.RIGHT, axes.BOTTOM + 32, 1.0)

    def letters(self, words: str, x: float, y: float, share: float) -> None:
        """A word of which that share lies to the left of x."""
        words = letters.shown(words)
        left, baseline = self.at(x, y)
        self.paper.text(words, left - share * _LETTERS.width(words), baseline, _LETTERS)


def _height(width: float) -> float:
    return axes.HEIGHT * width / axes.WIDTH


def _points(line: str) -> list[tuple[float, float]]:
    pairs = (point.split(",") for point in line.split())
    return [(float(x), float(y)) for x, y in pairs]


@cache
def _colours() -> tuple[Colour, ...]:
    from matplotlib import colormaps

    shades = colormaps[COLORMAP].resampled(_STEPS)
    rows = [[round(255 * part) for part in shades(number)[:3]] for number in range(_STEPS)]
    return tuple((red, green, blue) for red, green, blue in rows)
