"""Numbers as people see them: the rounding rule against the worked examples of the GUM, units, missing numbers."""

from __future__ import annotations

from decimal import Decimal
from math import inf, nan

import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import constants

from irsurvey import numbers
from irsurvey.model import Estimate, Input
from irsurvey.numbers import Style

SPACED = "\u00a0±\u00a0"


def test_the_mass_example_of_the_gum_is_shown_as_the_gum_shows_it() -> None:
    # JCGM 100:2008, 7.2.2 and 7.2.4: m = 100.02147 g, u = 0.35 mg, k = 2.26: (100.02147 ± 0.00079) g
    assert numbers.plus_minus(100.02147, 2.26 * 0.35e-3) == f"100.02147{SPACED}0.00079"


def test_the_gauge_block_example_of_the_gum_is_shown_as_the_gum_shows_it() -> None:
    # JCGM 100:2008, H.1.6: l = 50.000 838 mm, u = 32 nm, k = 2.92: U = 93 nm
    assert numbers.plus_minus(50.000838, 2.92 * 32e-6) == f"50.000838{SPACED}0.000093"


@pytest.mark.parametrize(
    ("value", "expanded", "text"),
    [
        (10.05762, 0.027, "10.058 ± 0.027"),  # y = 10.057 62 Ω with 27 mΩ: 10.058 Ω
        (1000.0, 28.05, "1000 ± 28"),  # 28.05 kHz is rounded down to 28 kHz
    ],
)
def test_the_rounding_examples_of_the_gum_are_rounded_as_there(value: float, expanded: float, text: str) -> None:
    # JCGM 100:2008, 7.2.6
    assert numbers.plus_minus(value, expanded).replace("\u00a0", " ") == text


def test_u_in_the_gum_becomes_a_result_with_k_2() -> None:
    # JCGM 100:2008, 6.2.1: U = k u.  0.142 K doubled is 0.284 K, two digits 0.28 K.
    assert numbers.shown(Estimate(-3.1275, 0.142)) == f"−3.13{SPACED}0.28"


@pytest.mark.parametrize(
    ("value", "expanded", "text"),
    [
        (3.14159, 0.0996, "3.14 ± 0.10"),  # rounding U up to the next power of ten keeps two digits
        (1234.5, 123.0, "1230 ± 120"),  # places left of the point
        (-0.004, 0.3, "0.00 ± 0.30"),  # no minus zero
        (20.0, 2.0, "20.0 ± 2.0"),  # zeros that are known are shown
        (0.25, 1.0, "0.2 ± 1.0"),  # half to even
        (0.35, 1.0, "0.4 ± 1.0"),
        (1e-30, 1e20, "0 ± 100000000000000000000"),
        (1e30, 1e-3, "1000000000000000000000000000000.0000 ± 0.0010"),
    ],
)
def test_u_keeps_two_digits_and_the_value_its_place(value: float, expanded: float, text: str) -> None:
    assert numbers.plus_minus(value, expanded).replace("\u00a0", " ") == text


@given(st.floats(-1e6, 1e6), st.floats(1e-6, 1e6))
def test_rounding_moves_value_and_u_by_no_more_than_half_a_place(value: float, expanded: float) -> None:
    shown_value, shown_u = (
        Decimal(part.replace("−", "-")) for part in numbers.plus_minus(value, expanded).split(SPACED)
    )
    digits = str(shown_u).replace(".", "").strip("0")
    place = Decimal(f"{expanded:.1e}").as_tuple().exponent
    half = Decimal(1).scaleb(place) / 2  # the definition of rounding; no other tolerance
    assert len(digits) <= 2
    assert abs(shown_u - Decimal(repr(expanded))) <= half
    assert abs(shown_value - Decimal(repr(value))) <= half


@pytest.mark.parametrize("missing", [None, Estimate(nan, 0.1), Estimate(inf, 0.1)])
def test_what_does_not_exist_is_a_dash(missing: Estimate | None) -> None:
    assert numbers.shown(missing) == "–"


