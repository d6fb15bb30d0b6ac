"""Humid air against PsychroLib (ASHRAE 2017), CoolProp (ASHRAE RP-1485) and closed forms over liquid water."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import psychrolib
import pytest
from CoolProp.CoolProp import HAPropsSI
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.constants import STANDARD_PRESSURE, ZERO_CELSIUS
from irsurvey.heat.humid_air import dew_point, saturation_pressure, vapour_density, vapour_pressure

psychrolib.SetUnitSystem(psychrolib.SI)

TABLE = Path(__file__).parents[1] / "reference" / "psychrometric_cases.csv"


def cases() -> list[dict[str, float]]:
    with TABLE.open(encoding="utf-8") as lines:
        rows = csv.DictReader(line for line in lines if not line.startswith("#"))
        return [{name: float(value) for name, value in row.items()} for row in rows]


@pytest.mark.parametrize("case", cases(), ids=lambda case: f"{case['t_c']:g} °C")
def test_the_table_of_humid_air_is_met(case: dict[str, float]) -> None:
    """tests/reference/psychrometric_cases.csv, its columns computed with outside libraries."""
    t, humidity = case["t_c"] + ZERO_CELSIUS, case["rh_pct"] / 100
    # the same formula, tabulated to seven figures
    assert saturation_pressure(t) == pytest.approx(case["es_magnus_sonntag_Pa"], rel=1e-6)
    assert vapour_pressure(t, humidity) == pytest.approx(case["pw_magnus_Pa"], rel=1e-6)
    assert dew_point(t, humidity) - ZERO_CELSIUS == pytest.approx(case["tdew_magnus_c"], abs=1e-5)
    # the table rounds the gas constant of vapour to 461.52
    assert vapour_density(t, humidity) * 1e3 == pytest.approx(case["rho_v_magnus_g_m3"], rel=1e-5)
    # other formulas over liquid water: they differ from Sonntag's by at most 0.31 % in this range
    assert saturation_pressure(t) == pytest.approx(case["es_hyland_wexler_liquid_Pa"], rel=0.0031)
    assert saturation_pressure(t) == pytest.approx(case["es_buck1996_Pa"], rel=0.0031)


@pytest.mark.parametrize("case", [c for c in cases() if c["tdew_psychrolib_c"] > 0], ids=lambda c: f"{c['t_c']:g} °C")
def test_dew_points_above_freezing_agree_with_outside_libraries(case: dict[str, float]) -> None:
    """0.02 K is what 0.1 % between saturation formulas makes of a dew point (6 %/K); CoolProp adds the enhancement
    of real air, 0.4 % of the vapour pressure, which nearly cancels: 0.025 K."""
    t, humidity = case["t_c"] + ZERO_CELSIUS, case["rh_pct"] / 100
    mine = dew_point(t, humidity)
    assert mine - ZERO_CELSIUS == pytest.approx(psychrolib.GetTDewPointFromRelHum(case["t_c"], humidity), abs=0.02)
    assert mine == pytest.approx(HAPropsSI("D", "T", t, "P", STANDARD_PRESSURE, "R", humidity), abs=0.025)


def test_dew_points_from_freezing_to_fifty_degrees_stay_within_the_claim() -> None:
    """The docstring's 0.045 K, over air of 5…50 °C and 20…100 %: 0.3 % of saturation pressure at 6.5 %/K."""
    for t_c in np.linspace(5, 50, 10):
        for humidity in np.linspace(0.2, 1, 9):
            outside = psychrolib.GetTDewPointFromRelHum(t_c, humidity)
            if outside > 0:
                assert dew_point(t_c + ZERO_CELSIUS, humidity) - ZERO_CELSIUS == pytest.approx(outside, abs=0.045)


@pytest.mark.parametrize(
    ("t_c", "percent", "dew_c"),
    [(20, 50, 9.26), (21, 50, 10.18), (20, 60, 12.00), (25, 60, 16.70), (22, 40, 7.78), (0, 80, -3.04)],
)
def test_dew_points_of_ordinary_rooms(t_c: float, percent: float, dew_c: float) -> None:
    """Computed with ISO 13788's and Sonntag's formulas over liquid water, two decimals, which agree within 0.01 K."""
    assert dew_point(t_c + ZERO_CELSIUS, percent / 100) - ZERO_CELSIUS == pytest.approx(dew_c, abs=0.015)


def test_below_freezing_the_dew_point_is_over_liquid_water_not_over_ice() -> None:
    """0 °C, 80 %: PsychroLib gives −2.68 °C over ice where the same vapour's dew point over water is −3.04 °C."""
    over_ice = psychrolib.GetTDewPointFromVapPres(0.0, 0.8 * 611.2)
    assert over_ice == pytest.approx(-2.68, abs=0.01)
    assert dew_point(ZERO_CELSIUS, 0.8) - ZERO_CELSIUS == pytest.approx(over_ice - 0.36, abs=0.01)


@given(st.floats(ZERO_CELSIUS - 44, ZERO_CELSIUS + 60), st.floats(0.01, 1))
def test_a_surface_at_the_dew_point_is_at_saturation(t: float, humidity: float) -> None:
    dew = dew_point(t, humidity)
    if dew >= ZERO_CELSIUS - 45:
        # an exact inverse, up to rounding
        assert saturation_pressure(dew) == pytest.approx(vapour_pressure(t, humidity), rel=1e-11)
    assert dew <= t + 1e-9


def test_outside_the_domain_is_nan() -> None:
    assert np.isnan(saturation_pressure(np.array([227.0, 334.0, np.nan]))).all()
    assert np.isnan(vapour_pressure(293.15, np.array([-0.01, 1.01, np.nan]))).all()
    assert np.isnan(dew_point(293.15, 0.0))


def test_arrays_give_what_numbers_give() -> None:
    t, humidity = np.array([[260.0], [293.15]]), np.array([0.0, 0.4, 1.0, 1.2])
    for function in (vapour_pressure, vapour_density, dew_point):
        singly = [[function(float(a), float(b)) for b in humidity] for a in t[:, 0]]
        np.testing.assert_array_equal(function(t, humidity), singly)
