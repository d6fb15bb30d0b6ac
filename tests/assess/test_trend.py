"""Trend of a rise: brought to rated load, slope of Theil and Sen, its interval."""

from __future__ import annotations

from itertools import permutations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import theilslopes

from irsurvey.assess.trend import normalised_rise, theil_sen


def test_rise_at_rated_load_is_that_of_the_worked_example():
    # Bare bolted copper, 40 K at 45 % load: 168 K at rated load with n 1.8, 144 and 197 K with 1.6 and 2.0 [C].
    rise, u = normalised_rise(40.0, 0.45)
    assert rise == pytest.approx(168, abs=0.5)
    assert u == pytest.approx((197 - 144) / 2 / 3**0.5, rel=0.03)  # the band as rectangular; it is curved by 2 %


def test_rise_at_rated_load_stays_and_a_ratio_that_is_none_has_none():
    assert normalised_rise(40.0, 1.0) == (pytest.approx(40.0), pytest.approx(0.0))
    rise, u = normalised_rise(np.array([10.0, 10.0, 10.0]), np.array([0.0, -1.0, np.nan]))
    assert np.isnan(rise).all()
    assert np.isnan(u).all()
    ratios = np.array([0.4, 0.7, 1.05])
    together = normalised_rise(10.0, ratios)
    alone = [normalised_rise(10.0, ratio) for ratio in ratios]
    assert together[0] == pytest.approx([float(one) for one, _ in alone])
    assert together[1] == pytest.approx([float(one) for _, one in alone])


def test_slope_of_a_hand_worked_series():
    """Five values, ten slopes by hand: −.15 −.13 −.08 −.07 −.0575 | −.055 −.045 −.0333 .01 .04, median −.05625.

    Five times have 120 orders, one without an inversion, 4 with one: P(none) = 0.8 %, P(at most one) = 4.2 %, so that
    the interval runs from the first to the last slope."""
    found = theil_sen([1, 2, 3, 4, 5], [1.26, 1.27, 1.12, 1.16, 1.03])
    assert found == (pytest.approx(-0.05625), pytest.approx(-0.15), pytest.approx(0.04))


def test_slope_is_that_of_scipy_and_the_interval_its_normal_approximation_for_many():
    rng = np.random.default_rng(8)
    for n in (3, 7, 25, 60):
        t, y = np.cumsum(rng.uniform(0.2, 2, n)), rng.normal(20, 4, n)
        theirs = theilslopes(y, t, alpha=0.95)
        ours = theil_sen(t, y)
        assert ours.slope == pytest.approx(theirs.slope, rel=1e-12)
        if n >= 25:
            # Exact against approximate count: a few slopes of the 300 and more further out or in.
            width = theirs.high_slope - theirs.low_slope
            assert ours.low == pytest.approx(theirs.low_slope, abs=0.05 * width)
            assert ours.high == pytest.approx(theirs.high_slope, abs=0.05 * width)


@pytest.mark.parametrize("n", [5, 6, 7])
def test_interval_holds_the_true_slope_in_at_least_95_percent_of_all_orders(n):
    """Every order of the deviations is as likely: counted over all of them, without any simulation."""
    deviations = np.array([-3.1, -1.4, -0.2, 0.3, 1.1, 2.7, 4.9])[:n]
    found = [theil_sen(np.arange(n), 2.0 * np.arange(n) + order) for order in permutations(deviations)]
    held = np.mean([low <= 2.0 <= high for _, low, high in found])
    assert held >= 0.95
    assert held < 1.0  # not so wide that it says nothing


def test_four_surveys_have_a_slope_and_no_interval():
    """Four times have 24 orders, so that even from the first to the last slope it is 92 %."""
    slope, low, high = theil_sen([0, 1, 2, 3], [10, 12, 14, 16])
    assert slope == pytest.approx(2.0)
    assert np.isnan([low, high]).all()


def test_one_odd_survey_hardly_moves_the_slope():
    t = np.arange(9.0)
    y = 20 + 1.5 * t
    y[4] += 300
    assert theil_sen(t, y).slope == pytest.approx(1.5, abs=1e-9)  # 28 of 36 slopes are as they were
    assert abs(np.polyfit(t[3:], y[3:], 1)[0] - 1.5) > 10  # what least squares would make of it


def test_without_two_times_there_is_no_slope_and_nan_does_not_count():
    assert np.isnan(theil_sen([], [])).all()
    assert np.isnan(theil_sen([1.0], [5.0])).all()
    assert np.isnan(theil_sen([1.0, 1.0], [5.0, 9.0])).all()
    assert theil_sen([0, 1, 2, 3], [1, np.nan, 5, 7]).slope == theil_sen([0, 2, 3], [1, 5, 7]).slope
    tied = theil_sen([0, 0, 1, 2, 3, 4], [0, 1, 2, 3, 4, 5])
    assert tied.low <= tied.slope <= tied.high


@given(
    st.lists(st.floats(-50, 50), min_size=5, max_size=12),
    st.floats(-5, 5),
    st.floats(0.1, 10),
)
def test_a_line_added_adds_its_slope_and_a_factor_multiplies(values, extra, factor):
    t, y = np.arange(float(len(values))), np.array(values)
    before, after = theil_sen(t, y), theil_sen(t, factor * y + extra * t)
    assert after == pytest.approx([factor * one + extra for one in before], abs=1e-6)
