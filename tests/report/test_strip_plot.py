"""The drawing of a strip: points where the numbers say, ticks at round numbers, nothing drawn of nothing."""

from __future__ import annotations

from dataclasses import replace

import pytest

from irsurvey.model import Estimate, Report, StripReport
from irsurvey.report.axes import BOTTOM, LEFT, RIGHT, TOP
from irsurvey.report.strip_plot import plot


@pytest.fixture
def strip(report: Report) -> StripReport:
    return report.frames[0].strips[0]


def points(line: str) -> list[tuple[float, float]]:
    return [(float(x), float(y)) for x, y in (point.split(",") for point in line.split())]


def test_a_point_stands_where_its_temperature_lies_between_two_ticks(strip: StripReport) -> None:
    drawn = plot(strip)
    assert drawn
    (low, high) = drawn.up[0], drawn.up[-1]
    per_kelvin = (low.at - high.at) / (float(high.text) - float(low.text))
    for (_, y), (_, t) in zip(points(drawn.line), strip.profile, strict=True):
        # coordinates are rounded to 0.1: half of it for the point and, twice as much, for the ticks
        assert low.at - (t - float(low.text)) * per_kelvin == pytest.approx(y, abs=0.15, rel=0)


def test_the_line_runs_from_end_to_end_inside_its_axes(strip: StripReport) -> None:
    drawn = plot(strip)
    assert drawn
    xs, ys = zip(*points(drawn.line), strict=True)
    assert (xs[0], xs[-1]) == (LEFT, RIGHT)
    assert min(ys) >= TOP
    assert max(ys) <= BOTTOM
    assert drawn.level == pytest.approx(ys[0], abs=0.1, rel=0)  # its ends lie on the undisturbed wall


def test_distances_are_metres_with_a_scale_and_pixels_without(strip: StripReport) -> None:
    metres, pixels = plot(strip), plot(replace(strip, length_m=None))
    assert metres
    assert pixels
    assert ([tick.text for tick in metres.across], metres.unit) == (["0.0", "0.1", "0.2", "0.3"], "m")
    assert ([tick.text for tick in pixels.across], pixels.unit) == (["0", "50", "100"], "px")


def test_a_wall_without_a_bridge_is_drawn_flat(strip: StripReport) -> None:
    drawn = plot(replace(strip, profile=tuple((float(x), 18.5 + 0.01 * (x % 2)) for x in range(50))))
    assert drawn
    ys = [y for _, y in points(drawn.line)]
    assert max(ys) - min(ys) < 0.05 * (BOTTOM - TOP)  # 0.01 K of an axis of at least 0.5 K


def test_a_very_long_strip_has_no_more_points_than_can_be_seen(strip: StripReport) -> None:
    drawn = plot(replace(strip, profile=tuple((float(x), 18.0 + x / 1e4) for x in range(5000))))
    assert drawn
    assert 200 <= len(points(drawn.line)) <= 400


@pytest.mark.parametrize("profile", [(), ((0.0, 18.0),), ((0.0, float("nan")), (1.0, float("nan"))), ((2.0, 1.0),) * 3])
def test_nothing_is_drawn_of_nothing(strip: StripReport, profile: tuple[tuple[float, float], ...]) -> None:
    assert plot(replace(strip, profile=profile)) is None


def test_a_strip_of_no_length_harms_nothing(strip: StripReport) -> None:
    drawn = plot(replace(strip, to=strip.from_, length_m=Estimate(0.3, 0.01)))
    assert drawn
    assert drawn.unit == "px"
