"""What readings tell of the time before a moment, on series whose answers are plain to work out by hand.

Readings are (hour, value); between them a straight line.  There is no outside authority: what each figure means is
stated beside it, and a search minute by minute finds the same.
"""

from __future__ import annotations

from math import isnan

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.survey import history
from irsurvey.survey.history import Held, Series

H = 3600.0
ULP = 1e-12
"""Relative: a straight line and a difference are a few roundings of a double (2e-16 each)."""


def series(*readings: tuple[float, float]) -> Series:
    return tuple(hour * H for hour, _ in readings), tuple(value for _, value in readings)


def hours(held: Held) -> tuple[float, bool]:
    return held.seconds / H, held.ended


DAY = series((0, 0), (6, 5), (12, 10), (18, 7), (24, 4))
ROOM = series((0, 20), (6, 20), (12, 20), (18, 20), (24, 20))


@pytest.mark.parametrize(
    ("readings", "moment", "since"),
    [
        ([0, 1, 2, 3], 3, 0),
        ([0, 1, 2, 3], 2.5, 0),
        ([0, 6, 12], 12, 0),  # six hours apart are bridged
        ([0, 7, 9, 12], 10, 7),  # seven are not
        ([0, 7, 14], 7, 7),  # met exactly
        ([5], 5, 5),
    ],
)
def test_readings_reach_back_to_the_last_long_gap(readings: list[float], moment: float, since: float) -> None:
    assert history.unbroken_since([hour * H for hour in readings], moment * H) == since * H


@pytest.mark.parametrize(("readings", "moment"), [([0, 1], 2), ([1, 2], 0), ([0, 7], 3)])
def test_readings_that_do_not_reach_a_moment_tell_nothing_about_it(readings: list[float], moment: float) -> None:
    seconds = [hour * H for hour in readings]
    flat = (seconds, [0.0] * len(seconds))
    assert isnan(history.unbroken_since(seconds, moment * H))
    assert isnan(history.largest_change(flat, moment * H, before=H))
    assert isnan(history.extremes(flat, moment * H, moment * H)[0])
    assert isnan(history.least_difference(flat, ROOM, moment * H, before=H))
    assert isnan(history.least_difference(ROOM, flat, moment * H, before=H))
    for held in (
        history.difference_held(flat, ROOM, moment * H),
        history.difference_held(ROOM, flat, moment * H),
        history.steady(flat, moment * H, 1.0),
        history.since_sun(flat, moment * H),
        history.since_rain(flat, moment * H),
    ):
        assert isnan(held.seconds)


def test_extremes_count_the_straight_lines_at_both_ends() -> None:
    assert history.extremes(DAY, 0, 24 * H) == (0, 10)
    assert history.extremes(DAY, 3 * H, 15 * H) == (2.5, 10)
    assert history.extremes(DAY, 15 * H, 21 * H) == (5.5, 8.5)
    assert history.extremes(DAY, 6 * H, 6 * H) == (5, 5)


def test_the_largest_change_is_from_the_moment_itself() -> None:
    assert history.largest_change(DAY, 24 * H) == 6  # 10 at noon, 4 now
    assert history.largest_change(DAY, 24 * H, before=9 * H) == 4.5  # 8.5 nine hours ago


def test_the_least_difference_is_of_the_whole_day() -> None:
    assert history.least_difference(ROOM, DAY, 24 * H) == 10  # at noon
    assert history.least_difference(DAY, ROOM, 24 * H) == 10
    warmer = series((0, 25), (6, 15), (12, 15), (18, 15), (24, 15))
    assert history.least_difference(ROOM, warmer, 24 * H) == 0  # it crosses 20 at three o'clock


def test_a_day_may_lack_its_first_hour_and_no_more() -> None:
    for start, value in ((1.0, 10.0), (1.1, None)):
        late = series((start, 1), (6, 5), (12, 10), (18, 7), (24, 4))
        found = history.least_difference(ROOM, late, 24 * H), history.largest_change(late, 24 * H)
        assert found == (10, 6) if value else all(map(isnan, found))


@pytest.mark.parametrize(
    ("outdoor", "expected"),
    [
        # room at 20: 10 K are left where outdoors crosses 10
        ([(0, 15), (6, 5), (12, 5)], (9, True)),  # half-way between 0 and 6
        ([(0, 5), (6, 5), (12, 5)], (12, False)),  # as far back as there are readings
        ([(0, 5), (6, 5), (12, 11)], (0, True)),
        ([(0, 5), (6, 5), (12, 10)], (12, False)),  # 10 K are enough
        ([(0, 35), (6, 5), (12, 5)], (7, True)),  # from 15 K below to 15 K above: 10 K above at 5 h
        ([(0, 35), (6, 35), (12, 35)], (12, False)),  # a cooled building
        ([(3, 5), (9, 5), (12, 5)], (9, False)),  # the shorter of two logs
        ([(-9, 5), (6, 5), (12, 5)], (6, False)),  # a long gap before 6
    ],
)
def test_how_long_the_difference_was_held(outdoor: list[tuple[float, float]], expected: tuple[float, bool]) -> None:
    found = hours(history.difference_held(ROOM, series(*outdoor), 12 * H, least=10))
    assert found == (pytest.approx(expected[0], rel=ULP), expected[1])


