"""Planck's law against astropy, CODATA by scipy, and tables computed outside this project's code."""

from __future__ import annotations

from decimal import Decimal, getcontext
from math import pi

import astropy.units as au
import numpy as np
import pytest
from astropy.modeling.physical_models import BlackBody
from scipy import constants as codata
from scipy.integrate import quad
from scipy.optimize import minimize_scalar

from irsurvey import constants
from irsurvey.radiometry.planck import band_radiance, blackbody_fraction, spectral_radiance

PER_MICROMETRE = 1e-6


def test_the_constants_are_those_of_codata() -> None:
    """scipy.constants (CODATA 2022; exact ones are those of the SI 2019)."""
    assert codata.h == constants.PLANCK
    assert codata.c == constants.SPEED_OF_LIGHT
    assert codata.k == constants.BOLTZMANN
    # derived: equal but for the digits CODATA prints
    assert pytest.approx(codata.value("second radiation constant"), rel=1e-9) == constants.SECOND_RADIATION
    radiance = codata.value("first radiation constant for spectral radiance")
    assert pytest.approx(radiance, rel=1e-9) == constants.FIRST_RADIATION
    assert pytest.approx(codata.Stefan_Boltzmann, rel=1e-9) == constants.STEFAN_BOLTZMANN
    assert pytest.approx(codata.value("Wien wavelength displacement law constant"), rel=1e-9) == (
        constants.WIEN_DISPLACEMENT
    )


def test_spectral_radiance_equals_that_of_astropy() -> None:
    wavelengths, temperatures = np.geomspace(0.5e-6, 100e-6, 60), np.array([[150.0], [293.15], [600.0], [1800.0]])
    for temperature in temperatures[:, 0]:
        black_body = BlackBody(temperature * au.K, scale=1.0 * au.W / (au.m**2 * au.sr * au.m))
        theirs = black_body(wavelengths * au.m).to_value(au.W / (au.m**2 * au.sr * au.m))
        # the same formula with the same constants; rounding is amplified by the exponent, up to 190 here
        assert spectral_radiance(wavelengths, temperature) == pytest.approx(theirs, rel=1e-11)


def test_the_peak_obeys_wien_and_the_whole_obeys_stefan_and_boltzmann() -> None:
    """Wien's displacement law, Stefan–Boltzmann law; CODATA constants by scipy."""
    peak = minimize_scalar(lambda um: -float(spectral_radiance(um * 1e-6, 300.0)), bounds=(5, 20), method="bounded")
    assert peak.x * 1e-6 * 300 == pytest.approx(codata.value("Wien wavelength displacement law constant"), rel=1e-5)
    assert pi * whole_radiance(300.0) == pytest.approx(codata.Stefan_Boltzmann * 300**4, rel=1e-8)  # quadrature


def whole_radiance(temperature: float) -> float:
    """Spectral radiance over all wavelengths [W m⁻² sr⁻¹], by scipy's adaptive quadrature."""

    def per_micrometre(um: float) -> float:
        return float(spectral_radiance(um * 1e-6, temperature)) * PER_MICROMETRE

    return float(quad(per_micrometre, 0.1, np.inf, limit=500)[0])


def test_twice_the_temperature_gives_sixteen_times_the_radiation() -> None:
    """Common practice, and exact by Stefan and Boltzmann."""
    assert whole_radiance(600.0) / whole_radiance(300.0) == pytest.approx(16, rel=1e-7)  # the quadrature's error
    assert blackbody_fraction(1e3) == pytest.approx(1, abs=1e-11)  # all but 2e-16 lies below λT = 1000 m K


def test_the_peaks_of_sunlight_and_of_a_wall_lie_where_the_trade_says() -> None:
    """Common practice: the sun at about 5800 K peaks in the visible (380–780 nm), 300 K near 10 µm."""
    wavelengths = np.geomspace(0.2e-6, 50e-6, 4000)
    assert 380e-9 < wavelengths[spectral_radiance(wavelengths, 5800.0).argmax()] < 780e-9
    assert 9e-6 < wavelengths[spectral_radiance(wavelengths, 300.0).argmax()] < 10e-6


def test_the_blackbody_fraction_table_is_met(columns) -> None:
    """blackbody_fraction_table.csv, 61 values printed to ten figures.

    Tolerance: half a unit of the tenth figure.  In the first row, λT = 200 µm K, the table's own digits are
    lost (it errs by 9e-5 of 3.4e-27), so there only the absolute size can be asked for; the series with 50
    digits below checks that row."""
    table = columns("blackbody_fraction_table.csv")
    assert table["lambdaT_um_K"].size == 61
    ours = blackbody_fraction(table["lambdaT_um_K"] * 1e-6)
    assert ours == pytest.approx(table["F_0_lambdaT"], abs=1e-30, rel=6e-10)
    assert ours[1:] == pytest.approx(table["F_0_lambdaT"][1:], abs=0, rel=6e-10)
    # the other two columns, printed to eight figures; λT = 200 µm K included
    shape = spectral_radiance(table["lambdaT_um_K"] * 1e-6 / 300, 300.0)
    scaled = shape * PER_MICROMETRE / (constants.STEFAN_BOLTZMANN * 300**5)
    assert scaled == pytest.approx(table["I_b_over_sigmaT5_per_um_K_sr"], rel=6e-8)
    peak = spectral_radiance(constants.WIEN_DISPLACEMENT / 300, 300.0)
    assert shape / peak == pytest.approx(table["I_ratio_to_max"], rel=6e-8)


