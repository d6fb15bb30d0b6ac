"""The arrays that go with a frame report."""

from __future__ import annotations

from collections.abc import Collection

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.correction import Corrected, air_path
from irsurvey.analysis.findings import Evidence
from irsurvey.analysis.measurand import Columns, Surroundings, flux_of
from irsurvey.analysis.regions import Screened
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.model import Maps, Scene
from irsurvey.radiometry.measurement import object_temperature
from irsurvey.uncertainty import propagate

HEAT_FLUX, UNCERTAINTY = "heat-flux", "uncertainty"
MAPS = (HEAT_FLUX, UNCERTAINTY)
"""Maps that are made on request."""

_NODES = 200
"""Temperatures at which u is computed; between them it is a smooth curve."""
_OF_AREAS = ("noise", "outline", "slope_x", "slope_y", "selection", "size_of_source")
"""What belongs to areas, not to single pixels."""


def maps_of(evidence: Evidence, wanted: Collection[str]) -> Maps:
    """The maps of a frame: temperature, labels, reference, and those of `MAPS` that are wanted."""
    corrected, screened, measured = evidence.corrected, evidence.screened, evidence.planned
    band = evidence.task.camera.band
    return Maps(
        temperature_c=corrected.t - np.float32(ZERO_CELSIUS),
        labels=label_map(screened),
        reference=screened.reference_area,
        heat_flux=heat_flux_map(corrected, measured.plan.surroundings) if HEAT_FLUX in wanted else None,
        u_temperature=uncertainty_map(corrected, measured.scene, band, screened.noise)
        if UNCERTAINTY in wanted
        else None,
    )


def label_map(screened: Screened) -> NDArray[np.uint16]:
    """Labels (rows, columns): 0 none, k = finding k."""
    labels = np.zeros(screened.t.shape, np.uint16)
    for label, region in enumerate(screened.regions, start=1):
        labels[region.patch.box][region.patch.mask] = label
    return labels


def heat_flux_map(corrected: Corrected, surroundings: Surroundings) -> NDArray[np.float32]:
    """Heat flux (rows, columns) [W m⁻²], positive out of the heated space or the component; NaN where not measured."""
    values = {name: np.float64(value) for name, value in corrected.scene.values().items()}
    flux = np.empty(corrected.t.shape, np.float32)
    for index, optics in enumerate(corrected.optics_names):
        part = corrected.optics == index
        flux[part] = flux_of(corrected.t[part].astype(np.float64), optics, surroundings, values)
    return flux


def uncertainty_map(
    corrected: Corrected, scene: Scene, band: tuple[float, float], noise: float
) -> NDArray[np.float32]:
    """Standard uncertainty (rows, columns) [K] of the object temperature of each pixel; NaN where not measured.

    First order; everything the frame's temperatures share, and the noise of one pixel [K].  It is that of a
    temperature, not of a difference: what two pixels share does not cancel in it.
    """
    u = np.full(corrected.t.shape, np.nan, np.float32)
    shared = Scene(
        tuple(one for one in scene.quantities if one.name.partition(":")[0] not in _OF_AREAS), scene.correlations
    )
    for index, (emissivity, reflected) in enumerate(corrected.optics_names):
        part = corrected.optics == index
        seen = corrected.t[part]
        if np.isnan(seen).all():
            continue
        apparent = np.linspace(corrected.apparent[0], corrected.apparent[-1], _NODES)

        def model(
            values: Columns, at: NDArray[np.float64] = apparent, names: tuple[str, str] = (emissivity, reflected)
        ) -> NDArray[np.float64]:
            read = at + values["camera_offset"] + values["camera_gain"] * (at - corrected.pivot)
            return object_temperature(read, values[names[0]], values[names[1]], air_path(values), band)

        budget = propagate(model, shared)
        known = np.isfinite(budget.values) & np.isfinite(budget.u)
        u[part] = np.hypot(np.interp(seen, budget.values[known], budget.u[known], np.nan, np.nan), noise)
    return u
