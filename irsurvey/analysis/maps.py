"""The arrays that go with a frame report."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.correction import Corrected
from irsurvey.analysis.measurand import Surroundings, flux_of
from irsurvey.analysis.regions import Screened


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
