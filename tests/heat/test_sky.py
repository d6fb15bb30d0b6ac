"""Sky temperatures against their published formulas worked elsewhere, their limits and each other."""

from __future__ import annotations

import inspect
from itertools import combinations
from typing import Any

import numpy as np
import pytest
from scipy import constants

from irsurvey.constants import ZERO_CELSIUS
from irsurvey.heat.humid_air import dew_point
from irsurvey.heat.sky import SKY_MODELS, clouded, sky_temperature


def sky(name: str, air_c: Any, dew_c: Any = np.nan, cloud: Any = 0.0) -> Any:
    """Sky [°C] by name, from Celsius."""
    t = sky_temperature(name, air_c + ZERO_CELSIUS, dew_point=dew_c + ZERO_CELSIUS, cloud=cloud)
    return t - ZERO_CELSIUS


def radiation(name: str, air_c: float, dew_c: float, cloud: float = 0.0) -> float:
    """What the sky sends down [W m⁻²]."""
    return constants.Stefan_Boltzmann * (sky(name, air_c, dew_c, cloud) + ZERO_CELSIUS) ** 4


def test_swinbanks_clear_sky() -> None:
    """0.0552 T^1.5: air 20, 10, 0 °C → 3.91, −10.15, −23.95 °C, computed from the published formula [C]."""
    assert sky("swinbank", np.array([20.0, 10.0, 0.0])) == pytest.approx([3.91, -10.15, -23.95], abs=0.006)


def test_berdahl_and_martins_clear_sky_by_hand() -> None:
    """Air 20 °C, dew point 10 °C: ε = 0.711 + 0.056 + 0.0073 = 0.7743; T = 293.15 · 0.7743^¼ = 274.99 K [C]; and at a
    dew point of 0 °C the emissivity is 0.711 alone [P]."""
    assert sky("berdahl-martin", 20.0, 10.0) + ZERO_CELSIUS == pytest.approx(274.99, abs=0.006)
    assert radiation("berdahl-martin", 0.0, 0.0) == pytest.approx(
        0.711 * constants.Stefan_Boltzmann * ZERO_CELSIUS**4, rel=1e-12
    )


def test_clark_and_allens_sky_sends_down_what_a_weather_file_tool_prints() -> None:
    """Air 20 °C, dew point 10 °C, clear: 341.2 W/m², printed in the documentation of a public reader of weather files
    [S], with σ to four digits."""
    assert radiation("clark-allen", 20.0, 10.0) == pytest.approx(341.2, abs=0.1)


def test_clark_and_allens_cloud_is_its_own_polynomial() -> None:
    """1 + 0.0224N − 0.0035N² + 0.00028N³ at N = 5 and 10 tenths: 1.0595 and 1.154, by hand [C]."""
    clear = radiation("clark-allen", 5.0, 2.0)
    assert radiation("clark-allen", 5.0, 2.0, 0.5) / clear == pytest.approx(1.0595, rel=1e-9)
    assert radiation("clark-allen", 5.0, 2.0, 1.0) / clear == pytest.approx(1.154, rel=1e-9)


def test_cloud_closes_84_percent_of_what_a_clear_sky_lacks() -> None:
    """Unsworth & Monteith (1975) [S]: ε = (1 − 0.84c)ε₀ + 0.84c."""
    for cloud in (0.0, 0.3, 1.0):
        assert clouded(0.7, cloud) == pytest.approx((1 - 0.84 * cloud) * 0.7 + 0.84 * cloud, rel=1e-12)
    assert radiation("swinbank", 5.0, 0.0, 1.0) > radiation("swinbank", 5.0, 0.0, 0.5) > radiation("swinbank", 5.0, 0.0)


@pytest.mark.parametrize("cloud", [0.0, 0.5, 1.0])
def test_the_models_agree_within_twice_their_uncertainties(cloud: float) -> None:
    """Winter to summer, dry to damp; 2√(u₁² + u₂²) of any two."""
    for air_c in (-10.0, 0.0, 10.0, 20.0):
        for humidity in (0.5, 0.7, 0.9):
            dew_c = float(dew_point(air_c + ZERO_CELSIUS, humidity)) - ZERO_CELSIUS
            found = {name: sky(name, air_c, dew_c, cloud) for name in SKY_MODELS}
            for one, other in combinations(found, 2):
                allowed = 2 * np.hypot(SKY_MODELS[one].u, SKY_MODELS[other].u)
                assert abs(found[one] - found[other]) < allowed, (one, other, air_c, humidity)


def test_the_stated_uncertainty_is_the_error_of_the_radiation_found_at_stations() -> None:
    """22.4 W/m² (Li, Jiang & Coimbra 2017, as quoted [S]) over 4σT³ at a sky of −10 °C, rounded up to half a kelvin."""
    per_kelvin = 4 * constants.Stefan_Boltzmann * (ZERO_CELSIUS - 10) ** 3
    assert 22.4 / per_kelvin <= SKY_MODELS["berdahl-martin"].u < 22.4 / per_kelvin + 0.5
    assert SKY_MODELS["swinbank"].u > SKY_MODELS["berdahl-martin"].u  # it knows no humidity


@pytest.mark.parametrize("name", SKY_MODELS)
def test_every_model_says_what_it_needs_and_rests_on(name: str) -> None:
    model = SKY_MODELS[name]
    assert tuple(inspect.signature(model.function).parameters) == model.needs
    assert model.description
    assert model.source
    assert model.mark in {"P", "S", "M"}
    assert model.u > 0


@pytest.mark.parametrize("name", SKY_MODELS)
@pytest.mark.filterwarnings("error")
def test_every_sky_broadcasts_is_never_above_the_air_and_is_nan_outside(name: str) -> None:
    air, cloud = np.array([[-50.0], [0.0], [30.0], [50.0]]), np.array([0.0, 0.4, 1.0])
    dew = air - 1.0
    together = sky(name, air, dew, cloud)
    singly = [[sky(name, float(a), float(a) - 1.0, float(c)) for c in cloud] for a in air[:, 0]]
    np.testing.assert_allclose(together, singly, rtol=1e-13, atol=1e-12)
    assert (together <= air + 1e-9).all()
    assert np.isnan([sky(name, -51.0, 0.0), sky(name, 51.0, 0.0), sky(name, np.nan, 0.0)]).all()
    assert np.isnan(sky(name, 5.0, 2.0, np.array([-0.01, 1.01, np.nan]))).all()
    if "dew_point" in SKY_MODELS[name].needs:
        assert np.isnan(sky(name, 5.0, np.nan))


def test_an_unknown_sky_is_a_key_error() -> None:
    with pytest.raises(KeyError):
        sky("blue", 5.0)
