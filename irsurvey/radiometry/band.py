"""Temperature to band radiance and back at run time: a dense table of the exact integral, one per band."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cache

import numpy as np
from numpy.typing import ArrayLike

from irsurvey.radiometry.planck import Array, Band, band_radiance

TEMPERATURES = (150.0, 1800.0)
"""Ends of every table [K]: beyond them nothing has a temperature."""
_GRID = np.arange(1500, 18001) / 10  # [K]; 0.1 K keeps linear interpolation within 0.2 mK, also at short wavelengths


@dataclass(frozen=True, slots=True, eq=False)
class BandTable:
    """Band radiance [W m⁻² sr⁻¹] of a black body at 150…1800 K; outside it everything is NaN.

    Between grid points linear in both directions, so that `temperature` inverts `radiance` to rounding.
    `worst_error` [K] is what the table errs at most against the quadrature over −40…300 °C.
    """

    temperatures: Array
    radiances: Array
    slopes: Array
    worst_error: float

    def radiance(self, temperature: ArrayLike) -> Array:
        """Band radiance [W m⁻² sr⁻¹] at a temperature [K]."""
        return np.asarray(np.interp(np.asarray(temperature, float), self.temperatures, self.radiances, np.nan, np.nan))

    def temperature(self, radiance: ArrayLike) -> Array:
        """Temperature [K] of the black body with this band radiance; fastest where queries are sorted."""
        return np.asarray(np.interp(np.asarray(radiance, float), self.radiances, self.temperatures, np.nan, np.nan))

    def slope(self, temperature: ArrayLike) -> Array:
        """dL/dT [W m⁻² sr⁻¹ K⁻¹] at a temperature [K]; relative error below 1e-4."""
        return np.asarray(np.interp(np.asarray(temperature, float), self.temperatures, self.slopes, np.nan, np.nan))


@cache
def band_table(band: Band) -> BandTable:
    """The table of a band (low, high) [m], built once per process."""
    radiances = band_radiance(_GRID, band)
    table = BandTable(_GRID, radiances, np.gradient(radiances, _GRID), np.nan)
    between = np.arange(2331, 5732)[:, np.newaxis] / 10 + np.array([0.025, 0.05, 0.075])  # −40…300 °C, off the grid
    worst = np.abs(table.temperature(band_radiance(between, band)) - between).max()
    return replace(table, worst_error=float(worst))