@pytest.mark.parametrize("u", [None, nan, 0.0])
def test_a_value_without_uncertainty_stands_alone(u: float | None) -> None:
    assert numbers.shown(Estimate(150.0, u)) == "150"


@pytest.mark.parametrize(
    ("estimate", "text"),
    [
        (Estimate(15.43, 0.61, (14.312, 16.761)), "14.3 to 16.8 (95 %)"),  # to the place of U = 1.2
        (Estimate(-3.1275, 0.142, (-3.4049, -2.8301)), "−3.40 to −2.83 (95 %)"),
        (Estimate(1.0, None, (0.5, 1.5)), "0.50 to 1.50 (95 %)"),  # to the place of its half width
        (Estimate(1.0, 0.1), ""),
        (Estimate(1.0, 0.0, (1.0, 1.0)), ""),
        (Estimate(1.0, 0.1, (nan, 1.5)), ""),
        (None, ""),
    ],
)
def test_an_interval_is_rounded_like_its_value(estimate: Estimate | None, text: str) -> None:
    assert numbers.interval(estimate).replace("\u00a0", " ") == text


@pytest.mark.parametrize(("value", "text"), [(0.0213, "+0.021"), (-1.27, "−1.3"), (0.0, "0"), (12.0, "+12")])
def test_a_change_has_its_sign(value: float, text: str) -> None:
    assert numbers.signed(value) == text


@pytest.mark.parametrize(
    ("key", "symbol"),
    [
        ("reflected_c", "K"),  # 1 °C more is 1 K more
        ("temperature_c:plate", "K"),
        ("relative_humidity_percent", "points"),
        ("outline_px:F01-1", "px"),
        ("slope_x_k_per_px", "K/px"),
        ("heat_flux_w_m2", "W/m²"),
        ("u_value_w_m2k", "W/(m²·K)"),
        ("emissivity:wall_m", ""),  # what follows the colon is a name
        ("size_of_source", ""),
    ],
)
def test_a_change_has_the_unit_of_a_difference(key: str, symbol: str) -> None:
    assert numbers.difference_unit(key) == symbol


def test_a_count_is_grouped_in_threes() -> None:
    assert [numbers.grouped(count) for count in (999, 20_000, 1_234_567)] == [
        "999",
        "20\u202f000",
        "1\u202f234\u202f567",
    ]


@pytest.mark.parametrize(
    ("value", "text"),
    [(21.0, "21"), (0.9934, "0.9934"), (12345.6, "12350"), (-0.5, "−0.5"), (0.0, "0"), (None, "–"), (nan, "–")],
)
def test_a_plain_number_has_four_digits_and_no_trailing_zeros(value: float | None, text: str) -> None:
    assert numbers.number(value) == text


def test_an_input_without_uncertainty_is_shown_as_it_was_stated() -> None:
    assert numbers.stated(Input(1013.25, 0.0, "default")) == "1013.25"
    assert numbers.stated(Input(0.92, 0.02, "survey")) == f"0.920{SPACED}0.040"


@pytest.mark.parametrize(("value", "text"), [(0.401, "0.41"), (0.40, "0.4"), (0.000999, "0.0010"), (nan, "–")])
def test_a_detection_limit_is_never_rounded_down(value: float, text: str) -> None:
    assert numbers.rounded_up(value) == text


@pytest.mark.parametrize(
    ("fraction", "text"),
    [(0.0, "0 %"), (0.0049, "< 1 %"), (0.7475, "75 %"), (0.9951, "> 99 %"), (1.0, "100 %"), (nan, "–")],
)
def test_a_probability_that_is_not_certain_is_not_shown_as_certain(fraction: float, text: str) -> None:
    assert numbers.percent(fraction).replace("\u00a0", " ") == text


