"""What the findings of a building frame are consistent with: cues from pixels, surfaces and pressure."""

from __future__ import annotations

from dataclasses import asdict

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.evidence import Evidence
from irsurvey.anomalies.cues import cues
from irsurvey.anomalies.patch import Patch
from irsurvey.assess.indication import indicate
from irsurvey.assess.severity import LEAST_EMISSIVITY
from irsurvey.geometry.polygons import mask
from irsurvey.model import FrameTask, Indication

_GLASS = "glass"
"""In the name of a surface or its material: it mirrors, whatever its emissivity."""


def indication_of(evidence: Evidence, label: int, patch: Patch, sense: str, emissivity: float) -> Indication | None:
    """The indication of finding `label`, 1…; None in electrical surveys, and where nothing could be compared.

    `emissivity` is the lowest of its surfaces.  What the survey ignores (windows, doors) counts as opening.
    """
    task, delta = evidence.task, evidence.screened.delta
    if task.kind != "building" or delta is None:
        return None
    seen = cues(delta, patch, openings=openings(task, delta.shape), noise=evidence.screened.noise)
    return indicate(
        asdict(seen),
        method=task.method,
        viewed_from=task.viewed_from,
        sense=sense,
        emissivity=emissivity,
        is_glass=_is_glass(task, patch, delta.shape),
        pressure_change=evidence.paired.findings[label - 1].changed if evidence.paired else None,
        outward=_flows_outward(evidence),
    )


def is_mirror(task: FrameTask, patch: Patch, shape: tuple[int, ...], emissivity: float) -> bool:
    """Whether a region of a building may show what it mirrors rather than itself."""
    return task.kind == "building" and (emissivity < LEAST_EMISSIVITY or _is_glass(task, patch, shape))


def openings(task: FrameTask, shape: tuple[int, ...]) -> NDArray[np.bool_] | None:
    """Pixels of drawn windows, doors and joints; None where nothing was drawn."""
    drawn = [mask(surface.polygon, (shape[0], shape[1])) for surface in task.surfaces if surface.role == "ignore"]
    return np.logical_or.reduce(drawn) if drawn else None


def glazing(task: FrameTask, shape: tuple[int, ...]) -> NDArray[np.bool_]:
    """Pixels (rows, columns) of surfaces that are glass by their name or material."""
    glass = np.zeros((shape[0], shape[1]), np.bool_)
    for surface in task.surfaces:
        if _GLASS in surface.material or _GLASS in surface.name.lower():
            glass |= mask(surface.polygon, (shape[0], shape[1]))
    return glass


def _is_glass(task: FrameTask, patch: Patch, shape: tuple[int, ...]) -> bool:
    """Whether most of a region lies on glass."""
    return bool(np.count_nonzero(patch.of(glazing(task, shape))) > patch.pixels / 2)


def _flows_outward(evidence: Evidence) -> bool:
    """Whether heat flows from inside to outside: what turns heat leaving the face seen says so."""
    around = evidence.planned.plan.surroundings
    return (around.sign > 0) == (around.viewed_from == "outside")
