"""The drawing of a trend: points where date and rise say, a line with the slope, nothing drawn of nothing."""

from __future__ import annotations

from dataclasses import replace
from datetime import date

import pytest
from report.switch_room import trend

from irsurvey.model import Estimate, TrendReport
from irsurvey.report.axes import BOTTOM, LEFT, RIGHT, TOP
from irsurvey.report.trend_plot import DAYS_PER_YEAR, plot

ROUNDING = 0.05
"""Coordinates are rounded to a tenth."""


def test_points_stand_between_the_ticks_of_their_rises_and_years() -> None:
    drawn = plot(trend())
    assert drawn
    low, high = drawn.up[0], drawn.up[-1]
    per_kelvin = (low.at - high.at) / (float(high.text) - float(low.text))
    years = {int(tick.text): tick.at for tick in drawn.across}
    assert list(years) == [2023, 2024, 2025, 2026]
    per_day = (years[2026] - years[2023]) / (date(2026, 1, 1) - date(2023, 1, 1)).days
    for (x, y), (when, rise) in zip(drawn.points, trend().points, strict=True):
        # ticks and points are rounded alike: twice, and carried on beyond the ticks by no more than their distance
        assert low.at - (rise - float(low.text)) * per_kelvin == pytest.approx(y, abs=4 * ROUNDING, rel=0)
        days = (date.fromisoformat(when) - date(2023, 1, 1)).days
        assert years[2023] + days * per_day == pytest.approx(x, abs=4 * ROUNDING, rel=0)
        assert LEFT < x < RIGHT
        assert TOP < y < BOTTOM


def test_the_line_runs_with_the_slope_and_leaves_as_many_points_above_as_below() -> None:
    series = TrendReport(
        tuple(
            (f"{year}-07-01", 10.0 + 3.0 * (year - 2015) + odd)
            for year, odd in zip(range(2015, 2020), (0, 5, 0, -4, 0), strict=True)
        ),
        Estimate(3.0, 0.1),
        2.0,
        4.0,
        None,
        None,
    )
    drawn = plot(series)
    assert drawn
    (x0, y0), (x1, y1) = (tuple(map(float, point.split(","))) for point in drawn.line.split())
    assert (x0, x1) == (drawn.points[0][0], drawn.points[-1][0])
    # 3 K a year over the days between the first and the last survey, in the scale of the upright axis
    low, high = drawn.up[0], drawn.up[-1]
    per_kelvin = (low.at - high.at) / (float(high.text) - float(low.text))
    risen = 3.0 * (date(2019, 7, 1) - date(2015, 7, 1)).days / DAYS_PER_YEAR
    assert (y0 - y1) / per_kelvin == pytest.approx(risen, abs=4 * ROUNDING / per_kelvin, rel=0)
    above = [y < y0 + (y1 - y0) * (x - x0) / (x1 - x0) - 1 for x, y in drawn.points]
    below = [y > y0 + (y1 - y0) * (x - x0) / (x1 - x0) + 1 for x, y in drawn.points]
    assert (above.count(True), below.count(True)) == (1, 1)


def test_the_upright_axis_begins_at_no_rise_so_that_a_small_change_does_not_look_large() -> None:
    drawn = plot(replace(trend(), points=(("2024-01-01", 50.0), ("2025-01-01", 51.0)), slope_k_per_year=None))
    assert drawn
    assert drawn.up[0].text == "0"
    assert abs(drawn.points[0][1] - drawn.points[1][1]) < (BOTTOM - TOP) / 20
    assert drawn.line == ""


def test_surveys_within_two_turns_of_the_year_are_dated_by_their_months() -> None:
    drawn = plot(replace(trend(), points=(("2025-11-02", 5.0), ("2026-01-18T07:12:00+01:00", 9.0))))
    assert drawn
    assert [tick.text for tick in drawn.across] == ["2025-11", "2026-01"]


def test_many_years_do_not_crowd_the_axis() -> None:
    drawn = plot(replace(trend(), points=tuple((f"{year}-01-01", 5.0) for year in range(1990, 2027))))
    assert drawn
    assert len(drawn.across) <= 6
    assert "37 surveys: 1990-01-01 5 K, 2026-01-01 5 K" in drawn.words.replace("\u00a0", " ")


@pytest.mark.parametrize(
    "points",
    [(), (("2025-01-01", 5.0),), (("2025-01-01", 5.0), ("2025-01-01", 6.0)), (("soon", 1.0), ("later", 2.0))],
)
def test_nothing_is_drawn_of_nothing(points: tuple[tuple[str, float], ...]) -> None:
    assert plot(replace(trend(), points=points)) is None


def test_what_has_no_date_or_no_number_is_left_out() -> None:
    drawn = plot(replace(trend(), points=(*trend().points, ("?", 5.0), ("2026-05-01", float("nan")))))
    assert drawn
    assert len(drawn.points) == len(trend().points)
