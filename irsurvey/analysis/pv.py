"""What the warm part of a PV module is consistent with, held against its neighbours."""

from __future__ import annotations

import numpy as np

from irsurvey.analysis.evidence import Evidence
from irsurvey.anomalies.modules import module_shares
from irsurvey.anomalies.patch import cropped
from irsurvey.assess.pv import neighbour_reference, pv_indication
from irsurvey.geometry.polygons import mask
from irsurvey.model import Component, Indication


def pv_pattern(component: Component, evidence: Evidence) -> Indication | None:
    """The pattern of what is warmer in a module than its sound neighbours by what counts; None where nothing is, or
    where too few neighbours are there to compare with."""
    planned, results = evidence.planned, evidence.numbers.results
    means = [results.get((name, "mean")) for name in planned.plan.facts[component.name].neighbours]
    reference = neighbour_reference([one.value for one in means if one is not None])
    shape = (evidence.corrected.t.shape[0], evidence.corrected.t.shape[1])
    module = cropped(mask(component.polygon, shape))
    if module is None or not np.isfinite(reference):
        return None
    delta = evidence.screened.t - np.float32(reference)
    shares = module_shares(delta, module, component.polygon, evidence.screened.min_delta)
    return pv_indication(shares) if np.isfinite(shares["along"]) else None