@pytest.mark.parametrize("micrometre_kelvin", [200, 1000, 2898, 20_000])
def test_the_blackbody_fraction_equals_its_series_with_50_digits(micrometre_kelvin: int) -> None:
    """(15/π⁴) Σ (e⁻ⁿˣ/n)(x³ + 3x²/n + 6x/n² + 6/n³): Siegel & Howell, Thermal Radiation Heat Transfer (1992)."""
    getcontext().prec = 50
    x = Decimal("6.62607015e-34") * 299_792_458 / Decimal("1.380649e-23") / (micrometre_kelvin * Decimal("1e-6"))
    terms = ((-n * x).exp() / n * (x**3 + 3 * x**2 / n + 6 * x / n**2 + Decimal(6) / n**3) for n in range(1, 200))
    series = 15 / Decimal("3.14159265358979323846264338327950288") ** 4 * sum(terms)
    # our own claim is 1e-11; the rounding of x (72 at 200 µm K) in the exponent stays below 1e-13
    assert float(blackbody_fraction(micrometre_kelvin * 1e-6)) == pytest.approx(float(series), rel=1e-11)


def test_band_radiance_meets_the_table(columns, band_name: str, band: tuple[float, float]) -> None:
    """band_radiance_table.csv, printed to seven or eight figures: half a unit of the last is at most 5e-7 of it."""
    table = columns("band_radiance_table.csv")
    ours = band_radiance(table["t_c"] + 273.15, band)
    assert ours == pytest.approx(table[f"L_{band_name}"], rel=5.1e-7)


def test_band_radiance_equals_adaptive_quadrature_of_astropy(band: tuple[float, float]) -> None:
    """astropy's Planck function integrated by scipy's adaptive quadrature (asked for 1e-12)."""
    for kelvin in (150.0, 233.15, 293.15, 600.0, 1800.0):
        black_body = BlackBody(kelvin * au.K, scale=1.0 * au.W / (au.m**2 * au.sr * au.um))

        def spectrum(um: float, of: BlackBody = black_body) -> float:
            return float(of(um * au.um).value)

        theirs, _ = quad(spectrum, band[0] * 1e6, band[1] * 1e6, epsabs=0, epsrel=1e-12)
        assert float(band_radiance(kelvin, band)) == pytest.approx(theirs, rel=1e-10)  # our claim


def test_band_radiance_is_the_difference_of_two_fractions(band: tuple[float, float]) -> None:
    """Exact identity; the fractions are of order 1, so their rounding is what is left."""
    temperature = np.array([250.0, 300.0, 500.0, 1000.0])
    fraction = blackbody_fraction(band[1] * temperature) - blackbody_fraction(band[0] * temperature)
    whole = constants.STEFAN_BOLTZMANN * temperature**4 / pi
    assert band_radiance(temperature, band) / whole == pytest.approx(fraction, abs=1e-12)


def test_a_vector_gives_what_its_numbers_give() -> None:
    temperatures = np.array([[200.0, 300.0], [400.0, np.nan]])
    band = (7.5e-6, 13e-6)
    assert band_radiance(temperatures, band).shape == (2, 2)
    for row, column in np.ndindex(2, 2):
        one = band_radiance(temperatures[row, column], band)
        # summed in another order: the last digits may differ
        assert float(one) == pytest.approx(band_radiance(temperatures, band)[row, column], rel=1e-13, nan_ok=True)
        assert float(blackbody_fraction(temperatures[row, column] * 1e-5)) == pytest.approx(
            blackbody_fraction(temperatures * 1e-5)[row, column], rel=1e-13, nan_ok=True
        )


@pytest.mark.filterwarnings("error")
def test_outside_the_domain_is_nan_and_nothing_is_warned_of() -> None:
    assert np.isnan(spectral_radiance([0.0, -1e-6, 1e-5, 1e-5], [300.0, 300.0, 0.0, -5.0])).all()
    assert spectral_radiance(1e-7, 100.0) == 0  # far in the Wien tail: nothing, not an overflow
    assert np.isnan(blackbody_fraction([0.0, -1.0, np.nan])).all()
    assert np.isnan(band_radiance([0.0, -1.0, np.nan], (3e-6, 5e-6))).all()
