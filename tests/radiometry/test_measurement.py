"""The measurement equation against spectral integration, worked examples, exact limits and its own inverse."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import nan

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy import constants as codata
from scipy.integrate import simpson
from scipy.optimize import brentq

from irsurvey.radiometry import measurement
from irsurvey.radiometry.band import band_table
from irsurvey.radiometry.measurement import (
    Path,
    amplification,
    apparent_temperature,
    object_temperature,
    object_temperatures,
)

BANDS = {"7.5-13": (7.5e-6, 13e-6), "8-14": (8e-6, 14e-6), "3-5": (3e-6, 5e-6)}
LONG_WAVE = BANDS["7.5-13"]
NO_AIR = Path(t_air=nan, distance=0.0, vapour_density=nan, pressure=nan)
ROOM = Path(t_air=293.15, distance=5.0, vapour_density=0.0086, pressure=101_325.0)
ZERO = 273.15

TAU_ERROR = {"7.5-13": 0.0025, "8-14": 0.0010, "3-5": 0.0056}
"""Largest error of our transmittance against LOWTRAN7 to 200 m (see test_atmosphere.py)."""

INVERSE = 1e-5
"""[K], what the iterated inverse claims."""


# --- spectral integration that shares nothing with the package -------------------------------------------------


@dataclass(frozen=True)
class Air:
    """Air that passes `short` below the wavelength `edge` [m] and `long` above it: not grey, yet integrable exactly."""

    short: float
    long: float
    edge: float

    def spectrum(self, wavelengths: np.ndarray) -> np.ndarray:
        return np.where(wavelengths < self.edge, self.short, self.long)


def planck(wavelengths: np.ndarray, kelvin: float) -> np.ndarray:
    """Planck's law written out with the constants of scipy [W m⁻² sr⁻¹ m⁻¹]."""
    exponent = codata.h * codata.c / (codata.k * wavelengths * kelvin)
    return 2 * codata.h * codata.c**2 / wavelengths**5 / np.expm1(exponent)


def integral(spectrum, band: tuple[float, float], edge: float) -> float:
    """Simpson's rule over both sides of the edge, 2 × 400 intervals: exact to 1e-10 for Planck's function here."""
    total = 0.0
    for low, high in ((band[0], edge), (edge, band[1])):
        wavelengths = np.linspace(low, high, 401)
        inside = wavelengths + (high - low) * 1e-12 * np.sign((low + high) / 2 - wavelengths)  # this side of the edge
        total += float(simpson(spectrum(inside), x=wavelengths))
    return total


def spectral_apparent(t_object: float, emissivity: float, t_reflected: float, path: Path, band, air: Air) -> float:
    """Apparent temperature by adding up spectra, wavelength by wavelength, and inverting the integral."""
    window, mirror = path.window_transmittance, path.window_reflectance

    def seen(wavelengths: np.ndarray) -> np.ndarray:
        tau = air.spectrum(wavelengths)
        leaving = emissivity * planck(wavelengths, t_object) + (1 - emissivity) * planck(wavelengths, t_reflected)
        at_window = tau * leaving + (1 - tau) * planck(wavelengths, path.t_air)
        total = window * at_window
        if window + mirror < 1:
            total += (1 - window - mirror) * planck(wavelengths, path.t_window)
        if mirror:
            total += mirror * planck(wavelengths, path.t_window_ambient)
        return total

    radiance = integral(seen, band, air.edge)
    return brentq(lambda t: integral(lambda w: planck(w, t), band, air.edge) / radiance - 1, 160, 1700, xtol=1e-7)


class BandAir:
    """The same air as the package sees it: one absorptance per source temperature, weighted with Planck's law."""

    def __init__(self, air: Air, band: tuple[float, float]) -> None:
        self.air, self.band = air, band

    def at(self, t_source) -> np.ndarray:
        def one(kelvin: float) -> float:
            whole = integral(lambda w: planck(w, kelvin), self.band, self.air.edge)
            passed = integral(lambda w: self.air.spectrum(w) * planck(w, kelvin), self.band, self.air.edge)
            return 1 - passed / whole

        return np.vectorize(one)(t_source)


