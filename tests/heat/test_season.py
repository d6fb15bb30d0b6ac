"""Season sums against worked examples and integrals."""

from __future__ import annotations

import numpy as np
import pytest

from irsurvey.heat.envelope import layers_u_value
from irsurvey.heat.season import DAY, cost, degree_days, season_energy

HOUR = 3600.0


def test_two_days_at_7_5_degrees_are_16_degree_days() -> None:
    """UK base temperature 15.5 °C: 48 h at 7.5 °C = 16 K·d [S]."""
    hours = np.arange(49.0)
    assert degree_days(hours * HOUR, np.full(49, 7.5), 15.5, "heating") == pytest.approx(16, rel=1e-12)


def test_cengel_3_15_loses_926_w_and_22_2_kwh_a_day() -> None:
    """Çengel, example 3.15 [P]: 126 m², R 2.3, films 1/8.29 and 1/34, 25 °C inside, 7 °C outside; printed rounding."""
    heat = 126 * layers_u_value([2.3], inside=1 / 8.29, outside=1 / 34)
    assert heat * (25 - 7) == pytest.approx(926, abs=0.5)
    day = degree_days(np.array([0.0, DAY]), np.array([7.0, 7.0]), 25.0, "heating")
    assert season_energy(heat, day, 1.0) == pytest.approx(22.2, abs=0.05)


def test_a_wall_over_37440_kelvin_hours_loses_650071_wh() -> None:
    """U 0.97 × 17.9 m² × 37 440 K·h = 650 071 Wh [P: published example], rounded to 1 Wh."""
    assert season_energy(0.97 * 17.9, 37_440 / 24, 1.0) * 1000 == pytest.approx(650_071, abs=0.5)


def test_energy_is_24_times_heat_times_degree_days_over_efficiency() -> None:
    """E = 24·ΔU·A·HDD/1000 kWh: 2 W/K and 3000 K·d are 144 kWh, 160 at 90 %; at 0.12 a kWh 19.20."""
    assert season_energy(2.0, 3000.0, 1.0) == pytest.approx(144, rel=1e-12)
    bought = season_energy(2.0, 3000.0, 0.9)
    assert bought == pytest.approx(160, rel=1e-12)
    assert cost(bought, 0.12) == pytest.approx(19.20, rel=1e-12)


def test_a_sine_year_crossing_the_base_has_its_analytic_degree_days() -> None:
    """∫max(A sin, 0) over a year is 365·A/π, either way; hourly readings: 1e-6."""
    seconds = np.arange(365 * 24 + 1) * HOUR
    t = 285.0 + 12 * np.sin(2 * np.pi * seconds / (365 * DAY))
    for sense in ("heating", "cooling"):
        assert degree_days(seconds, t, 285.0, sense) == pytest.approx(365 * 12 / np.pi, rel=1e-6)


def test_heating_counts_below_and_cooling_above_the_base_and_neither_the_other() -> None:
    seconds = np.array([0.0, DAY, 2 * DAY])
    assert degree_days(seconds, np.array([5.0, 5, 5]), 15.0, "heating") == pytest.approx(20, rel=1e-12)
    assert degree_days(seconds, np.array([5.0, 5, 5]), 15.0, "cooling") == 0
    assert degree_days(seconds, np.array([25.0, 25, 25]), 15.0, "cooling") == pytest.approx(20, rel=1e-12)


def test_unequal_steps_are_weighted_by_their_length() -> None:
    """A day at 5 °C read at both ends, then one read every hour."""
    seconds = np.concatenate([[0.0], DAY + np.arange(25) * HOUR])
    assert degree_days(seconds, np.full(26, 5.0), 15.0, "heating") == pytest.approx(20, rel=1e-12)


def test_between_two_readings_the_temperature_runs_in_a_straight_line() -> None:
    """From 15 to 5 °C in one day under a base of 15 °C: a triangle, 5 K·d."""
    assert degree_days(np.array([0.0, DAY]), np.array([15.0, 5.0]), 15.0, "heating") == pytest.approx(5, rel=1e-12)


@pytest.mark.filterwarnings("error")
def test_gaps_and_times_that_do_not_rise_are_nan_and_bases_broadcast() -> None:
    seconds = np.array([0.0, HOUR, 2 * HOUR])
    t = np.array([5.0, 6.0, 7.0])
    assert np.isnan(degree_days(seconds, np.array([5.0, np.nan, 7.0]), 15.0, "heating"))
    assert np.isnan(degree_days(seconds[[0, 2, 1]], t, 15.0, "heating"))
    together = degree_days(seconds, t, np.array([10.0, 15.5]), "heating")
    np.testing.assert_array_equal(together, [degree_days(seconds, t, base, "heating") for base in (10.0, 15.5)])
    assert np.isnan(season_energy(1.0, 3000.0, np.array([0.0, -1.0, np.nan]))).all()


def test_an_unknown_sense_is_a_key_error() -> None:
    with pytest.raises(KeyError):
        degree_days(np.array([0.0, 1.0]), np.array([1.0, 1.0]), 2.0, "drying")
