"""Flux, sign and resistance at a surface against textbook examples and the definitions of the report."""

from __future__ import annotations

from math import pi

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import constants, optimize

from irsurvey.constants import STEFAN_BOLTZMANN, ZERO_CELSIUS
from irsurvey.heat.convection import film_coefficient
from irsurvey.heat.radiation import radiative_coefficient, radiative_flux
from irsurvey.heat.surface import mean_radiant, outward_sign, surface_flux, surface_resistance

KELVIN_273 = 0.15 / 273
"""Textbooks take 0 °C as 273 K; a difference of fourth powers then moves by about three times this, relative."""


def celsius(*temperatures: float) -> tuple[float, ...]:
    return tuple(t + ZERO_CELSIUS for t in temperatures)


def test_stefan_boltzmann_is_five_point_six_seven_e_minus_eight() -> None:
    """CODATA by way of scipy; 5.67e-7 is a slip met in public code."""
    assert pytest.approx(constants.Stefan_Boltzmann, rel=1e-9) == STEFAN_BOLTZMANN


@given(st.floats(200, 600), st.floats(200, 600), st.floats(0.01, 1))
def test_radiative_coefficient_times_difference_is_the_radiative_flux(a: float, b: float, emissivity: float) -> None:
    """An algebraic identity: only the cancellation of two fourth powers may show (1e-16 of 7000 W/m²)."""
    flux = radiative_flux(a, b, emissivity)
    assert radiative_coefficient(a, b, emissivity) * (a - b) == pytest.approx(flux, rel=1e-9, abs=1e-10)


def test_radiative_coefficient_at_equal_temperatures_is_the_derivative() -> None:
    """4εσT³, 5.7 W/m²K for ε 1 at 20 °C: common practice's "about 6"."""
    assert radiative_coefficient(293.15, 293.15, 1.0) == pytest.approx(4 * STEFAN_BOLTZMANN * 293.15**3, rel=1e-12)


def test_holman_1_6_pipe() -> None:
    """Holman, example 1.6: pipe 5 cm at 50 °C in air and walls of 20 °C, ε 0.8, h 6.5: 55.67 W/m."""
    per_metre = pi * 0.05 * surface_flux(*celsius(50, 20, 20), 0.8, 6.5)
    assert per_metre == pytest.approx(55.67, rel=2 * KELVIN_273)


def test_cengel_1_10_person() -> None:
    """Çengel, example 1.10: 1.6 m² at 29 °C in 20 °C air and walls, ε 0.95, h 6: 86.4 + 81.7 = 168 W."""
    surface, around = celsius(29, 20)
    assert 1.6 * surface_flux(surface, around, around, 0.0, 6.0) == pytest.approx(86.4, abs=0.05)
    assert 1.6 * radiative_flux(surface, around, 0.95) == pytest.approx(81.7, abs=0.05 + 81.7 * 3 * KELVIN_273)
    assert 1.6 * surface_flux(surface, around, around, 0.95, 6.0) == pytest.approx(168, abs=0.5)


def test_cengel_1_9_person_before_cold_and_warm_walls() -> None:
    """Çengel, example 1.9: 1.4 m² at 30 °C, ε 0.95, walls at 10 °C and 25 °C: 152 and 40.9 W."""
    skin, winter, summer = celsius(30, 10, 25)
    assert 1.4 * radiative_flux(skin, winter, 0.95) == pytest.approx(152, abs=0.5)
    assert 1.4 * radiative_flux(skin, summer, 0.95) == pytest.approx(40.9, abs=0.05 + 40.9 * 3 * KELVIN_273)


def test_incropera_1_2_uninsulated_pipe() -> None:
    """Incropera, example 1.2: 200 °C, ε 0.8, air and walls 25 °C, D 70 mm, h 15: emits 2273 W/m², receives 448 W/m²,
    loses 998 W/m."""
    surface, around = celsius(200, 25)
    assert radiative_flux(surface, 0.0, 0.8) == pytest.approx(2273, abs=0.7)  # rounding, and σ to three figures
    assert radiative_flux(around, 0.0, 1.0) == pytest.approx(448, abs=0.5)
    assert pi * 0.07 * surface_flux(surface, around, around, 0.8, 15.0) == pytest.approx(998, abs=1)


def glass_balance(resistance: float, area: float) -> tuple[float, float]:
    """Heat [W] through a window and its inner surface [°C], room 20 °C with h 10, outdoors −10 °C with h 40."""
    room, outdoors = celsius(20, -10)

    def imbalance(t_inner: float) -> float:
        entering = -surface_flux(t_inner, room, room, 0.0, 10.0)
        t_outer = t_inner - entering * resistance
        return float(entering - surface_flux(t_outer, outdoors, outdoors, 0.0, 40.0))

    t_inner = optimize.brentq(imbalance, outdoors, room)
    return -float(surface_flux(t_inner, room, room, 0.0, 10.0)) * area, t_inner - ZERO_CELSIUS


def test_cengel_3_2_single_pane() -> None:
    """Çengel, example 3.2: 8 mm of glass (0.78 W/mK), 1.2 m²: 266 W, inner surface −2.2 °C; printed rounding."""
    assert glass_balance(0.008 / 0.78, 1.2) == pytest.approx((266, -2.2), abs=0.5)
    assert glass_balance(0.008 / 0.78, 1.2)[1] == pytest.approx(-2.2, abs=0.05)


def test_cengel_3_3_double_pane() -> None:
    """Çengel, example 3.3: 4 mm glass, 10 mm still air (0.026 W/mK), 4 mm glass: 69.2 W, 14.2 °C; printed rounding."""
    assert glass_balance(2 * 0.004 / 0.78 + 0.010 / 0.026, 1.2) == pytest.approx((69.2, 14.2), abs=0.05)