@pytest.mark.parametrize(
    ("outdoor", "expected"),
    [
        ([(0, 0), (4, 6), (8, 9), (12, 10)], (12 - (4 + 4 * 2 / 3), True)),  # 2 K below the last at 8 °C
        ([(0, 14), (4, 14), (8, 10), (12, 10)], (6, True)),  # 12 °C half-way between 4 and 8
        ([(0, 8), (4, 12), (8, 10), (12, 10)], (12, False)),  # exactly 2 K is within
        ([(0, 0), (4, 20), (8, 10), (12, 10)], (12 - (8 - 0.8), True)),  # 12 °C a fifth of the way from 10 to 20
    ],
)
def test_how_long_the_air_was_steady(outdoor: list[tuple[float, float]], expected: tuple[float, bool]) -> None:
    found = hours(history.steady(series(*outdoor), 12 * H, 2.0))
    assert found == (pytest.approx(expected[0], rel=ULP), expected[1])


@pytest.mark.parametrize(
    ("irradiance", "expected"),
    [
        ([0, 300, 500, 130, 100, 0, 0, 0], (2.5, True)),  # clear at four o'clock for sure
        ([0, 0, 0, 0, 0, 0, 119, 0], (6.5, False)),  # none on record
        ([0, 0, 0, 0, 0, 0, 120, 0], (0, True)),
        ([0, 0, 0, 0, 0, 0, 0, 200], (0, True)),  # back by the next reading: since when nobody knows
    ],
)
def test_sun_is_over_at_the_first_reading_without_it(irradiance: list[float], expected: tuple[float, bool]) -> None:
    assert hours(history.since_sun(series(*enumerate(irradiance)), 6.5 * H)) == expected


@pytest.mark.parametrize(
    ("rain", "expected"),
    [
        ([0, 0, 0.4, 0, 0, 0, 0, 0], (4.5, True)),  # what the reading at two o'clock counted
        ([0, 0, 0, 0, 0, 0, 0, 0], (6.5, False)),
        ([0, 0, 0, 0, 0, 0, 0, 0.2], (0, True)),  # fell since six o'clock
    ],
)
def test_rain_is_over_at_the_reading_that_counted_it(rain: list[float], expected: tuple[float, bool]) -> None:
    assert hours(history.since_rain(series(*enumerate(rain)), 6.5 * H)) == expected


def test_a_gap_is_told_with_the_readings_around_it() -> None:
    seconds = [hour * H for hour in (0, 1, 2.5, 3, 5, 6)]
    assert history.longest_gap(seconds, 2 * H, 2 * H) == (1 * H, 2.5 * H)
    assert history.longest_gap(seconds, 0, 6 * H) == (3 * H, 5 * H)
    assert history.longest_gap(seconds, 5.5 * H, 5.5 * H) is None
    assert history.longest_gap(seconds, 0.5 * H, 0.5 * H) is None  # an hour is no gap
    assert history.longest_gap(seconds, 2.5 * H, 2.5 * H) is None  # met exactly


curves = st.lists(st.floats(-20, 40), min_size=13, max_size=13)


@given(indoor=curves, outdoor=curves, limit=st.floats(0.5, 15))
def test_a_search_minute_by_minute_finds_the_same(indoor: list[float], outdoor: list[float], limit: float) -> None:
    room, air = series(*enumerate(indoor)), series(*((hour, value) for hour, value in enumerate(outdoor)))
    minutes = np.arange(0, 12 * 60 + 1) * 60.0
    inside, outside = np.interp(minutes, *room), np.interp(minutes, *air)
    held = history.difference_held(room, air, 12 * H, limit)
    steady = history.steady(air, 12 * H, limit)
    for found, fails in ((held, np.abs(inside - outside) < limit), (steady, np.abs(outside - outside[-1]) > limit)):
        last = np.flatnonzero(fails)
        if not found.ended:
            assert not last.size
        elif last.size:
            # one minute: the step of the search; a failure between two minutes may be missed by it
            assert found.seconds <= 12 * H - minutes[last[-1]] + 1e-6
            assert not fails[minutes > 12 * H - found.seconds + 1e-6].any()
    low, high = history.extremes(air, 0, 12 * H)
    assert (low, high) == (outside.min(), outside.max())
    least = history.least_difference(room, air, 12 * H, before=12 * H)
    # the difference goes by at most 120 K an hour, 2 K from one minute to the next
    assert np.abs(inside - outside).min() - 2 <= least <= np.abs(inside - outside).min() + 1e-9


@given(outdoor=curves, later=st.floats(-1e9, 1e9))
def test_figures_do_not_depend_on_the_date(outdoor: list[float], later: float) -> None:
    here = series(*enumerate(outdoor))
    there = tuple(second + later for second in here[0]), here[1]
    moment = 12 * H
    # 1e-6 of a second in 1e9: a double has 1e-7 left; on curves of 60 K an hour that is nothing in kelvin
    assert history.steady(there, moment + later, 3.0).seconds == pytest.approx(
        history.steady(here, moment, 3.0).seconds, abs=1e-3
    )
    assert history.largest_change(there, moment + later, 12 * H) == pytest.approx(
        history.largest_change(here, moment, 12 * H), abs=1e-6
    )