def states(count: int, seed: int) -> list[tuple[float, float, float, Path]]:
    """Object temperature, emissivity, reflected temperature, path behind a window; drawn widely."""
    rng = np.random.default_rng(seed)
    drawn = []
    for _ in range(count):
        tau = rng.uniform(0.4, 1.0)
        path = Path(
            t_air=rng.uniform(260, 310),
            distance=10.0,
            vapour_density=0.01,
            pressure=1e5,
            window_transmittance=tau,
            window_reflectance=rng.uniform(0, 1 - tau),
            t_window=rng.uniform(270, 320),
            t_window_ambient=rng.uniform(270, 320),
        )
        drawn.append((rng.uniform(250, 570), rng.uniform(0.1, 1.0), rng.uniform(230, 350), path))
    return drawn


@pytest.mark.parametrize("name", BANDS)
def test_the_equation_is_the_spectral_integral_when_the_air_is_not_grey(
    name: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Independent spectral integration (scipy, Simpson's rule): a term per temperature loses nothing against it.

    Tolerance: the run-time table's worst error, 2e-5 K in the long wave and 6e-5 K in 3–5 µm."""
    band = BANDS[name]
    air = Air(short=0.7, long=0.95, edge=(band[0] + band[1]) / 2)
    monkeypatch.setattr(measurement, "absorptance", lambda **_: BandAir(air, band))
    for t_object, emissivity, t_reflected, path in states(40, seed=3):
        theirs = spectral_apparent(t_object, emissivity, t_reflected, path, band, air)
        ours = float(apparent_temperature(t_object, emissivity, t_reflected, path, band))
        assert ours == pytest.approx(theirs, abs=1e-4)
        back = float(object_temperature(theirs, emissivity, t_reflected, path, band))
        gain = path.window_transmittance * emissivity * 0.7  # at least; an error of 1e-4 K grows by its inverse
        slopes = band_table(band).slope(theirs) / band_table(band).slope(t_object)
        assert back == pytest.approx(t_object, abs=1e-4 * (1 + float(slopes) / gain))


def test_one_transmittance_for_every_term_would_be_caught(monkeypatch: pytest.MonkeyPatch) -> None:
    """The test above can fail: grey air of the same transmittance for the object misses by far more than 1e-4 K."""
    band = LONG_WAVE
    air = Air(short=0.7, long=0.95, edge=10e-6)
    theirs = spectral_apparent(500.0, 0.5, 250.0, replace(ROOM), band, air)
    grey = float(1 - BandAir(air, band).at(500.0))
    monkeypatch.setattr(measurement, "absorptance", lambda **_: BandAir(Air(grey, grey, 10e-6), band))
    assert abs(float(apparent_temperature(500.0, 0.5, 250.0, ROOM, band)) - theirs) > 0.05


# --- worked examples ------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", BANDS)
def test_the_worked_examples_are_met_term_by_term(columns, name: str) -> None:
    """worked_examples_public.csv: integrals by quadrature, transmittance of each term by LOWTRAN7, seven figures.

    Tolerance of a term: the run-time table reads high by at most 4e-5 W m⁻² sr⁻¹ (2e-5 K), the rounding is less."""
    x, table = columns("worked_examples_public.csv", name), band_table(BANDS[name])
    objects, reflected = table.radiance(x["t_obj_c"] + ZERO), table.radiance(x["t_refl_c"] + ZERO)
    air, window = table.radiance(x["t_air_c"] + ZERO), table.radiance(x["t_win_c"] + ZERO)
    for ours, key in ((objects, "L_obj_bb"), (reflected, "L_refl_bb"), (air, "L_air_bb")):
        assert ours == pytest.approx(x[key], abs=5e-5)
    terms = {
        "term_object": x["win_tau"] * x["tau_at_Tobj"] * x["emissivity"] * objects,
        "term_reflected": x["win_tau"] * x["tau_at_Trefl"] * (1 - x["emissivity"]) * reflected,
        "term_air": x["win_tau"] * (1 - x["tau_at_Tair"]) * air,
        "term_window": (1 - x["win_tau"]) * window,
    }
    for key, ours in terms.items():
        assert ours == pytest.approx(x[key], abs=5e-5)
    total = sum(terms.values())
    assert total == pytest.approx(x["L_meas"], abs=1e-4)
    assert table.temperature(total) == pytest.approx(x["t_app_c"] + ZERO, abs=3e-5)  # 2e-5 K and the rounding


@pytest.mark.parametrize("name", BANDS)
def test_the_worked_examples_are_met_with_our_own_air(columns, name: str) -> None:
    """worked_examples_public.csv: apparent temperature through LOWTRAN7 air.

    Our transmittance is off by at most TAU_ERROR in each of three terms, which bounds the error of the sum."""
    x, table = columns("worked_examples_public.csv", name), band_table(BANDS[name])
    celsius = x["t_air_c"]
    vapour_pressure = x["rh_pct"] / 100 * 611.2 * np.exp(17.62 * celsius / (243.12 + celsius))  # Sonntag 1990
    path = Path(
        t_air=celsius + ZERO,
        distance=x["path_m"],
        vapour_density=vapour_pressure / (461.52 * (celsius + ZERO)),
        pressure=x["p_hpa"] * 100,
        window_transmittance=x["win_tau"],
        t_window=x["t_win_c"] + ZERO,
    )
    ours = apparent_temperature(x["t_obj_c"] + ZERO, x["emissivity"], x["t_refl_c"] + ZERO, path, BANDS[name])
    weights = x["emissivity"] * x["L_obj_bb"] + (1 - x["emissivity"]) * x["L_refl_bb"] + x["L_air_bb"]
    bound = TAU_ERROR[name] * x["win_tau"] * weights / table.slope(x["t_app_c"] + ZERO)
    error = np.abs(ours - x["t_app_c"] - ZERO)
    print(f"\n{name} µm: apparent temperature off by at most {error.max():.4f} K, bound {bound.min():.3f} K")
    assert (error <= bound).all()


def test_a_bare_bar_that_looks_lukewarm_is_hot() -> None:
    """35 °C apparent, 25 °C reflected is truly 80/100/151 °C at ε .15/.10/.05: computed for 7.5–13 µm, given to 1 K."""
    emissivity = np.array([0.15, 0.10, 0.05])
    true = object_temperature(35 + ZERO, emissivity, 25 + ZERO, NO_AIR, LONG_WAVE) - ZERO
    assert true == pytest.approx([80, 100, 151], abs=0.5)
    assert (amplification(true + ZERO, emissivity, 25 + ZERO, NO_AIR, LONG_WAVE) > 3).all()  # where to warn


def test_an_uncertain_low_emissivity_is_worse_than_an_uncertain_high_one() -> None:
    """Computed for 8–14 µm, true 80 °C, reflected 25 °C, printed to 0.1 K: ε .30 ± .05 → 73.3…88.9, .70 ± .05 → …"""
    for emissivity, expected in ((0.30, (73.3, 88.9)), (0.70, (76.9, 83.5))):
        seen = apparent_temperature(80 + ZERO, emissivity, 25 + ZERO, NO_AIR, BANDS["8-14"])
        read = object_temperature(
            seen, np.array([emissivity + 0.05, emissivity - 0.05]), 25 + ZERO, NO_AIR, BANDS["8-14"]
        )
        assert read - ZERO == pytest.approx(expected, abs=0.051)


# --- exact limits ---------------------------------------------------------------------------------------------

temperatures = st.floats(220, 600)
fractions = st.floats(0.02, 1)


@settings(deadline=None)  # the first example builds tables
@given(temperatures, fractions, st.floats(0, 300), st.floats(0, 1), st.floats(0, 1), st.sampled_from(sorted(BANDS)))
def test_where_everything_is_equally_warm_the_camera_sees_that_temperature(
    kelvin: float, emissivity: float, distance: float, window: float, mirror: float, name: str
) -> None:
    """Exact: an isothermal enclosure is a black body (Kirchhoff)."""
    tau = max(window, 0.01)
    path = Path(kelvin, distance, 0.005, 1e5, 0.0, tau, mirror * (1 - tau), kelvin, kelvin)
    # a sum of six terms of which the weights add up to 1: rounding, over the narrowest slope
    assert float(apparent_temperature(kelvin, emissivity, kelvin, path, BANDS[name])) == pytest.approx(kelvin, abs=1e-8)
    amplified = INVERSE * (1 + 1 / (tau * emissivity))
    assert float(object_temperature(kelvin, emissivity, kelvin, path, BANDS[name])) == pytest.approx(
        kelvin, abs=amplified
    )


@settings(deadline=None)  # the first example builds tables
@given(st.floats(150, 1800), st.sampled_from(sorted(BANDS)))
def test_a_black_body_without_air_and_window_is_seen_as_it_is(kelvin: float, name: str) -> None:
    """Exact; nothing else needs to be known."""
    assert float(apparent_temperature(kelvin, 1.0, nan, NO_AIR, BANDS[name])) == pytest.approx(kelvin, abs=1e-9)
    assert float(object_temperature(kelvin, 1.0, nan, NO_AIR, BANDS[name])) == pytest.approx(kelvin, abs=1e-9)


@settings(deadline=None)  # the first example builds tables
@given(temperatures, fractions, st.floats(220, 350))
def test_a_higher_emissivity_brings_the_reading_closer_to_the_surroundings(
    t_apparent: float, emissivity: float, t_reflected: float
) -> None:
    """The sign of ∂To/∂ε flips where the object is colder than what it reflects (ISO 18434-1 practice; exact here)."""
    low, high = object_temperature(
        t_apparent, np.array([emissivity, emissivity * 0.5 + 0.5]), t_reflected, NO_AIR, LONG_WAVE
    )
    assume(np.isfinite(low) and abs(t_apparent - t_reflected) > 1e-3)
    assert (low > high) == (t_apparent > t_reflected) or abs(low - high) < 1e-9


# --- the inverse ----------------------------------------------------------------------------------------------


@settings(deadline=None)  # the first example builds tables
@given(
    st.sampled_from(sorted(BANDS)),
    st.floats(220, 900),
    st.floats(0.05, 1),
    st.floats(220, 500),
    st.floats(0, 500),
    st.floats(253, 313),
    st.floats(0, 0.03),
    st.floats(0.3, 1),
)
def test_there_and_back_is_where_it_began(
    name: str,
    t_object: float,
    emissivity: float,
    t_reflected: float,
    distance: float,
    t_air: float,
    vapour_density: float,
    window: float,
) -> None:
    path = Path(t_air, distance, vapour_density, 1e5, 0.0, window, (1 - window) / 2, 290.0, 295.0)
    scene = (emissivity, t_reflected, path, BANDS[name])
    seen = apparent_temperature(t_object, *scene)
    assert float(object_temperature(seen, *scene)) == pytest.approx(t_object, abs=INVERSE)
    several = np.array([float(seen), 280.0, 330.0])
    np.testing.assert_allclose(
        object_temperatures(several, *scene), object_temperature(several, *scene), rtol=0, atol=INVERSE
    )


def test_what_the_tabulated_inverse_cannot_solve_the_iterated_cannot_either() -> None:
    seen = np.linspace(150, 700, 5000)
    scene = (0.1, 300.0, ROOM, LONG_WAVE)
    tabulated, iterated = object_temperatures(seen, *scene), object_temperature(seen, *scene)
    np.testing.assert_array_equal(np.isnan(tabulated), np.isnan(iterated))
    assert np.isnan(tabulated).sum() > 100


@pytest.mark.filterwarnings("error")
def test_no_physical_solution_is_nan_never_a_made_up_temperature() -> None:
    """A mirror of 290 K surroundings cannot look like 250 K, whatever its own temperature."""
    for inverse in (object_temperature, object_temperatures):
        seen = np.array([250.0, 295.0, np.nan, 100.0, 2000.0])
        assert np.isnan(inverse(seen, 0.1, 290.0, NO_AIR, LONG_WAVE)).tolist() == [True, False, True, True, True]
    assert np.isnan(apparent_temperature([100.0, 1900.0, np.nan], 0.9, 290.0, NO_AIR, LONG_WAVE)).all()


@pytest.mark.filterwarnings("error")
def test_impossible_optics_are_nan_and_nothing_is_warned_of() -> None:
    for emissivity in (0.0, -0.1, 1.01, nan):
        assert np.isnan(object_temperature(300.0, emissivity, 290.0, ROOM, LONG_WAVE))
    window = replace(ROOM, window_transmittance=0.8, t_window=295.0, t_window_ambient=295.0)
    for wrong in ({"window_transmittance": 0.0}, {"window_reflectance": 0.21}, {"window_reflectance": -0.1}):
        assert np.isnan(object_temperature(300.0, 0.9, 290.0, replace(window, **wrong), LONG_WAVE))
    for emissivity in (0.9, 1.0):
        behind = replace(ROOM, distance=-1.0)
        assert np.isnan(object_temperature(300.0, emissivity, 290.0, behind, LONG_WAVE))
        assert np.isnan(object_temperatures(np.array([300.0]), emissivity, 290.0, behind, LONG_WAVE)).all()
    assert np.isnan(amplification(300.0, 0.0, 290.0, ROOM, LONG_WAVE))


def test_a_temperature_without_weight_need_not_be_known() -> None:
    known = Path(t_air=300.0, distance=0.0, vapour_density=0.01, pressure=1e5)
    assert object_temperature(310.0, 0.9, 290.0, NO_AIR, LONG_WAVE) == object_temperature(
        310.0, 0.9, 290.0, known, LONG_WAVE
    )
    for tau, rho in ((0.8, 0.2), (0.7, 0.3), (0.9, 0.1)):  # 1 − τw − ρw is not exactly 0 in floating point
        mirror = replace(known, window_transmittance=tau, window_reflectance=rho, t_window_ambient=295.0)
        assert np.isfinite(object_temperature(310.0, 0.9, 290.0, mirror, LONG_WAVE))
    needed = replace(known, window_transmittance=0.8, window_reflectance=0.1, t_window_ambient=295.0)
    assert np.isnan(object_temperature(310.0, 0.9, 290.0, needed, LONG_WAVE))


# --- sensitivities --------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", BANDS)
def test_the_amplification_is_the_derivative_of_the_inverse(name: str) -> None:
    """Numeric derivative over ±0.5 K; what it and the table's slope err by is of the order of 1e-4."""
    path = replace(ROOM, distance=100.0, window_transmittance=0.8, t_window=295.0)
    for t_object, emissivity in ((260.0, 0.9), (300.0, 0.3), (420.0, 0.6)):
        scene = (emissivity, 285.0, path, BANDS[name])
        seen = apparent_temperature(t_object, *scene)
        half = 0.5 / float(amplification(t_object, *scene))  # ±0.5 K of object temperature
        difference = np.diff(object_temperature(seen + np.array([-half, half]), *scene))[0] / (2 * half)
        assert float(amplification(t_object, *scene)) == pytest.approx(difference, rel=3e-4)


class Grey:
    """Air of one absorptance for all radiation."""

    def __init__(self, absorptance: float) -> None:
        self.absorptance = absorptance

    def at(self, t_source) -> np.ndarray:
        return np.full(np.shape(t_source), self.absorptance)

    def slope(self, t_source) -> np.ndarray:
        return np.zeros(np.shape(t_source))


def test_the_sensitivities_are_those_of_the_textbook_formulas(monkeypatch: pytest.MonkeyPatch) -> None:
    """First-order formulas of the measurement equation with one transmittance, S band radiance, S' its slope:

    ∂To/∂T_app = S'app/(τw τ ε S'o)    ∂To/∂ε = −(So − Sr)/(ε S'o)    ∂To/∂Tr = −((1 − ε)/ε) S'r/S'o
    ∂To/∂τ = −(ε So + (1 − ε) Sr − Sa)/(τ ε S'o)    ∂To/∂τw = −(Lin − Sw)/(τw τ ε S'o)
    """
    band, table = BANDS["8-14"], band_table(BANDS["8-14"])
    t_object, t_reflected, t_air, t_window = 340.0, 285.0, 293.0, 298.0
    eps, tau, tau_w = 0.7, 0.9, 0.8

    def read(seen: float, eps: float, t_reflected: float, tau: float, tau_w: float) -> float:
        monkeypatch.setattr(measurement, "absorptance", lambda **_: Grey(1 - tau))
        path = replace(ROOM, t_air=t_air, window_transmittance=tau_w, t_window=t_window)
        return float(object_temperature(seen, eps, t_reflected, path, band))

    monkeypatch.setattr(measurement, "absorptance", lambda **_: Grey(1 - tau))
    path = replace(ROOM, t_air=t_air, window_transmittance=tau_w, t_window=t_window)
    seen = float(apparent_temperature(t_object, eps, t_reflected, path, band))
    so, sr, sa, sw = (float(table.radiance(t)) for t in (t_object, t_reflected, t_air, t_window))
    slope_o, slope_r, slope_seen = (float(table.slope(t)) for t in (t_object, t_reflected, seen))
    inside = tau * (eps * so + (1 - eps) * sr) + (1 - tau) * sa
    formulas = (
        slope_seen / (tau_w * tau * eps * slope_o),
        -(so - sr) / (eps * slope_o),
        -(1 - eps) / eps * slope_r / slope_o,
        -(eps * so + (1 - eps) * sr - sa) / (tau * eps * slope_o),
        -(inside - sw) / (tau_w * tau * eps * slope_o),
    )
    nominal = np.array([seen, eps, t_reflected, tau, tau_w])
    for index, (formula, step) in enumerate(zip(formulas, (0.3, 3e-3, 0.3, 3e-3, 3e-3), strict=True)):
        move = step * (np.arange(5) == index)
        numeric = (read(*(nominal + move)) - read(*(nominal - move))) / (2 * step)
        # central differences err by the square of the step, the table's slope by 1e-4
        assert numeric == pytest.approx(formula, rel=1e-3), index
    monkeypatch.setattr(measurement, "absorptance", lambda **_: Grey(1 - tau))
    assert float(amplification(t_object, eps, t_reflected, path, band)) == pytest.approx(formulas[0], rel=1e-12)


def test_a_black_body_is_not_amplified() -> None:
    assert float(amplification(310.0, 1.0, nan, NO_AIR, LONG_WAVE)) == pytest.approx(1, rel=1e-9)  # exact


# --- vectors --------------------------------------------------------------------------------------------------


def test_scenes_times_values_give_what_each_alone_gives() -> None:
    rng = np.random.default_rng(5)
    count = 7
    fields = {
        "t_air": rng.uniform(280, 300, (count, 1)),
        "distance": rng.uniform(0, 50, (count, 1)),
        "vapour_density": rng.uniform(0, 0.02, (count, 1)),
        "pressure": rng.uniform(9e4, 1e5, (count, 1)),
        "excess": rng.uniform(-0.2, 0.2, (count, 1)),
        "window_transmittance": rng.uniform(0.5, 0.9, (count, 1)),
        "window_reflectance": rng.uniform(0, 0.1, (count, 1)),
        "t_window": rng.uniform(280, 300, (count, 1)),
        "t_window_ambient": rng.uniform(280, 300, (count, 1)),
    }
    emissivity, t_reflected = rng.uniform(0.3, 1, (count, 1)), rng.uniform(250, 310, (count, 1))
    values = rng.uniform(270, 350, 11)
    for shaped in (values, values[np.newaxis], np.broadcast_to(values, (count, 11))):
        for function in (apparent_temperature, object_temperature, amplification):
            together = function(shaped, emissivity, t_reflected, Path(**fields), LONG_WAVE)
            assert together.shape == (count, 11)
            for row, column in np.ndindex(count, 11):
                path = Path(**{name: float(field[row, 0]) for name, field in fields.items()})
                alone = function(values[column], emissivity[row, 0], t_reflected[row, 0], path, LONG_WAVE)
                # sums in another order: the last digits of radiances, amplified by 1/ε
                assert float(alone) == pytest.approx(together[row, column], rel=1e-12)


def test_through_so_much_air_that_nothing_comes_there_is_no_temperature_and_no_warning(
    recwarn: pytest.WarningsRecorder,
) -> None:
    opaque = replace(ROOM, distance=1e9)
    assert np.isnan(object_temperature(295.0, 0.9, 293.15, opaque, LONG_WAVE))
    assert not recwarn.list