@pytest.mark.parametrize(
    ("square_metres", "u", "text"),
    [
        (0.0042, 0.0003, "42.0 ± 6.0 cm²"),
        (0.00999, 0.001, "100 ± 20 cm²"),
        (0.01, 0.001, "0.0100 ± 0.0020 m²"),
        (0.4187, 0.0213, "0.419 ± 0.043 m²"),
        (0.0, None, "0 m²"),
    ],
)
def test_a_small_area_is_in_square_centimetres(square_metres: float, u: float | None, text: str) -> None:
    assert numbers.measured(Estimate(square_metres, u), "area_m2").replace("\u00a0", " ") == text


def test_in_a_column_of_square_metres_a_small_area_names_its_unit_and_others_do_not() -> None:
    assert numbers.measured(Estimate(0.0042, 0.0003), "area_m2", unit=False) == "42.0\u00a0±\u00a06.0\u00a0cm²"
    assert numbers.measured(Estimate(0.42, 0.03), "area_m2", unit=False) == "0.420\u00a0±\u00a00.060"
    assert numbers.measured(Estimate(0.0042, 0.0003), "u_value_w_m2k", unit=False) == "0.00420\u00a0±\u00a00.00060"


def test_the_interval_of_a_small_area_is_in_square_centimetres_too() -> None:
    small = Estimate(0.0042, 0.0003, (0.0037, 0.0050))
    assert numbers.interval_of(small, "area_m2").replace("\u00a0", " ") == "37.0 to 50.0 (95 %)"
    assert numbers.interval_of(Estimate(15.43, 0.61, (14.312, 16.761)), "mean_c").startswith("14.3 to 16.8")
    assert numbers.interval_of(None, "area_m2") == ""


@pytest.mark.parametrize(
    ("square_metres", "text"),
    [(0.001, "10 cm²"), (0.0011, "11 cm²"), (0.001101, "12 cm²"), (0.0123, "0.013 m²"), (0.01, "0.01 m²")],
)
def test_a_least_area_is_never_rounded_down_nor_up_without_need(square_metres: float, text: str) -> None:
    assert numbers.least_area(square_metres).replace("\u00a0", " ") == text


def test_an_area_and_what_it_may_be_share_one_unit() -> None:
    assert numbers.area_range(0.0, 0.0, 0.0041).replace("\u00a0", " ") == "0 cm² (0 to 41 cm²)"
    assert numbers.area_range(0.0035, 0.0012, 0.09).replace("\u00a0", " ") == "0.0035 m² (0.0012 to 0.09 m²)"


@pytest.mark.parametrize(
    ("value", "u", "text"),
    [
        (240.0, 150.0, "of the order of 100"),  # log10 240 = 2.38
        (400.0, 250.0, "of the order of 1000"),  # log10 400 = 2.60
        (0.7, 0.5, "of the order of 1"),
        (0.07, 0.05, "of the order of 0.1"),
        (-240.0, 150.0, "of the order of −100"),
        (10.0, 10.0, "at most about 30"),  # 10 + 2 · 10
        (3.0, 200.0, "at most about 500"),  # 3 + 2 · 200 = 403, upwards to one digit
        (-3.0, 200.0, "at most about 400"),  # 397
        (5.0, None, "–"),
        (nan, 1.0, "–"),
    ],
)
def test_what_is_too_uncertain_for_digits_has_an_order_of_magnitude_or_an_upper_end(
    value: float, u: float | None, text: str
) -> None:
    assert numbers.magnitude(Estimate(value, u)) == text


