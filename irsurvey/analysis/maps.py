"""The arrays that go with a frame report."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import replace
from functools import partial
from typing import Any

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.correction import Corrected, Optics, air_path
from irsurvey.analysis.evidence import Evidence
from irsurvey.analysis.exchange import Columns, Surroundings, flux_of
from irsurvey.analysis.imperfections import profiles
from irsurvey.analysis.regions import Screened, stretch_of
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.model import Maps, Scene
from irsurvey.radiometry.measurement import object_temperature
from irsurvey.uncertainty import Budget, propagate

HEAT_FLUX, UNCERTAINTY = "heat-flux", "uncertainty"
MAPS = (HEAT_FLUX, UNCERTAINTY)
"""Maps that are made on request."""

_NODES = 200
"""Temperatures at which u is computed; between them it is a smooth curve."""
_MARGIN = 0.01
"""What they reach beyond the lowest and the highest reading [K], so that rounding leaves no pixel outside."""
_OF_AREAS = ("noise", "outline", "slope_x", "slope_y", "selection", "size_of_source")
"""What belongs to areas, not to single pixels."""


def maps_of(evidence: Evidence, wanted: Collection[str]) -> Maps:
    """The maps of a frame: temperature, labels, reference, and those of `MAPS` that are wanted."""
    corrected, screened, measured = evidence.corrected, evidence.screened, evidence.planned
    return Maps(
        temperature_c=corrected.t - np.float32(ZERO_CELSIUS),
        labels=label_map(screened),
        reference=screened.reference_area,
        change=evidence.paired.difference if evidence.paired else None,
        heat_flux=heat_flux_map(corrected, measured.plan.surroundings, measured.scene) if HEAT_FLUX in wanted else None,
        u_temperature=uncertainty_map(evidence) if UNCERTAINTY in wanted else None,
    )


def label_map(screened: Screened) -> NDArray[np.uint16]:
    """Labels (rows, columns): 0 none, k = finding k."""
    labels = np.zeros(screened.t.shape, np.uint16)
    for label, region in enumerate(screened.regions, start=1):
        labels[region.patch.box][region.patch.mask] = label
    return labels


def heat_flux_map(corrected: Corrected, surroundings: Surroundings, scene: Scene) -> NDArray[np.float32]:
    """Heat flux (rows, columns) [W m⁻²], positive out of the heated space or the component; NaN where not measured."""
    values = {name: np.float64(value) for name, value in scene.values().items()}
    flux = np.empty(corrected.t.shape, np.float32)
    for index, optics in enumerate(corrected.optics_names):
        part = corrected.optics == index
        flux[part] = flux_of(corrected.t[part].astype(np.float64), optics[0], surroundings, values)
    return flux


def uncertainty_map(evidence: Evidence) -> NDArray[np.float32]:
    """Standard uncertainty (rows, columns) [K] of the object temperature of each pixel; NaN where not measured.

    First order; everything the frame's temperatures share, the shading of the lens where the pixel lies, and its own
    noise.  It is that of a temperature, not of a difference: what two pixels share does not cancel in it.
    """
    corrected, scene = evidence.corrected, shared(evidence.planned.scene)
    noise = evidence.screened.noise / stretch_of(corrected, evidence.task, 0)
    u = np.full(corrected.t.shape, np.nan, np.float32)
    for index, optics in enumerate(corrected.optics_names):
        rows, columns = np.nonzero((corrected.optics == index) & ~np.isnan(corrected.t))
        if rows.size:
            apparent = nodes(corrected, rows, columns)
            budget = propagate(partial(temperatures, evidence, apparent, optics), scene)
            shading = profiles(rows, columns, u.shape)
            u[rows, columns] = _u_at(corrected.t[rows, columns], shading, budget, apparent, noise)
    return u


def shared(scene: Scene) -> Scene:
    """The scene without what belongs to areas: what all pixels of a frame have in common."""
    kept = tuple(one for one in scene.quantities if one.name.partition(":")[0] not in _OF_AREAS)
    return replace(scene, quantities=kept)


def nodes(corrected: Corrected, rows: NDArray[np.intp], columns: NDArray[np.intp]) -> NDArray[np.float64]:
    """Readings (v,) [K] that span those of some pixels."""
    codes = corrected.codes.codes[rows, columns].astype(np.intp) - corrected.codes.lowest
    ends = corrected.apparent[[codes.min(), codes.max()]]
    return np.linspace(ends.min() - _MARGIN, ends.max() + _MARGIN, _NODES)


def temperatures(
    evidence: Evidence, apparent: NDArray[np.float64], optics: Optics, values: Columns
) -> NDArray[np.float64]:
    """Object temperatures (n, v) [K] of one optics at readings (v,) [K], in n scenes."""
    gain = values["camera_gain"] * (apparent - evidence.corrected.pivot)
    read = apparent + values["camera_offset"] + gain
    return object_temperature(read, values[optics[0]], values[optics[1]], air_path(values), evidence.task.camera.band)


def _u_at(
    t: NDArray[np.float32],
    shading: tuple[tuple[str, NDArray[Any]], ...],
    budget: Budget,
    apparent: NDArray[np.float64],
    noise: float,
) -> NDArray[np.float64]:
    """Standard uncertainty (n,) [K] of pixels of temperatures t, each with its `shading` per unit; noise apparent."""
    solved = np.isfinite(budget.values) & np.isfinite(budget.u)
    if np.count_nonzero(solved) < 2:
        return np.full(t.shape, np.nan)

    def here(curve: NDArray[np.float64]) -> NDArray[np.float64]:
        return np.interp(t, budget.values[solved], curve, np.nan, np.nan)

    gain = here(np.gradient(budget.values[solved], apparent[solved]))
    variance = here(budget.u[solved] ** 2) + (gain * noise) ** 2
    covariances = budget.inputs_u[:, None] * (budget.correlation @ budget.half_swings)[:, solved]
    places = [(budget.names.index(name), profile) for name, profile in shading if name in budget.names]
    for one, profile in places:  # an offset fixed on a known surface has its shading in it
        variance += 2 * gain * profile * here(covariances[one])
        for other, across in places:
            both = budget.correlation[one, other] * budget.inputs_u[one] * budget.inputs_u[other]
            variance += gain**2 * profile * across * both
    return np.asarray(np.sqrt(np.maximum(variance, 0.0)))