def test_surface_resistances_inside_are_those_of_iso_6946() -> None:
    """ISO 6946's formula at ε 0.9 and 20 °C for heat up, horizontal, down: 0.0986, 0.1308, 0.1712 (computed), which
    the standard rounds to 0.10, 0.13, 0.17."""
    inside = surface_resistance(np.array([5.0, 2.5, 0.7]), 0.9, ZERO_CELSIUS + 20)
    assert inside == pytest.approx([0.0986, 0.1308, 0.1712], abs=0.00005)
    assert inside == pytest.approx([0.10, 0.13, 0.17], abs=0.005)


def test_surface_resistances_outside_are_those_of_iso_6946() -> None:
    """ISO 6946's table of R_se by wind 1, 2, 3, 4, 5, 7, 10 m/s (ε 0.9, 10 °C): rounded to 0.001."""
    wind = np.array([1.0, 2, 3, 4, 5, 7, 10])
    h = film_coefficient("iso-6946", 283.15, 283.15, height=2.5, wind=wind, viewed_from="outside")
    outside = surface_resistance(h, 0.9, ZERO_CELSIUS + 10)
    assert outside == pytest.approx([0.079, 0.060, 0.049, 0.041, 0.035, 0.027, 0.021], abs=0.0006)
    assert outside[3] == pytest.approx(0.04, abs=0.0015)  # the conventional R_se holds at 4 m/s


def test_seen_from_inside_a_heated_building_loses_heat_and_a_cold_patch_more() -> None:
    """Definition of heat flux, worked: wall 18.6 °C, patch 15.5 °C, air and surroundings 21 °C."""
    room, outdoors = celsius(21, 1)
    wall, patch = outward_sign("inside", room, outdoors) * surface_flux(
        np.array(celsius(18.6, 15.5)), room, room, 0.92, 2.5
    )
    assert 0 < wall < patch


def test_seen_from_outside_a_heated_building_loses_heat_and_a_warm_patch_more() -> None:
    """Definition of heat flux, worked: air 5 °C, wall 6.2 °C, patch 8.8 °C."""
    outdoors = ZERO_CELSIUS + 5
    wall, patch = outward_sign("outside", ZERO_CELSIUS + 20, outdoors) * surface_flux(
        np.array(celsius(6.2, 8.8)), outdoors, outdoors, 0.92, 12.0
    )
    assert 0 < wall < patch


def test_a_cooled_building_reverses_the_sign_on_both_sides_and_a_component_never() -> None:
    """Definition of heat flux: positive leaves the warm side, or the component."""
    cold, warm = celsius(22, 35)
    assert outward_sign("inside", cold, warm) == 1
    assert outward_sign("outside", cold, warm) == -1
    assert outward_sign("inside", warm, cold) == -1
    assert outward_sign("outside", warm, cold) == 1
    assert outward_sign(None, cold, warm) == 1
    assert outward_sign(None, np.nan, np.nan) == 1
    assert outward_sign("inside", np.nan, warm) == -1
    np.testing.assert_array_equal(outward_sign("inside", np.array([290.0, 300.0]), 295.0), [1, -1])


@given(st.floats(250, 320), st.lists(st.tuples(st.floats(0.01, 1), st.floats(230, 320)), min_size=1, max_size=4))
def test_the_flux_to_the_mean_radiant_temperature_is_the_sum_over_everything_faced(
    t_surface: float, seen: list[tuple[float, float]]
) -> None:
    """Radiation adds up in fourth powers: exact, but for rounding of powers of 1e9 (1e-16 · 500 W/m²)."""
    whole = sum(share for share, _ in seen)
    parts = [(share / whole, t) for share, t in seen]
    together = surface_flux(t_surface, 280.0, mean_radiant(parts), 0.9, 2.5)
    singly = 2.5 * (t_surface - 280.0) + sum(share * radiative_flux(t_surface, t, 0.9) for share, t in parts)
    assert together == pytest.approx(singly, rel=1e-9, abs=1e-9)


def test_a_wall_between_ground_and_clear_sky_faces_a_mean_of_fourth_powers() -> None:
    """Half ground at 0 °C, half sky at −23.95 °C: by hand ½(5.567e9 + 3.857e9) = 4.712e9, whose fourth root is
    262.0 K [C], where the arithmetic mean would be 261.2."""
    assert mean_radiant([(0.5, 273.15), (0.5, 249.20)]) == pytest.approx(262.0, abs=0.05)
    scenes = mean_radiant([(0.5, np.array([273.15, 280.0])), (0.5, 249.20)])
    assert [*np.atleast_1d(scenes)] == [mean_radiant([(0.5, t), (0.5, 249.20)]) for t in (273.15, 280.0)]


def test_half_a_kelvin_of_mean_radiant_temperature_moves_the_flux_by_2_6_watts() -> None:
    """A room at 20 °C, ε 0.9 [C], printed to 0.1 W/m²."""
    room = ZERO_CELSIUS + 20
    moved = surface_flux(room, room, room, 0.9, 2.5) - surface_flux(room, room, room + 0.5, 0.9, 2.5)
    assert abs(moved) == pytest.approx(2.6, abs=0.05)


def test_flux_of_arrays_is_that_of_numbers_and_nan_stays_nan() -> None:
    t_surface, emissivity = np.array([[280.0], [293.15], [np.nan]]), np.array([0.3, 0.92])
    together = surface_flux(t_surface, 293.15, 290.0, emissivity, 2.5)
    singly = [[surface_flux(float(t), 293.15, 290.0, float(e), 2.5) for e in emissivity] for t in t_surface[:, 0]]
    np.testing.assert_allclose(together, singly, rtol=1e-12)
    assert np.isnan(together[2]).all()
