"""What a stored number means: from stored numbers to apparent temperature, one function per kind of signal."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Final

import numpy as np
from numpy.typing import ArrayLike

from irsurvey.constants import STANDARD_PRESSURE, ZERO_CELSIUS
from irsurvey.model import InCameraCorrection, Signal
from irsurvey.radiometry import measurement, sakuma_hattori
from irsurvey.radiometry.band import band_table
from irsurvey.radiometry.planck import Array, Band


def apparent_temperature(stored: ArrayLike, signal: Signal, band: Band) -> Array:
    """Apparent temperature [K] of stored numbers, any shape.

    NaN where the number has none: outside calibration points, on the wrong side of a bias, outside 150…1800 K
    where band radiance is needed."""
    return QUANTITIES[signal.quantity](np.asarray(stored, float), signal, band)


def _apparent(stored: Array, signal: Signal, band: Band) -> Array:  # noqa: ARG001 (one signature for all)
    return signal.scale * stored + signal.offset


def _object(stored: Array, signal: Signal, band: Band) -> Array:
    """Undo the camera's own correction: put its object temperature through the measurement equation again.

    Exact where the camera was told a transmittance (then it used one number for all radiation, and the air
    emits at `air`) or a distance of 0; with a distance our air stands in for the camera's.  What was not
    stated: air at the reflected temperature, 50 % relative humidity, standard pressure, distance 0."""
    assumed = signal.assumed or InCameraCorrection(emissivity=math.nan, reflected=math.nan)
    air = assumed.reflected if assumed.air is None else assumed.air
    humidity = 0.5 if assumed.relative_humidity is None else assumed.relative_humidity
    path = measurement.Path(
        t_air=air,
        distance=0.0 if assumed.transmittance is not None else assumed.distance or 0.0,
        vapour_density=_vapour_density(air, humidity),
        pressure=STANDARD_PRESSURE if assumed.pressure is None else assumed.pressure,
        # one transmittance for all radiation, air emitting for the rest: to the equation that is a window
        window_transmittance=1.0 if assumed.transmittance is None else assumed.transmittance,
        t_window=air,
    )
    t_object = signal.scale * stored + signal.offset
    return measurement.apparent_temperature(t_object, assumed.emissivity, assumed.reflected, path, band)


def _counts(stored: Array, signal: Signal, band: Band) -> Array:
    if signal.closed_form is not None:
        return sakuma_hattori.temperature(stored, signal.closed_form)
    table = band_table(band)
    if signal.points:
        return table.temperature(_between(stored, signal.points, band))
    return table.temperature((math.nan if signal.gain is None else signal.gain) * stored + signal.bias)


def _between(stored: Array, points: tuple[tuple[float, float], ...], band: Band) -> Array:
    """Band radiance of counts between calibration points (counts, black body [K]), NaN outside them.

    Through every point and monotonic between them (Fritsch & Carlson 1980).  Nothing is extrapolated: a
    camera may be non-linear or saturated just beyond its last point."""
    from scipy.interpolate import PchipInterpolator

    counts, temperatures = np.array(sorted(points)).T
    return np.asarray(PchipInterpolator(counts, band_table(band).radiance(temperatures), extrapolate=False)(stored))


def _vapour_density(t_air: float, relative_humidity: float) -> float:
    """Vapour density [kg m⁻³] over liquid water (Sonntag 1990), as the air model's fit has it.

    The humid air of irsurvey.heat is not in reach: the two folders do not know each other."""
    celsius = t_air - ZERO_CELSIUS
    return relative_humidity * 611.2 * math.exp(17.62 * celsius / (243.12 + celsius)) / (461.52 * t_air)


QUANTITIES: Final[dict[str, Callable[[Array, Signal, Band], Array]]] = {
    "apparent-temperature": _apparent,
    "object-temperature": _object,
    "counts": _counts,
}
"""Kinds of signal by their name in the survey file: function (stored, signal, band) → apparent temperature [K]."""
