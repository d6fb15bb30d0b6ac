"""The Sakuma–Hattori closed form between temperature and counts, for cameras that are calibrated by it."""

from __future__ import annotations

from math import sqrt

import numpy as np
from numpy.typing import ArrayLike

from irsurvey.constants import SECOND_RADIATION
from irsurvey.model import ClosedForm
from irsurvey.radiometry.planck import Array, Band, band_radiance


def counts(temperature: ArrayLike, form: ClosedForm) -> Array:
    """Signal S = c/(exp(c₂/(a T + b)) − 1) + bias of a black body, in the form's own unit.

    Temperature [K]; a T + b not above 0 gives NaN.  Sakuma & Hattori (1982), Planckian version."""
    effective = form.a * np.asarray(temperature, float) + form.b
    return np.asarray(form.c / np.expm1(SECOND_RADIATION / np.where(effective > 0, effective, np.nan)) + form.bias)


def temperature(counts: ArrayLike, form: ClosedForm) -> Array:
    """Temperature [K] of the black body that gives this signal: the exact inverse of `counts`.

    A signal on the wrong side of the form's bias has no temperature: NaN."""
    above = np.asarray(counts, float) - form.bias
    with np.errstate(divide="ignore"):
        ratio = form.c / above
    kelvin = (SECOND_RADIATION / np.log1p(np.where(ratio > 0, ratio, np.nan)) - form.b) / form.a
    return np.asarray(np.where(kelvin > 0, kelvin, np.nan))


def fit(band: Band, t_min: float, t_max: float) -> ClosedForm:
    """The form nearest to the exact band radiance [W m⁻² sr⁻¹] between two temperatures [K], by least squares in K.

    Starts from A = λ₀(1 − 6σ²/λ₀²), B = (c₂/2)(σ/λ₀)², σ = Δλ/√12 (Saunders; from memory).  How good it is
    depends on band and range: a few mK in the long wave, up to 0.9 K for 3–5 µm over −40…500 °C."""
    from scipy.optimize import least_squares

    exact = np.linspace(t_min, t_max, 200)
    radiance = band_radiance(exact, band)
    centre, spread = (band[0] + band[1]) / 2, (band[1] - band[0]) / sqrt(12)
    a, b = centre * (1 - 6 * (spread / centre) ** 2), SECOND_RADIATION / 2 * (spread / centre) ** 2
    c = radiance[-1] * np.expm1(SECOND_RADIATION / (a * t_max + b))
    start = np.array([a, b, c])

    def form(factors: Array) -> ClosedForm:
        return ClosedForm(*(float(value) for value in factors * start))

    def errors(factors: Array) -> Array:
        return temperature(radiance, form(factors)) - exact

    return form(least_squares(errors, np.ones(3), xtol=1e-12, ftol=1e-12).x)
