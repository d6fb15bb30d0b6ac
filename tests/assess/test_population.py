"""Population alarm: the limits by number, what they cost in false alarms, and whom they see."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from irsurvey.assess.population import (
    LEAST_SPREAD,
    MEAN,
    MEDIAN,
    ROBUST_COUNT,
    alarm,
    prediction_limit,
)


@pytest.mark.parametrize(("coverage", "limit"), [(0.95, 8.88), (0.99, 10.44)])
def test_limit_of_one_more_value_of_ten(coverage, limit):
    # x̄ + t s √(1 + 1/n): n 10, x̄ 6.0 K, s 1.5 K with Student's t of 9 degrees of freedom, 1.833 and 2.821 (any
    # table of t, one-sided) [C]; given to a hundredth.
    assert prediction_limit(6.0, 1.5, 10, coverage) == pytest.approx(limit, abs=0.005)


def test_one_more_value_keeps_below_the_limit_as_often_as_said():
    rng = np.random.default_rng(20)
    samples = rng.normal(size=(40_000, 9))
    sample, more = samples[:, :8], samples[:, 8]
    below = more <= prediction_limit(sample.mean(axis=1), sample.std(axis=1, ddof=1), 8, 0.95)
    assert below.mean() == pytest.approx(0.95, abs=0.004)  # 3.7 standard deviations of 40 000 draws


def test_limit_is_nan_where_there_is_none_and_broadcasts():
    counts = np.array([1, 2, 10])
    limits = prediction_limit(6.0, 1.5, counts, 0.95)
    assert np.isnan(limits[0])
    assert limits[1:] == pytest.approx([float(prediction_limit(6.0, 1.5, n, 0.95)) for n in (2, 10)], rel=1e-12)
    assert np.isnan(prediction_limit(6.0, -1.0, 10, 0.95))
    assert np.isnan(prediction_limit(6.0, 1.5, 10, [0.0, 1.0])).all()


def test_of_few_the_hottest_is_held_against_the_others():
    """By hand: of 1 … 9 and 20 the others have mean 5 and s = √7.5; t(1 − 0.05/10, 8) = 3.355 (table of t)."""
    how, level = alarm([20.0, *range(1, 10)])
    assert how == MEAN
    assert level == pytest.approx(5 + 3.355 * 7.5**0.5 * (10 / 9) ** 0.5, abs=0.002)  # t to 0.0005 times 2.9
    assert level < 20


def test_for_few_the_alarm_is_the_test_of_grubbs():
    """G = (max − x̄)/s of all n against its critical value (ISO 5725-2, Grubbs 1950): the same decision."""
    rng = np.random.default_rng(3)
    decisions = []
    for _ in range(400):
        n = int(rng.integers(5, ROBUST_COUNT))
        values = rng.normal(20, 4, n)
        values[0] += rng.choice([0.0, 16.0])
        t = stats.t.ppf(1 - 0.05 / n, n - 2)
        critical = (n - 1) / n**0.5 * (t**2 / (n - 2 + t**2)) ** 0.5
        grubbs = (values.max() - values.mean()) / values.std(ddof=1) > critical
        assert (values.max() > alarm(values).level) == grubbs
        decisions.append(grubbs)
    assert 50 < sum(decisions) < 350  # both kinds were tried


def test_with_itself_in_the_sample_no_one_of_ten_could_stand_out_at_99_percent():
    """Why the hottest is left out: (n − 1)/√n is the furthest a value can lie from the mean of n, in s."""
    for n in range(5, 11):
        values = np.array([1e6, *np.linspace(0, 1, n - 1)])
        assert values.max() < prediction_limit(values.mean(), values.std(ddof=1), n, 0.99)
        assert values.max() > alarm(values).level


def test_of_many_median_and_mad_count():
    values = np.arange(1.0, 22.0)  # median 11, absolute deviations 0, 1, 1 … 10, 10: their median 5
    assert alarm(values) == (MEDIAN, pytest.approx(11 + 3.5 * 1.4826 * 5, rel=1e-12))
    assert alarm(values[:-2]).how == MEAN  # 19


@pytest.mark.parametrize("count", [5, 8, 12, 19, 20, 30, 60])
def test_about_one_sound_group_in_twenty_raises_an_alarm(count):
    """5 % below 20; 5.6 % at 20, settling at 5 % above (bounds: 3 standard deviations of 3000 draws more)."""
    groups = np.random.default_rng(count).normal(30.0, 5.0, (3000, count))
    false = np.mean([group.max() > alarm(group).level for group in groups])
    assert 0.03 < false < 0.056 + 0.013


def test_two_bad_ones_among_twenty_do_not_hide_each_other():
    """Median and MAD see both in most groups; the limit for few, used there, would see them less often."""
    groups = np.random.default_rng(1).normal(30.0, 2.0, (1000, ROBUST_COUNT))
    groups[:, :2] += 12.0  # 6 s
    seen = np.mean([(group[:2] > alarm(group).level).all() for group in groups])
    few = [np.sort(group)[:-1] for group in groups]
    limits = prediction_limit([one.mean() for one in few], [one.std(ddof=1) for one in few], 19, 1 - 0.05 / 20)
    assert seen > 0.8
    assert seen > np.mean((groups[:, :2] > limits[:, np.newaxis]).all(axis=1)) + 0.1


@pytest.mark.parametrize("count", [5, 12, 20, 40])
def test_what_is_alike_to_a_tenth_of_a_kelvin_stands_out_by_more_than_that(count):
    values = np.full(count, 20.0)
    values[0] += 0.1
    level = alarm(values).level
    assert level > 20.1 + LEAST_SPREAD
    assert level < 20 + 10 * LEAST_SPREAD  # t(0.99, 3) is 4.5


def test_fewer_than_five_are_no_population_and_nan_does_not_count():
    assert np.isnan(alarm([1.0, 2.0, 3.0, 40.0]).level)
    assert np.isnan(alarm([]).level)
    with_gaps = [1.0, np.nan, 2.0, 3.0, np.inf, 4.0, 5.0]
    assert alarm(with_gaps) == alarm([1.0, 2.0, 3.0, 4.0, 5.0])


def test_alarm_moves_with_the_values_and_grows_with_their_spread():
    values = np.random.default_rng(5).normal(20, 4, 12)
    assert alarm(values + 7).level == pytest.approx(alarm(values).level + 7, rel=1e-9)
    assert alarm(3 * values).level == pytest.approx(3 * alarm(values).level, rel=1e-9)
    assert alarm(values[::-1]) == alarm(values)
