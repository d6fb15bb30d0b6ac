"""The measurement equation: from an object's temperature to what the camera sees through air and window, and back.

    L = τw·[τ(To)·ε·L(To) + τ(Tr)·(1 − ε)·L(Tr) + (1 − τ(Ta))·L(Ta)] + (1 − τw − ρw)·L(Tw) + ρw·L(Twr)

L is band radiance; the transmittance τ of the air is taken per term, for radiation of that term's temperature.
The apparent temperature is that of the black body that gives L.  ISO 18434-1:2008; window: ASTM E1897.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cache, lru_cache

import numpy as np
from numpy.typing import ArrayLike

from irsurvey.radiometry.atmosphere import Absorptance, absorptance, source
from irsurvey.radiometry.band import BandTable, band_table
from irsurvey.radiometry.planck import Array, Band, numbers

_ITERATIONS = 6  # each takes at least a factor 20 off the error of the start, see tests
_ROUNDING = 1e-12  # of 1 − τw − ρw


@dataclass(frozen=True, slots=True)
class Path:
    """What lies between object and camera; broadcastable numbers, SI (temperatures [K]).

    `vapour_density` [kg m⁻³]; `excess`: relative error of the absorptance of the air.  A temperature whose
    term has no weight (no window, distance 0) does not matter and may be NaN.
    """

    t_air: ArrayLike
    distance: ArrayLike
    vapour_density: ArrayLike
    pressure: ArrayLike
    excess: ArrayLike = 0.0
    window_transmittance: ArrayLike = 1.0
    window_reflectance: ArrayLike = 0.0
    t_window: ArrayLike = math.nan
    t_window_ambient: ArrayLike = math.nan


@dataclass(frozen=True, slots=True, eq=False)
class _Terms:
    """One scene in numbers: L = gain·τ(To)·L(To) + rest."""

    table: BandTable
    air: Absorptance
    gain: Array
    rest: Array


def apparent_temperature(
    t_object: ArrayLike, emissivity: ArrayLike, t_reflected: ArrayLike, path: Path, band: Band
) -> Array:
    """Apparent temperature [K] the camera sees of an object at `t_object` [K].

    All arguments and the fields of `path` broadcast.  Emissivity outside (0, 1], a negative transmittance or
    reflectance, their sum above 1, or a temperature outside 150…1800 K gives NaN."""
    scene = _terms(emissivity, t_reflected, path, band)
    emitted = scene.table.radiance(t_object) * (1 - scene.air.at(t_object))
    return scene.table.temperature(scene.gain * emitted + scene.rest)


def object_temperature(
    t_apparent: ArrayLike, emissivity: ArrayLike, t_reflected: ArrayLike, path: Path, band: Band
) -> Array:
    """Temperature [K] of the object seen at `t_apparent` [K]: the inverse of `apparent_temperature` to 1e-5 K.

    All arguments and the fields of `path` broadcast.  NaN where there is no physical solution: air, window and
    reflection alone would already give more than was seen."""
    scene = _terms(emissivity, t_reflected, path, band)
    emitted = (scene.table.radiance(t_apparent) - scene.rest) / scene.gain
    emitted = np.where(emitted > 0, emitted, np.nan)
    t_object = np.asarray(t_apparent, float)
    with np.errstate(divide="ignore"):  # through so much air that nothing comes of it: infinite, which has no solution
        for _ in range(_ITERATIONS):
            t_object = scene.table.temperature(emitted / (1 - scene.air.at(t_object)))
    return t_object


def object_temperatures(t_apparent: Array, emissivity: float, t_reflected: float, path: Path, band: Band) -> Array:
    """`object_temperature` of many values in one scene of plain numbers, several times faster, equal to 1e-5 K.

    τ(T)·L(T) of that scene is tabulated over the band's table and read backwards."""
    scene = _one_scene(emissivity, t_reflected, path, band)
    air, table = scene.air, scene.table
    emitted = np.array([1 - air.constant, -air.linear, -air.square]) @ _powers(band)
    wanted = (table.radiance(t_apparent) - scene.rest) / scene.gain
    return np.interp(wanted, emitted, table.temperatures, np.nan, np.nan)


def amplification(t_object: ArrayLike, emissivity: ArrayLike, t_reflected: ArrayLike, path: Path, band: Band) -> Array:
    """∂To/∂T_app: how much an error of the apparent temperature grows in the object temperature of `t_object` [K]."""
    scene = _terms(emissivity, t_reflected, path, band)
    transmittance, radiance = 1 - scene.air.at(t_object), scene.table.radiance(t_object)
    t_apparent = scene.table.temperature(scene.gain * transmittance * radiance + scene.rest)
    emitted_slope = transmittance * scene.table.slope(t_object) - scene.air.slope(t_object) * radiance
    return np.asarray(scene.table.slope(t_apparent) / (scene.gain * emitted_slope))


def _terms(emissivity: ArrayLike, t_reflected: ArrayLike, path: Path, band: Band) -> _Terms:
    table = band_table(band)
    air = absorptance(
        distance=path.distance,
        t_air=path.t_air,
        vapour_density=path.vapour_density,
        pressure=path.pressure,
        band=band,
        excess=path.excess,
    )
    eps, tau, rho = numbers(emissivity), numbers(path.window_transmittance), numbers(path.window_reflectance)
    own = 1 - tau - rho  # the window's own emissivity
    possible = (eps > 0) & (eps <= 1) & (tau > 0) & (rho >= 0) & (own > -_ROUNDING)

    reflected = _term(1 - eps, table.radiance(t_reflected) * (1 - air.at(t_reflected)))
    of_air = np.where(np.equal(path.distance, 0), 0.0, air.at(path.t_air) * table.radiance(path.t_air))
    of_window = _term(own, table.radiance(path.t_window)) + _term(rho, table.radiance(path.t_window_ambient))
    return _Terms(table, air, np.where(possible, tau * eps, np.nan), tau * (reflected + of_air) + of_window)


def _term(weight: Array, radiance: Array) -> Array:
    """Without weight an unknown temperature does not matter."""
    return np.where(np.abs(weight) < _ROUNDING, 0.0, weight * radiance)


_one_scene = lru_cache(maxsize=256)(_terms)  # of plain numbers; the frames of a group share it


@cache
def _powers(band: Band) -> Array:
    """Band radiance times 1, x, x² (x as in `Absorptance`) at the temperatures of the band's table, shape (3, …)."""
    table = band_table(band)
    return table.radiances * source(table.temperatures) ** np.arange(3)[:, np.newaxis]
