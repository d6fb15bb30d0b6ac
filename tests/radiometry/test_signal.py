"""From stored numbers to apparent temperature: undone in-camera corrections and calibrated counts."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from irsurvey.model import ClosedForm, InCameraCorrection, Signal
from irsurvey.radiometry import sakuma_hattori
from irsurvey.radiometry.band import band_table
from irsurvey.radiometry.measurement import Path, object_temperature
from irsurvey.radiometry.planck import band_radiance
from irsurvey.radiometry.signal import QUANTITIES, _vapour_density, apparent_temperature

BAND = (8e-6, 14e-6)
TABLE_ERROR = 1e-4
"""[K]: twice the worst error of the run-time table (2e-5 K) where nothing amplifies it, with room for ε = 0.4."""


def radiance(kelvin: float) -> float:
    """Exact band radiance, not the run-time table."""
    return float(band_radiance(kelvin, BAND))


def black_body(wanted: float) -> float:
    return float(brentq(lambda t: radiance(t) - wanted, 160, 1700, xtol=1e-8))


def test_an_apparent_temperature_is_scale_times_stored_plus_offset() -> None:
    stored = np.array([[4000, 5000], [6000, 0]], np.uint16)
    kelvin = apparent_temperature(stored, Signal("apparent-temperature", scale=0.025, offset=173.15), BAND)
    # 0.025 K steps from −100 °C, as one of the public sample cameras stores it
    np.testing.assert_allclose(kelvin, [[273.15, 298.15], [323.15, 173.15]], rtol=1e-15)


@settings(deadline=None)  # the first example builds tables
@given(st.floats(255, 420), st.floats(0.4, 1), st.floats(240, 320), st.floats(0.5, 1), st.floats(250, 320) | st.none())
def test_a_stated_transmittance_is_undone_exactly(
    t_object: float, emissivity: float, reflected: float, transmittance: float, air: float | None
) -> None:
    """The camera's correction written out here with the exact integral, one transmittance for all radiation:

    L(T_app) = τ(ε L(To) + (1 − ε) L(Tr)) + (1 − τ) L(Ta), air at the reflected temperature where none is stated."""
    t_air = reflected if air is None else air
    own = transmittance * (emissivity * radiance(t_object) + (1 - emissivity) * radiance(reflected))
    expected = black_body(own + (1 - transmittance) * radiance(t_air))
    assumed = InCameraCorrection(emissivity=emissivity, reflected=reflected, transmittance=transmittance, air=air)
    signal = Signal("object-temperature", scale=0.5, offset=200.0, assumed=assumed)
    stored = (t_object - 200.0) / 0.5
    assert float(apparent_temperature(stored, signal, BAND)) == pytest.approx(expected, abs=TABLE_ERROR)


@settings(deadline=None)  # the first example builds tables
@given(st.floats(255, 420), st.floats(0.4, 1), st.floats(240, 320))
def test_a_correction_at_distance_0_is_undone_exactly(t_object: float, emissivity: float, reflected: float) -> None:
    expected = black_body(emissivity * radiance(t_object) + (1 - emissivity) * radiance(reflected))
    for assumed in (
        InCameraCorrection(emissivity=emissivity, reflected=reflected, distance=0.0),
        InCameraCorrection(emissivity=emissivity, reflected=reflected),
    ):
        signal = Signal("object-temperature", assumed=assumed)
        assert float(apparent_temperature(t_object, signal, BAND)) == pytest.approx(expected, abs=TABLE_ERROR)


def test_a_black_body_without_a_path_was_never_corrected() -> None:
    signal = Signal("object-temperature", assumed=InCameraCorrection(emissivity=1.0, reflected=290.0, distance=0.0))
    assert float(apparent_temperature(310.0, signal, BAND)) == pytest.approx(310, abs=1e-9)  # exact


def test_a_correction_over_a_distance_is_undone_with_our_own_air() -> None:
    """Round trip: corrected again with the same assumptions, the camera's object temperature comes back."""
    full = InCameraCorrection(
        emissivity=0.9, reflected=285.0, distance=60.0, air=290.0, relative_humidity=0.7, pressure=98_000.0
    )
    for assumed, air, humidity, pressure in (
        (full, 290.0, 0.7, 98_000.0),
        (InCameraCorrection(emissivity=0.9, reflected=285.0, distance=60.0), 285.0, 0.5, 101_325.0),
    ):
        seen = apparent_temperature([280.0, 350.0], Signal("object-temperature", assumed=assumed), BAND)
        assert (np.abs(seen - [280.0, 350.0]) > 0.1).all()
        path = Path(air, 60.0, _vapour_density(air, humidity), pressure)
        assert object_temperature(seen, 0.9, 285.0, path, BAND) == pytest.approx([280, 350], abs=1e-5)


