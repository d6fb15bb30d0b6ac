"""The rise of a component over the surveys as a small drawing, in the coordinates of an SVG."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date, datetime
from math import ceil, isfinite
from statistics import median

from irsurvey import numbers
from irsurvey.model import TrendReport
from irsurvey.numbers import SI, Style
from irsurvey.report.axes import LEFT, RIGHT, TICKS_UP, Axis, Tick, upwards
from irsurvey.report.style import day as day_in
from irsurvey.texts import say

DAYS_PER_YEAR = 365.2425
"""Of the Gregorian calendar."""

_LEAST_SPAN_K = 2.0
"""The upright axis never spans less, so that noise does not look like a trend."""
_ROOM = 0.07
"""Of the time shown, left free at either end."""
_MOST_YEARS = 6
_TOLD = 6
"""Surveys told one by one in words; of more, the first and the last."""


@dataclass(frozen=True, slots=True)
class Plot:
    """A point for each survey, the line of the trend where there is one, and the ticks of both axes."""

    points: tuple[tuple[float, float], ...]
    line: str  # points of a polyline; "" without a slope
    across: tuple[Tick, ...]
    up: tuple[Tick, ...]
    words: str
    up_unit: str = "K"


def plot(trend: TrendReport, *, style: Style = SI) -> Plot | None:
    """The drawing of one trend; None where there are not two surveys on different days to draw."""
    to = numbers.scale("delta_k", style)
    points = [(day, to.factor * rise) for day, rise in sorted(_dated(trend))]
    if len(points) < 2 or points[0][0] == points[-1][0]:
        return None
    days, rises = [day for day, _ in points], [rise for _, rise in points]
    room = _ROOM * (days[-1] - days[0])
    x = Axis(days[0] - room, days[-1] + room, LEFT, RIGHT)
    ends = _line(days, rises, to.factor * trend.slope_k_per_year.value if trend.slope_k_per_year else None)
    y = upwards([0.0, *rises, *(rise for _, rise in ends)], _LEAST_SPAN_K * to.factor)
    return Plot(
        points=tuple((x.at(day), y.at(rise)) for day, rise in points),
        line=" ".join(f"{x.at(day)},{y.at(rise)}" for day, rise in ends),
        across=_dates(x, days, style),
        up=y.ticks(TICKS_UP, style=style),
        words=_in_words(points, to.symbol, style),
        up_unit=to.symbol,
    )


def _dated(trend: TrendReport) -> Iterator[tuple[int, float]]:
    """Day and rise of each survey; what has no date or no number is not drawn."""
    for when, rise in trend.points:
        try:
            day = datetime.fromisoformat(when).toordinal()
        except ValueError:
            continue
        if isfinite(rise):
            yield day, rise


def _line(days: list[int], rises: list[float], slope: float | None) -> list[tuple[int, float]]:
    """Ends of the line of the Theil–Sen slope [K per year] through the median of what it leaves (Conover 1980)."""
    if slope is None or not isfinite(slope):
        return []
    per_day = slope / DAYS_PER_YEAR
    level = median(rise - per_day * day for day, rise in zip(days, rises, strict=True))
    return [(day, level + per_day * day) for day in (days[0], days[-1])]


def _dates(x: Axis, days: list[int], style: Style) -> tuple[Tick, ...]:
    """The turns of years, or the months of the first and last survey where fewer than two turns lie between."""
    first, last = (date.fromordinal(day) for day in (days[0], days[-1]))
    years = range(first.year + 1, last.year + 1)
    if len(years) < 2:
        return tuple(Tick(x.at(day.toordinal()), _month(day, style)) for day in (first, last))
    step = ceil(len(years) / _MOST_YEARS)
    return tuple(Tick(x.at(date(year, 1, 1).toordinal()), str(year)) for year in years[::step])


def _month(day: date, style: Style) -> str:
    """The month of a day: "2026-01"; the whole day in a style of its own."""
    return f"{day:%Y-%m}" if style.date_format == SI.date_format else day_in(day, style=style)


def _in_words(points: list[tuple[int, float]], symbol: str, style: Style) -> str:
    told = points if len(points) <= _TOLD else [points[0], points[-1]]
    listed = ", ".join(
        f"{day_in(date.fromordinal(day), style=style)} "
        f"{numbers.with_symbol(numbers.number(rise, 2, style=style), symbol)}"
        for day, rise in told
    )
    return say("trend_is", count=len(points), told=listed)
