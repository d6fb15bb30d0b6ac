"""Broadband temperature of the sky, for the heat a face loses to it: the registry a survey's `sky_model` chooses from.

For heat flux only.  What a camera sees mirrored is the sky in its own band, which is far colder at the zenith and must
be measured.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Final

import numpy as np

from irsurvey.constants import ZERO_CELSIUS
from irsurvey.heat import Numbers


@dataclass(frozen=True, slots=True)
class SkyModel:
    """One way to estimate the sky, with what it rests on.  `u` is its standard uncertainty [K].

    `needs` names the arguments that count among t_air, dew_point, cloud; marks: P published, S as quoted by a
    secondary text, M from memory."""

    function: Callable[..., Numbers]
    needs: tuple[str, ...]
    description: str
    source: str
    mark: str
    u: float


def sky_temperature(name: str, t_air: Numbers, *, dew_point: Numbers, cloud: Numbers) -> Numbers:
    """Temperature [K] of a black sky with the radiation of the real one, by the model of this name: an estimate.

    Outdoor air and dew point [K], `cloud` the fraction of the sky covered, 0…1.  NaN for air outside −50…50 °C, for
    cloud outside 0…1, and where what the model needs is NaN.  Unknown names raise KeyError."""
    model = SKY_MODELS[name]
    given: dict[str, Any] = {"t_air": t_air, "dew_point": dew_point, "cloud": cloud}
    return model.function(**{argument: given[argument] for argument in model.needs})


def swinbank(t_air: Numbers, cloud: Numbers) -> Numbers:
    """0.0552 T_a^1.5, all temperatures [K] (Swinbank 1963), with cloud by Unsworth & Monteith."""
    t = _air(t_air)
    return _sky(t, clouded((0.0552 * np.sqrt(t)) ** 4, cloud))


def berdahl_martin(t_air: Numbers, dew_point: Numbers, cloud: Numbers) -> Numbers:
    """ε = 0.711 + 0.56(θ_d/100) + 0.73(θ_d/100)², dew point θ_d [°C] (Berdahl & Martin 1984), with cloud likewise.

    Their corrections for the hour (0.013 at most, 1 K) and for altitude (0.01 each 1000 m, 1 K) are left out [M]."""
    hundred = (dew_point - ZERO_CELSIUS) / 100
    return _sky(_air(t_air), clouded(0.711 + hundred * (0.56 + 0.73 * hundred), cloud))


def clark_allen(t_air: Numbers, dew_point: Numbers, cloud: Numbers) -> Numbers:
    """ε = [0.787 + 0.764 ln(T_d/273)](1 + 0.0224N − 0.0035N² + 0.00028N³), N tenths of cloud (Clark & Allen 1978)."""
    tenths = 10 * _fraction(cloud)
    clear = 0.787 + 0.764 * np.log(dew_point / 273)
    return _sky(_air(t_air), clear * (1 + tenths * (0.0224 + tenths * (-0.0035 + tenths * 0.00028))))


def clouded(clear: Numbers, cloud: Numbers) -> Numbers:
    """Emissivity of a sky from that of a clear one: ε = ε₀ + 0.84c(1 − ε₀), cloud fraction c 0…1.

    Unsworth & Monteith (1975), Q. J. R. Meteorol. Soc. 101, 13–24 [S]: low cloud at near air temperature; under high
    thin cloud the sky stays colder than this."""
    return clear + 0.84 * _fraction(cloud) * (1 - clear)


def _sky(t_air: Numbers, emissivity: Numbers) -> Numbers:
    """A sky never radiates more than a black one at air temperature: where a fit runs beyond 1 it is cut off there."""
    return np.minimum(emissivity, 1.0) ** 0.25 * t_air


def _air(t: Numbers) -> Numbers:
    return np.where(np.abs(t - ZERO_CELSIUS) <= 50, t, np.nan)[()]


def _fraction(cloud: Numbers) -> Numbers:
    return np.where(np.greater_equal(cloud, 0) & np.less_equal(cloud, 1), cloud, np.nan)[()]


# Standard uncertainties: root-mean-square errors of the radiation against stations, over 4σT³ (4.1 W m⁻² K⁻¹ at a sky
# of −10 °C).  Berdahl–Martin 22.4 W/m² over seven North American stations (Li, Jiang & Coimbra 2017, Solar Energy 144,
# 40–48, as quoted).  Clark–Allen 10 W/m² by its authors at one place, elsewhere reported among the larger: the same.
# Swinbank, which knows no humidity: a judgement.
SKY_MODELS: Final[dict[str, SkyModel]] = {
    "swinbank": SkyModel(
        swinbank, ("t_air", "cloud"), "clear sky by air temperature alone, cloud added",
        "Swinbank (1963), Q. J. R. Meteorol. Soc. 89, 339–348; cloud: Unsworth & Monteith (1975)", "P", 7.0,
    ),
    "berdahl-martin": SkyModel(
        berdahl_martin, ("t_air", "dew_point", "cloud"), "clear sky by air temperature and dew point, cloud added",
        "Berdahl & Martin (1984), Solar Energy 32, 663–664; cloud: Unsworth & Monteith (1975)", "P", 5.5,
    ),
    "clark-allen": SkyModel(
        clark_allen, ("t_air", "dew_point", "cloud"), "sky by air temperature, dew point and cloud",
        "Clark & Allen (1978), 2nd National Passive Solar Conference, 675–678", "S", 5.5,
    ),
}
"""The sky models a survey may name."""
