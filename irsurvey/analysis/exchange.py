"""What a surface exchanges heat with: the air, and what it faces, each with its share of the view."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from irsurvey.constants import STEFAN_BOLTZMANN
from irsurvey.heat.convection import film_coefficient
from irsurvey.heat.envelope import environmental_temperature
from irsurvey.heat.humid_air import dew_point
from irsurvey.heat.radiation import radiative_coefficient
from irsurvey.heat.sky import sky_temperature
from irsurvey.heat.surface import mean_radiant
from irsurvey.heat.view_factors import faces

Columns = Mapping[str, Any]
"""Scene values by name, arrays (n, 1) of float64: n scenes."""
Array = NDArray[np.float64]

TOTAL = "total_"
"""Before the name of an in-band emissivity: that over all wavelengths, which heat goes by."""


@dataclass(frozen=True, slots=True)
class Surroundings:
    """The scene values a surface exchanges heat with, and how.

    `radiant`: one name, of all it faces, or sky, air and ground, which share the view by its tilt.  `sign` is +1
    where heat that leaves the surface seen leaves the heated space or the component; `other_air` is the air on the
    other side of a wall.
    """

    air: str
    radiant: tuple[str, ...]
    sign: float
    convection: str
    height: float
    viewed_from: str | None
    other_air: str | None = None
    sky_model: str | None = None  # by which the sky is estimated; None: it is a value of the scene


def flux_of(t: Array, emissivity: str, around: Surroundings, values: Columns) -> Array:
    """Heat flux [W m⁻²] of surface temperatures [K], positive out of the heated space or the component."""
    return np.asarray(sum(terms_of(t, emissivity, around, values).values()))


def terms_of(t: Array, emissivity: str, around: Surroundings, values: Columns) -> dict[str, Array]:
    """The same by what takes the heat [W m⁻²]: "convection", and "radiation:<scene name>" of each thing faced."""
    terms = {"convection": around.sign * film_of(t, around, values) * (t - values[around.air])}
    for name, share in zip(around.radiant, _shares(around, values), strict=True):
        faced = temperature_of(name, around, values)
        exchanged = STEFAN_BOLTZMANN * total(emissivity, values) * share * (t**4 - faced**4)
        terms[f"radiation:{name}"] = around.sign * exchanged
    return terms


def film_of(t: Array, around: Surroundings, values: Columns) -> Array:
    """Convective film coefficient [W m⁻² K⁻¹] at surface temperatures [K]."""
    film = film_coefficient(
        around.convection,
        t,
        values[around.air],
        height=around.height,
        wind=values.get("wind", np.nan),
        viewed_from=around.viewed_from,
    )
    return np.asarray(values["convection"] * film)


def radiant_of(around: Surroundings, values: Columns) -> Array:
    """Mean radiant temperature [K] of what the surface faces."""
    faced = zip(_shares(around, values), around.radiant, strict=True)
    return np.asarray(mean_radiant([(share, temperature_of(name, around, values)) for share, name in faced]))


def temperature_of(name: str, around: Surroundings, values: Columns) -> Array:
    """Temperature [K] of something a surface faces: of the scene, or the sky's by its model, wrong by `sky_model`."""
    if name != "sky" or around.sky_model is None:
        return np.asarray(values[name])
    air = values[around.air]
    dew = dew_point(air, values["outdoor_humidity" if "outdoor_humidity" in values else "relative_humidity"])
    modelled = sky_temperature(around.sky_model, air, dew_point=dew, cloud=values["cloud"])
    return np.asarray(modelled + values["sky_model"])


def film_and_environment(t: Array, emissivity: str, around: Surroundings, values: Columns) -> tuple[Array, Array]:
    """Film coefficient of the face seen, convection and radiation together [W m⁻² K⁻¹], and the environmental
    temperature [K] that it takes: flux = h (t − environment)."""
    convective, radiant = film_of(t, around, values), radiant_of(around, values)
    radiative = radiative_coefficient(t, radiant, total(emissivity, values))
    environment = environmental_temperature(values[around.air], radiant, convective, radiative)
    return np.asarray(convective + radiative), np.asarray(environment)


def total(emissivity: str, values: Columns) -> Array:
    """The emissivity over all wavelengths beside an in-band one; where nobody knows it, the in-band one."""
    return np.asarray(values.get(TOTAL + emissivity, values[emissivity]))


def _shares(around: Surroundings, values: Columns) -> tuple[Any, ...]:
    return tuple(faces(values.get("tilt", np.pi / 2))) if len(around.radiant) > 1 else (1.0,)
