"""What a camera sees, by a forward model of its own: Planck's law summed over wavelengths, nothing of irsurvey."""

from __future__ import annotations

import numpy as np

H, C, K, SIGMA = 6.62607015e-34, 299_792_458.0, 1.380649e-23, 5.670374419e-8  # SI 2019, CODATA 2018

_T = np.linspace(230, 340, 2201)
_WAVE = np.linspace(7.5e-6, 13e-6, 1001)[:, None]
_RADIANCE = np.trapezoid(2 * H * C**2 / _WAVE**5 / np.expm1(H * C / (_WAVE * K * _T)), _WAVE, axis=0)


def radiance(t):
    """Radiance of a black body, 7.5–13 µm [W m⁻² sr⁻¹]; t [K] within 230…340."""
    return np.interp(t, _T, _RADIANCE)


def apparent(level):
    """The temperature [K] at which a black body has that radiance."""
    return np.interp(level, _RADIANCE, _T)


def slope(t):
    """How the radiance grows with temperature [W m⁻² sr⁻¹ K⁻¹]."""
    return np.interp(t, _T, np.gradient(_RADIANCE, _T))


def seen(t, emissivity, t_reflected):
    """Apparent temperature [K] of a surface right in front of the camera, no air between."""
    return apparent(emissivity * radiance(t) + (1 - emissivity) * radiance(t_reflected))
