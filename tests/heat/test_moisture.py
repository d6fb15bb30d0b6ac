"""Saturation, mould and humidity classes against ISO 13788's values, PsychroLib and CoolProp."""

from __future__ import annotations

import numpy as np
import psychrolib
import pytest
from CoolProp.CoolProp import HAPropsSI
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.constants import STANDARD_PRESSURE, ZERO_CELSIUS
from irsurvey.heat.humid_air import dew_point, dew_point_of, saturation_pressure, vapour_pressure
from irsurvey.heat.moisture import (
    MOULD_HUMIDITY,
    humidity_excess,
    saturation_pressure_13788,
    surface_temperature_at,
    temperature_of_saturation_13788,
    vapour_pressure_of_class,
)

psychrolib.SetUnitSystem(psychrolib.SI)


def test_saturation_pressures_are_the_handbooks() -> None:
    """Steam tables: 20 °C 2339 Pa, 10 °C 1228 Pa, 0 °C 611 Pa; over ice −10 °C 260 Pa [P].  The formula's authors
    claim no more than 0.2 %, and the last figure's rounding adds as much at −10 °C."""
    t = ZERO_CELSIUS + np.array([20.0, 10.0, 0.0, -10.0])
    assert saturation_pressure_13788(t) == pytest.approx([2339, 1228, 611, 260], rel=0.003)


def test_saturation_over_ice_at_minus_20_degrees_by_hand() -> None:
    """610.5 exp(21.875 · (−20)/245.5) = 610.5 · 0.168288 = 102.74 Pa [C], ISO 13788's formula [M]."""
    assert saturation_pressure_13788(ZERO_CELSIUS - 20) == pytest.approx(102.74, abs=0.005)


def test_saturation_agrees_with_psychrolib_over_water_and_over_ice() -> None:
    """ASHRAE 2017 (Hyland–Wexler): 0.17 % off at 40 °C and 0.50 % over ice at −20 °C, measured, the most in the range;
    either is below 0.06 K of dew point (6 %/K, over ice 9 %/K)."""
    for t_c in np.linspace(0.5, 40, 40):
        outside = psychrolib.GetSatVapPres(t_c)
        assert saturation_pressure_13788(t_c + ZERO_CELSIUS) == pytest.approx(outside, rel=0.0018)
    for t_c in np.linspace(-20, -0.5, 40):
        outside = psychrolib.GetSatVapPres(t_c)
        assert saturation_pressure_13788(t_c + ZERO_CELSIUS) == pytest.approx(outside, rel=0.0051)


def test_the_two_saturations_of_the_package_agree_over_water_to_a_fifth_of_a_percent() -> None:
    """What the module's first lines say of Sonntag's and ISO 13788's formulas, 0…40 °C."""
    t = ZERO_CELSIUS + np.linspace(0, 40, 81)
    np.testing.assert_allclose(saturation_pressure_13788(t), saturation_pressure(t), rtol=0.002)


@pytest.mark.parametrize(
    ("t_c", "percent", "dew_c"),
    [(20, 50, 9.27), (21, 50, 10.18), (20, 60, 12.00), (25, 60, 16.70), (22, 40, 7.78), (0, 80, -2.68)],
)
def test_condensation_temperatures_of_ordinary_rooms(t_c: float, percent: float, dew_c: float) -> None:
    """ISO 13788's formula, two decimals, over ice below 0 °C [C]; PsychroLib and CoolProp, whose frost points are over
    ice as well, differ by 0.13 % of pressure at most and CoolProp by the enhancement of real air: 0.01 K."""
    pressure = percent / 100 * saturation_pressure_13788(t_c + ZERO_CELSIUS)
    mine = surface_temperature_at(pressure, 1.0)
    assert mine - ZERO_CELSIUS == pytest.approx(dew_c, abs=0.012)
    assert mine - ZERO_CELSIUS == pytest.approx(psychrolib.GetTDewPointFromRelHum(t_c, percent / 100), abs=0.01)
    coolprop = HAPropsSI("D", "T", t_c + ZERO_CELSIUS, "P", STANDARD_PRESSURE, "R", percent / 100)
    assert mine == pytest.approx(coolprop, abs=0.01)


def test_the_german_reference_room_needs_12_6_degrees_against_mould() -> None:
    """20 °C, 50 %: 12.6 °C at the surface, which is the temperature factor 0.70 at −5 °C outdoors (DIN 4108-2 [P],
    printed to 0.1 K and 0.01)."""
    needed = surface_temperature_at(vapour_pressure(293.15, 0.5), MOULD_HUMIDITY)
    assert needed - ZERO_CELSIUS == pytest.approx(12.6, abs=0.05)
    assert (needed - 268.15) / 25 == pytest.approx(0.70, abs=0.005)


