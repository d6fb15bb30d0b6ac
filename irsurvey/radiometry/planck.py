"""Planck's law: what a black body radiates at one wavelength, over a camera's band, and up to a wavelength."""

from __future__ import annotations

from math import pi

import numpy as np
from numpy.polynomial.laguerre import laggauss
from numpy.polynomial.legendre import leggauss
from numpy.typing import ArrayLike, NDArray

from irsurvey.constants import FIRST_RADIATION, SECOND_RADIATION

Array = NDArray[np.float64]
Band = tuple[float, float]
"""Short and long edge of a camera's band [m]; the response between them is taken as flat."""

_NODES, _WEIGHTS = leggauss(32)  # exact to 1e-12 for 7.5–14, 3–5 and 0.8–2.5 µm, to 1e-10 for 1–20 µm
_TAIL_NODES, _TAIL_WEIGHTS = laggauss(32)  # exact to 1e-12 from λT = 0 to infinity


def numbers(values: ArrayLike) -> Array:
    """Values as floats, one number as a NumPy scalar: an array without dimensions would be ten times slower."""
    return np.asarray(values, float)[()]


def spectral_radiance(wavelength: ArrayLike, temperature: ArrayLike) -> Array:
    """Spectral radiance of a black body in vacuum [W m⁻² sr⁻¹ m⁻¹].

    Wavelength [m] and temperature [K] broadcast; either not above 0 gives NaN.  Planck (1901)."""
    wavelength, temperature = np.asarray(wavelength, float), np.asarray(temperature, float)
    product = np.where((wavelength > 0) & (temperature > 0), wavelength * temperature, np.nan)
    with np.errstate(over="ignore"):  # far in the Wien tail the exponential is infinite and the radiance 0: right
        return np.asarray(FIRST_RADIATION / (wavelength**5 * np.expm1(SECOND_RADIATION / product)))


def band_radiance(temperature: ArrayLike, band: Band) -> Array:
    """Radiance of a black body within a band [W m⁻² sr⁻¹]: the integral of Planck's law, flat response.

    Temperature [K], any shape.  Gauss–Legendre quadrature; relative error below 1e-10 at 150–1800 K."""
    low, high = band
    wavelengths = (low + high) / 2 + (high - low) / 2 * _NODES
    spectrum = spectral_radiance(wavelengths, np.asarray(temperature, float)[..., np.newaxis])
    return np.asarray(spectrum @ _WEIGHTS * ((high - low) / 2))


def blackbody_fraction(wavelength_temperature: ArrayLike) -> Array:
    """Fraction of a black body's radiation at wavelengths below λ, as a function of λT [m K]; 0…1.

    F = (15/π⁴) ∫ u³/(eᵘ − 1) du from x = c₂/(λT) to infinity, by Gauss–Laguerre quadrature in u − x; relative
    error below 1e-11; λT not above 0 gives NaN.  Equal to the series of Siegel & Howell, Thermal Radiation
    Heat Transfer (1992), appendix A."""
    product = np.asarray(wavelength_temperature, float)
    x = SECOND_RADIATION / np.where(product > 0, product, np.nan)
    u = x[..., np.newaxis] + _TAIL_NODES
    return np.asarray(15 / pi**4 * np.exp(-x) * ((u**3 / -np.expm1(-u)) @ _TAIL_WEIGHTS))