@pytest.mark.parametrize(
    ("key", "symbol"),
    [
        ("film_resistance_m2k_w", "m²·K/W"),
        ("linear_transmittance_w_mk", "W/(m·K)"),
        ("excess_heat_w_k", "W/K"),
        ("energy_kwh", "kWh"),
        ("degree_days_kd", "K·d"),
        ("undisturbed_gradient_k_per_m", "K/m"),
        ("vapour_pressure_pa", "Pa"),
        ("temperature_factor_at_0_25", ""),
        ("slope_low_k_per_year", "K/year"),
        ("excess_resistance_uohm", "µΩ"),
        ("voltage_drop_mv", "mV"),
        ("relative_difference_percent", "%"),
        ("delta_k", "K"),
        ("extreme_c", "°C"),
        ("excess_heat_w", "W"),
        ("heat_flux_w_m2", "W/m²"),
        ("area_m2", "m²"),
        ("vapour_density_g_m3", "g/m³"),
        ("wind_m_s", "m/s"),
        ("distance_m", "m"),
        ("relative_humidity_percent", "%"),
        ("edge_sharpness_per_pixel", "1/px"),
        ("temperature_factor", ""),
        ("emissivity", ""),
    ],
)
def test_the_unit_is_what_the_key_ends_in(key: str, symbol: str) -> None:
    assert numbers.unit(key) == symbol


def test_an_interval_that_plus_minus_covers_alike_on_both_sides_is_not_repeated() -> None:
    # A rectangular ±1: u = 1/√3, 95 % within ±0.95, U = 1.15.
    assert numbers.interval(Estimate(20.0, 3**-0.5, (19.05, 20.95))) == ""
    assert numbers.interval(Estimate(20.0, 3**-0.5, (19.05, 20.85))) != ""


US = Style(units="us")
COMMA = Style(decimal_comma=True)


@pytest.mark.parametrize(
    ("key", "value", "in_us", "symbol"),
    [
        # scipy.constants: its own table of units, from CODATA and NIST SP 811; the International Table Btu
        ("air_c", 21.0, float(constants.convert_temperature(21.0, "C", "F")), "°F"),
        ("delta_k", 5.0, 5.0 / constants.degree_Fahrenheit, "°F"),
        ("distance_m", 2.5, 2.5 / constants.foot, "ft"),
        ("area_m2", 0.42, 0.42 / constants.foot**2, "ft²"),
        ("wind_m_s", 5.0, 5.0 / constants.mph, "mph"),
        ("vapour_density_g_m3", 8.25, 8.25e-3 * constants.foot**3 / constants.grain, "gr/ft³"),
        ("excess_heat_w", 8.5, 8.5 * 3600 / constants.Btu_IT, "Btu/h"),
        ("heat_flux_w_m2", 38.2, 38.2 * 3600 / constants.Btu_IT * constants.foot**2, "Btu/(h·ft²)"),
        (
            "u_value_w_m2k",
            1.9,
            1.9 * 3600 / constants.Btu_IT * constants.foot**2 * constants.degree_Fahrenheit,
            "Btu/(h·ft²·°F)",
        ),
        (
            "film_resistance_m2k_w",
            0.13,
            0.13 * constants.Btu_IT / 3600 / constants.foot**2 / constants.degree_Fahrenheit,
            "h·ft²·°F/Btu",
        ),
        (
            "linear_transmittance_w_mk",
            0.11,
            0.11 * 3600 / constants.Btu_IT * constants.foot * constants.degree_Fahrenheit,
            "Btu/(h·ft·°F)",
        ),
        ("excess_heat_w_k", 0.42, 0.42 * 3600 / constants.Btu_IT * constants.degree_Fahrenheit, "Btu/(h·°F)"),
        ("gradient_k_per_m", 0.2, 0.2 / constants.degree_Fahrenheit * constants.foot, "°F/ft"),
        ("slope_k_per_year", 2.0, 2.0 / constants.degree_Fahrenheit, "°F/year"),
        ("degree_days_kd", 3000.0, 5400.0, "°F·d"),
    ],
)
def test_us_units_are_those_of_an_outside_table(key: str, value: float, in_us: float, symbol: str) -> None:
    assert numbers.unit(key, style=US) == symbol
    assert numbers.converted(value, key, style=US) == pytest.approx(in_us, rel=1e-9)  # the digits of the Btu
    assert numbers.converted(value, key) == value