@given(st.floats(0, 30), st.floats(0.3, 0.7))
def test_at_the_mould_temperature_air_cooled_by_the_wall_has_80_percent(t_c: float, humidity: float) -> None:
    """PsychroLib takes the room's vapour to that temperature: 80 % within 0.4 % of pressure, from two formulas."""
    pressure = psychrolib.GetVapPresFromRelHum(t_c, humidity)
    needed_c = float(surface_temperature_at(pressure, MOULD_HUMIDITY)) - ZERO_CELSIUS
    if needed_c > 0.05:
        assert pressure / psychrolib.GetSatVapPres(needed_c) == pytest.approx(0.8, rel=0.004)
    assert needed_c > psychrolib.GetTDewPointFromVapPres(t_c, pressure)  # mould comes before condensation


@given(st.floats(ZERO_CELSIUS - 45, ZERO_CELSIUS + 60))
def test_the_inverse_returns_the_temperature(t: float) -> None:
    back = temperature_of_saturation_13788(saturation_pressure_13788(t))
    # rounding of the exponential alone; at the ends of the range it may fall outside by it
    assert back == pytest.approx(t, abs=1e-9) or min(abs(t - 228.15), abs(t - 333.15)) < 1e-9


def test_dew_point_of_a_pressure_is_that_of_the_air_it_comes_from() -> None:
    for t_c, humidity in ((21.0, 0.45), (0.0, 0.8)):
        pressure = vapour_pressure(t_c + ZERO_CELSIUS, humidity)
        assert dew_point_of(pressure) == dew_point(t_c + ZERO_CELSIUS, humidity)
    assert np.isnan(dew_point_of(np.array([0.0, -1.0, np.nan]))).all()


def test_humidity_classes_end_at_270_540_810_and_1080_pa_when_it_freezes() -> None:
    """ISO 13788 [M], at 0 °C and below; half of it at 10 °C, none from 20 °C on."""
    classes = np.array([1, 2, 3, 4])
    for outdoor_c in (-10.0, 0.0):
        assert humidity_excess(classes, outdoor_c + ZERO_CELSIUS) == pytest.approx([270, 540, 810, 1080], rel=1e-12)
    assert humidity_excess(3, ZERO_CELSIUS + 10) == pytest.approx(405, rel=1e-12)
    assert humidity_excess(classes, ZERO_CELSIUS + 20) == pytest.approx([0] * 4, abs=1e-9)
    assert humidity_excess(classes, ZERO_CELSIUS + 30) == pytest.approx([0] * 4, abs=1e-9)


def test_a_class_without_an_upper_bound_or_an_unknown_one_is_nan() -> None:
    """Class 5 holds laundries and pools: nothing bounds it, so nothing may be cleared by it."""
    assert np.isnan(humidity_excess(np.array([0, 5, 6, 2.5, np.nan]), ZERO_CELSIUS)).all()
    assert np.isnan(vapour_pressure_of_class(5, ZERO_CELSIUS, 0.8))


def test_a_dwelling_of_class_3_in_frost_has_about_57_percent_at_20_degrees() -> None:
    """0 °C, 85 % outdoors: 0.85 · 611 + 810 = 1329 Pa, by hand; over 2338 Pa 57 %."""
    pressure = vapour_pressure_of_class(3, ZERO_CELSIUS, 0.85)
    assert pressure == pytest.approx(1329, abs=1)
    assert pressure / psychrolib.GetSatVapPres(20.0) == pytest.approx(0.57, abs=0.005)


@pytest.mark.filterwarnings("error")
def test_outside_the_domain_is_nan_and_arrays_give_what_numbers_give() -> None:
    assert np.isnan(saturation_pressure_13788(np.array([228.0, 333.3, np.nan]))).all()
    assert np.isnan(temperature_of_saturation_13788(np.array([0.0, -1.0, 1.0, 1e5, 1e12, np.nan]))).all()
    assert np.isnan(surface_temperature_at(1200.0, np.array([0.0, -0.1, 1.01, np.nan]))).all()
    pressure, humidity = np.array([[300.0], [1168.0]]), np.array([0.8, 1.0])
    singly = [[surface_temperature_at(float(p), float(h)) for h in humidity] for p in pressure[:, 0]]
    np.testing.assert_array_equal(surface_temperature_at(pressure, humidity), singly)
