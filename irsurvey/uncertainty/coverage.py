"""Half-widths of 95 % intervals where one rectangular input may dominate the normal rest."""

from __future__ import annotations

import numpy as np
from scipy.special import ndtr

from irsurvey.uncertainty.joint import Array

COVERAGE = 0.95
_STEPS = 40
"""Halvings of the bracket: 2⁻⁴⁰ of it is rounding."""


def half_width(normal_u: Array, rectangular: Array) -> Array:
    """x with P(|N + R| ≤ x) = 95 %, N normal with standard deviation `normal_u`, R rectangular ± `rectangular`.

    Broadcasts; both zero give 0.  For R alone 0.95 of it, for N alone 1.96 normal_u, between them by bisection on
    P(N + R ≤ x) = [H(x + a) − H(x − a)]/2a, H(z) = zΦ(z/σ) + σφ(z/σ): the integral of a normal distribution
    function over the rectangle.  JCGM 101:2008, 5.2 (the convolution it stands for).
    """
    sigma, a = np.broadcast_arrays(np.asarray(normal_u, float), np.asarray(rectangular, float))
    scale = sigma + a
    sigma, a = np.maximum(sigma, 1e-9 * scale), np.maximum(a, 1e-6 * scale)
    low, high = np.zeros(scale.shape), 3 * sigma + a
    with np.errstate(invalid="ignore", divide="ignore"):
        for _ in range(_STEPS):
            middle = (low + high) / 2
            below = (_integral(middle + a, sigma) - _integral(middle - a, sigma)) / (2 * a)
            inside = 2 * below - 1
            low, high = np.where(inside < COVERAGE, middle, low), np.where(inside < COVERAGE, high, middle)
    return np.asarray(np.where(scale > 0, (low + high) / 2, scale))


def _integral(z: Array, sigma: Array) -> Array:
    """∫ Φ(z/σ) dz up to a constant."""
    return np.asarray(z * ndtr(z / sigma) + sigma * np.exp(-((z / sigma) ** 2) / 2) / np.sqrt(2 * np.pi))