def test_the_vapour_density_is_that_of_the_air_table(columns) -> None:
    """atmosphere_table.csv: over liquid water by Sonntag (1990), printed to five decimals."""
    table = columns("atmosphere_table.csv", "8-14")
    for celsius, percent, grams in zip(table["t_air_c"], table["rh_pct"], table["rho_v_g_m3"], strict=True):
        assert _vapour_density(celsius + 273.15, percent / 100) * 1e3 == pytest.approx(grams, abs=1e-5)


def test_counts_proportional_to_radiance_are_inverted() -> None:
    temperature = np.array([260.0, 300.0, 500.0])
    stored = (band_radiance(temperature, BAND) - 3.0) / 0.01
    signal = Signal("counts", gain=0.01, bias=3.0)
    assert apparent_temperature(stored, signal, BAND) == pytest.approx(temperature, abs=TABLE_ERROR)
    assert np.isnan(apparent_temperature(-1000.0, signal, BAND))  # a negative radiance


def test_counts_by_the_closed_form_are_inverted() -> None:
    form = ClosedForm(a=9.34e-6, b=1.78e-4, c=21_000.0, bias=350.0)
    stored = sakuma_hattori.counts([260.0, 300.0, 500.0], form)
    signal = Signal("counts", closed_form=form)
    assert apparent_temperature(stored, signal, BAND) == pytest.approx([260, 300, 500], abs=1e-9)  # closed inverse
    assert np.isnan(apparent_temperature(340.0, signal, BAND))


CALIBRATION = (253.15, 273.15, 293.15, 323.15, 373.15, 423.15)
"""Black bodies of an ordinary long-wave calibration [K]."""


@pytest.mark.parametrize("direction", [1, -1])
def test_calibration_points_are_met_exactly_and_lines_in_radiance_between_them(direction: int) -> None:
    """A detector is proportional to radiance to first order (common practice): then nothing is lost between points."""
    table = band_table(BAND)

    def counts(kelvin) -> np.ndarray:
        return 9000 + direction * 35.0 * table.radiance(kelvin)

    points = tuple((float(counts(kelvin)), kelvin) for kelvin in CALIBRATION)
    for order in (points, points[::-1]):
        signal = Signal("counts", points=order)
        at_points = apparent_temperature([count for count, _ in points], signal, BAND)
        assert at_points == pytest.approx(CALIBRATION, abs=1e-9)
        between = np.linspace(254, 423, 300)
        assert apparent_temperature(counts(between), signal, BAND) == pytest.approx(between, abs=1e-8)  # rounding


def test_a_bent_detector_stays_monotonic_between_its_points() -> None:
    """Counts that bend over by 13 % at the hot end: monotonic everywhere, within 0.3 K of the truth between points.

    0.3 K is 0.2 % of the range and was found here; a cubic's error grows with the fourth power of the spacing."""
    table = band_table(BAND)

    def counts(kelvin) -> np.ndarray:
        linear = table.radiance(kelvin)
        return 9000 + 35.0 * linear - 0.02 * linear**2

    signal = Signal("counts", points=tuple((float(counts(kelvin)), kelvin) for kelvin in CALIBRATION))
    truth = np.linspace(CALIBRATION[0], CALIBRATION[-1], 2000)
    read = apparent_temperature(counts(truth), signal, BAND)
    inside = np.isfinite(read)
    assert inside[1:-1].all()
    assert (np.diff(read[inside]) > 0).all()
    assert np.abs(read - truth)[inside].max() < 0.3


def test_nothing_is_extrapolated_beyond_the_calibration_points() -> None:
    signal = Signal("counts", points=((1000.0, 273.15), (2000.0, 293.15), (4000.0, 323.15)))
    assert np.isnan(apparent_temperature([999.0, 4001.0, np.nan], signal, BAND)).all()
    assert np.isfinite(apparent_temperature([1000.0, 4000.0], signal, BAND)).all()


@pytest.mark.parametrize(
    "signal",
    [
        Signal("apparent-temperature", scale=0.01),
        Signal("object-temperature", scale=0.01, assumed=InCameraCorrection(emissivity=0.9, reflected=290.0)),
        Signal("counts", gain=0.002, bias=1.0),
        Signal("counts", points=((1000.0, 273.15), (28_000.0, 293.15), (40_000.0, 323.15))),
        Signal("counts", closed_form=ClosedForm(a=9.34e-6, b=1.78e-4, c=3e6)),
    ],
    ids=["apparent", "object", "gain", "points", "closed form"],
)
def test_a_vector_gives_what_its_numbers_give(signal: Signal) -> None:
    stored = np.array([[28_000, 29_000], [30_000, 31_000]])
    together = apparent_temperature(stored, signal, BAND)
    assert np.isfinite(together).all()
    for index in np.ndindex(2, 2):
        assert float(apparent_temperature(stored[index], signal, BAND)) == pytest.approx(together[index], rel=1e-13)


def test_every_kind_of_signal_has_its_function() -> None:
    """The three quantities a survey file may name."""
    assert set(QUANTITIES) == {"apparent-temperature", "object-temperature", "counts"}
