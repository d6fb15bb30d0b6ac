"""The closed form against the exact integral and against fits made outside this project's code."""

from __future__ import annotations

import numpy as np
import pytest

from irsurvey.model import ClosedForm
from irsurvey.radiometry import sakuma_hattori
from irsurvey.radiometry.planck import band_radiance

FORM = ClosedForm(a=9.3e-6, b=1.78e-4, c=21_000.0, bias=350.0)


def test_the_published_fits_err_by_what_they_say(columns, band_name: str, band: tuple[float, float]) -> None:
    """sakuma_hattori_fits.csv: coefficients with eight figures, errors found on a grid that is not stated."""
    table = columns("sakuma_hattori_fits.csv", band_name)
    for a, b, c, low, high, worst, rms in zip(
        *(table[key] for key in ("A_um", "B_um_K", "C_W_m2_sr", "tmin_c", "tmax_c", "max_err_K", "rms_err_K")),
        strict=True,
    ):
        temperature = np.linspace(low, high, 2000) + 273.15
        error = sakuma_hattori.temperature(band_radiance(temperature, band), ClosedForm(a * 1e-6, b * 1e-6, c))
        error -= temperature
        assert np.abs(error).max() == pytest.approx(worst, rel=2e-3)  # coefficients' rounding: 1e-5 K of 5e-3 K
        assert np.sqrt(np.mean(error**2)) == pytest.approx(rms, rel=3e-2)  # their grid weighs the ends otherwise


def test_our_fit_is_as_good_as_the_published_one(columns, band_name: str, band: tuple[float, float]) -> None:
    """Both minimise the squared error in kelvin, on different grids: equal within 3 % (see the test above)."""
    table = columns("sakuma_hattori_fits.csv", band_name)
    for low, high, rms in zip(table["tmin_c"], table["tmax_c"], table["rms_err_K"], strict=True):
        temperature = np.linspace(low, high, 2000) + 273.15
        form = sakuma_hattori.fit(band, low + 273.15, high + 273.15)
        error = sakuma_hattori.temperature(band_radiance(temperature, band), form) - temperature
        assert np.sqrt(np.mean(error**2)) <= 1.03 * rms


def test_a_wide_mid_wave_range_is_not_for_the_closed_form() -> None:
    """sakuma_hattori_fits.csv: over −40…500 °C the best form errs by 0.86 K in 3–5 µm."""
    band = (3e-6, 5e-6)
    temperature = np.linspace(233.15, 773.15, 1000)
    form = sakuma_hattori.fit(band, 233.15, 773.15)
    error = np.abs(sakuma_hattori.temperature(band_radiance(temperature, band), form) - temperature)
    assert 0.5 < error.max() < 0.9


def test_counts_and_back_are_the_same_temperature() -> None:
    temperature = np.linspace(200, 1500, 500)
    back = sakuma_hattori.temperature(sakuma_hattori.counts(temperature, FORM), FORM)
    # closed inverse; subtracting the bias 350 from counts of 8 costs two digits
    assert back == pytest.approx(temperature, abs=1e-9)


def test_a_camera_whose_counts_fall_with_temperature_is_inverted_too() -> None:
    falling = ClosedForm(a=9.3e-6, b=1.78e-4, c=-21_000.0, bias=16_000.0)
    counts = sakuma_hattori.counts([280.0, 300.0, 320.0], falling)
    assert (np.diff(counts) < 0).all()
    assert sakuma_hattori.temperature(counts, falling) == pytest.approx([280, 300, 320], abs=1e-9)


@pytest.mark.filterwarnings("error")
def test_counts_at_or_below_the_bias_have_no_temperature() -> None:
    assert np.isnan(sakuma_hattori.temperature([350.0, 349.0, -1e6, np.nan], FORM)).all()
    assert np.isnan(sakuma_hattori.counts(-30.0, FORM))  # a T + b is not above 0
    one = float(sakuma_hattori.temperature(1000.0, FORM))
    assert one == sakuma_hattori.temperature(np.array([1000.0, 2000.0]), FORM)[0]