def test_mercury_and_the_factors_of_the_trade_are_those_of_nist() -> None:
    # NIST SP 811 (2008), B.8 [M]: seven digits each
    assert numbers.converted(33.86389, "pressure_hpa", style=US) == pytest.approx(1.0, rel=1e-7)
    assert numbers.converted(5.678263, "u_value_w_m2k", style=US) == pytest.approx(1.0, rel=2e-7)
    assert numbers.converted(3.154591, "heat_flux_w_m2", style=US) == pytest.approx(1.0, rel=2e-7)
    assert numbers.converted(0.1761102, "film_resistance_m2k_w", style=US) == pytest.approx(1.0, rel=3e-7)


@pytest.mark.parametrize(
    "key", ["irradiance_w_m2", "excess_power_w", "pressure_pa", "load_a", "ifov_mrad", "energy_kwh"]
)
def test_what_a_trade_reads_in_si_units_everywhere_stays(key: str) -> None:
    assert numbers.scale(key, US) == numbers.scale(key)


@given(value=st.floats(-50, 500), u=st.floats(1e-3, 50), key=st.sampled_from(["air_c", "delta_k", "area_m2", "w_k"]))
def test_after_a_conversion_u_still_has_two_digits_and_the_value_its_place(value: float, u: float, key: str) -> None:
    shown, symbol = numbers.measured(Estimate(value, u), key, style=US).rsplit("\u00a0", 1)
    said, expanded = (Decimal(part.replace("−", "-")) for part in shown.split(SPACED))
    scale = numbers.scale(key, US) if symbol != "in²" else numbers.Scale("in²", 1e4 / 6.4516)
    place = Decimal(1).scaleb(expanded.adjusted() - 1)
    assert said % place == 0
    assert abs(expanded - Decimal(2 * scale.factor * u)) <= place * Decimal("0.5000001")
    assert abs(said - Decimal(scale.factor * value + scale.shift)) <= place * Decimal("0.5000001")


def test_small_areas_are_in_square_inches() -> None:
    # 1 in² is 6.4516 cm² exactly
    assert numbers.measured(Estimate(64.516e-4, None), "area_m2", style=US) == "10\u00a0in²"
    assert numbers.least_area(6.4516e-4, style=US) == "1.0\u00a0in²"
    assert numbers.area_range(64.516e-4, 6.4516e-4, 64.516e-4, style=US) == "10\u00a0in² (1 to 10\u00a0in²)"
    assert numbers.least_area(0.5, style=US) == "5.4\u00a0ft²"  # 5.38, and no less may be promised


def test_an_interval_and_an_input_move_with_their_unit() -> None:
    drawn = Estimate(20.0, 1.0, (18.5, 22.5))
    assert numbers.interval_of(drawn, "mean_c", style=US) == "65.3 to 72.5 (95\u00a0%)"
    assert numbers.stated(Input(21.0, 0.5, "survey"), "air_c", style=US) == f"69.8{SPACED}1.8"
    assert numbers.stated(Input(2.5, 0.0, "survey"), "distance_m:plate", style=US) == "8.202"


def test_a_decimal_comma_stands_wherever_a_point_stood() -> None:
    for text in (
        numbers.shown(Estimate(3.14, 0.14), style=COMMA),
        numbers.number(0.25, style=COMMA),
        numbers.decimals(18.5, 1, style=COMMA),
        numbers.rounded_up(0.0334, style=COMMA),
        numbers.magnitude(Estimate(0.1, 0.06), style=COMMA),
        numbers.magnitude(Estimate(0.1, 0.2), style=COMMA),
        numbers.interval(Estimate(20.0, 1.0, (18.5, 22.5)), style=COMMA),
        numbers.area_range(0.35, 0.12, 0.9, style=COMMA),
        numbers.signed(0.53, style=COMMA),
    ):
        assert "," in text
        assert "." not in text
