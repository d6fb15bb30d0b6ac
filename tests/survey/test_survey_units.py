"""Units are converted where the file is read, against the fixed points that define them."""

from __future__ import annotations

from collections.abc import Callable
from math import pi

import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.model import Survey
from irsurvey.survey.units import TEMPERATURE_UNITS, si

Load = Callable[..., Survey]


@pytest.mark.parametrize(
    ("unit", "stored", "kelvin"),
    [
        # the Celsius scale is defined from the kelvin by 273.15, and 180 °F divide the 100 °C from ice to steam
        ("K", 300.0, 300.0),
        ("C", 0.0, 273.15),
        ("C", -40.0, 233.15),
        ("F", 32.0, 273.15),
        ("F", 212.0, 373.15),
        ("F", -40.0, 233.15),
        ("F", -459.67, 0.0),
    ],
)
def test_stored_temperatures_become_kelvin(unit: str, stored: float, kelvin: float) -> None:
    factor, shift = TEMPERATURE_UNITS[unit]
    assert factor * stored + shift == pytest.approx(kelvin, abs=1e-9)  # rounding of one product and one sum


@given(
    unit=st.sampled_from("KCF"),
    scale=st.floats(0.001, 10),
    offset=st.floats(-500, 500),
    stored=st.integers(0, 65535),
)
def test_scale_and_offset_count_in_the_unit_they_are_stated_in(
    unit: str, scale: float, offset: float, stored: int
) -> None:
    from irsurvey.survey.cameras import _signal
    from irsurvey.survey.schema_camera import ApparentTemperature

    table = ApparentTemperature(quantity="apparent-temperature", unit=unit, scale=scale, offset=offset)
    signal = _signal(table)
    stated = scale * stored + offset
    kelvin = {"K": stated, "C": stated + 273.15, "F": (stated - 32) / 1.8 + 273.15}[unit]
    # 1e-9 relative: sums of terms up to 7e5 in another order of rounding
    assert signal.scale * stored + signal.offset == pytest.approx(kelvin, rel=1e-9, abs=1e-9)


@pytest.mark.parametrize(
    ("key", "stated", "expected"),
    [
        ("air_c", 20.0, 293.15),
        ("air_k", 0.5, 0.5),
        ("noise_k", 0.05, 0.05),
        ("relative_humidity_percent", 45.0, 0.45),
        ("pressure_hpa", 1013.25, 101_325.0),
        ("band_um", 7.5, 7.5e-6),
        ("b_um_k", 171.0, 171e-6),
        ("ifov_mrad", 1.36, 1.36e-3),
        ("view_angle_deg", 60.0, pi / 3),
        ("distance_m", 2.5, 2.5),
        ("wind_m_s", 3.0, 3.0),
        ("irradiance_w_m2", 800.0, 800.0),
        ("pressure_pa", -25.0, -25.0),
        ("hours_since_sun", 12.0, 43_200.0),
        ("distance_fraction", 0.1, 0.1),
        ("emissivity", 0.9, 0.9),
    ],
)
def test_the_ending_of_a_key_says_its_unit(key: str, stated: float, expected: float) -> None:
    assert si(key, stated) == pytest.approx(expected, rel=1e-15)  # one correctly rounded operation


@pytest.mark.parametrize(("unit", "stored_zero"), [("K", 0.0), ("C", 273.15), ("F", 255.3722222222222)])
def test_without_scale_and_offset_a_stored_number_is_the_temperature(
    unit: str, stored_zero: float, minimal: str, load_text: Load
) -> None:
    signal = load_text(minimal.replace('unit = "K"', f'unit = "{unit}"')).tasks[0].camera.signal
    assert signal.offset == pytest.approx(stored_zero, abs=1e-12)  # 0 °F is −17.777… °C
