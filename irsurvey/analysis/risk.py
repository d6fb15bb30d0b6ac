"""How much of an inner surface is too cold: for condensation, for mould, for a limit on its temperature factor."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import partial

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis import envelope
from irsurvey.analysis.correction import Optics
from irsurvey.analysis.evidence import Evidence
from irsurvey.analysis.exchange import Columns
from irsurvey.analysis.indications import glazing
from irsurvey.analysis.maps import nodes, shared, temperatures
from irsurvey.analysis.regions import inspectable
from irsurvey.anomalies.patch import cropped
from irsurvey.anomalies.shape import extreme_spot
from irsurvey.assess.conformity import exceeds
from irsurvey.assess.severity import LEAST_EMISSIVITY
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.model import Estimate, SurfaceAtRisk
from irsurvey.uncertainty import propagate

CONDENSATION, MOULD = "condensation", "mould"
FACTOR = "temperature_factor_at_0_25"
"""Key of the number that limits on temperature factors judge."""

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class _Risk:
    """A limit: `margin` (n, v) of temperatures (n, v) [K] of one optics, at or below 0 where they are at risk."""

    name: str
    margin: Callable[[Array, str, Columns], Array]
    limit: Estimate | None  # [°C], where it is one temperature


@dataclass(frozen=True, slots=True, eq=False)
class _Margins:
    """Margins of the pixels (p,) inspected, their u, and where they lie."""

    rows: NDArray[np.intp]
    columns: NDArray[np.intp]
    margin: Array
    u: Array
    temperature: Array

    def without(self, mask: NDArray[np.bool_]) -> _Margins:
        """Those outside a mask (rows, columns) of the frame."""
        kept = ~mask[self.rows, self.columns]
        return _Margins(self.rows[kept], self.columns[kept], self.margin[kept], self.u[kept], self.temperature[kept])


def surfaces_at_risk(evidence: Evidence) -> Iterator[SurfaceAtRisk]:
    """How much of what was inspected lies at or below each limit that applies; seen from inside only.

    The margin of all pixels is wrong by what they share: so the least and the most that may be at risk are counted
    with all margins moved by 2u.
    """
    risks = tuple(_risks(evidence))
    if not risks or not evidence.is_valid:
        return
    open_, blocked = inspectable(evidence.corrected, evidence.task)
    inspected = open_ & ~blocked & ~_mirroring(evidence)
    beyond = evidence.corrected.saturated_cold & ~blocked
    if not inspected.any():
        return
    glass = glazing(evidence.task, inspected.shape)
    for risk, margins in zip(risks, _margins(evidence, risks, inspected), strict=True):
        if risk.name != CONDENSATION:  # limits for walls: on a pane and its frame 100 % at the surface count
            margins = margins.without(glass)
        if margins.margin.size:
            yield _at_risk(risk, margins, evidence, beyond)


def _risks(evidence: Evidence) -> Iterator[_Risk]:
    plan, results = evidence.planned.plan, evidence.numbers.results
    if plan.surroundings.viewed_from != "inside":
        return
    if plan.humidity:
        for name, key in ((CONDENSATION, "dew_point"), (MOULD, "mould_surface")):
            limit = results.get(("", key))
            shown = None if limit is None else Estimate(limit.value - ZERO_CELSIUS, limit.u)
            yield _Risk(name, partial(_above, evidence, key), shown)
    for criterion in evidence.criteria:
        if criterion.quantity == FACTOR and plan.air and criterion.worse < 0:
            # the edge between what is sound and what is not: the highest of a file with several
            yield _Risk(criterion.name, partial(_factor_above, evidence, criterion.edges[-1]), None)


def _above(evidence: Evidence, key: str, t: Array, _emissivity: str, values: Columns) -> Array:
    humidity = evidence.planned.plan.humidity
    assert humidity is not None
    return np.asarray(t - envelope.room(humidity, values)[key][:, None])


def _factor_above(evidence: Evidence, limit: float, t: Array, emissivity: str, values: Columns) -> Array:
    plan = evidence.planned.plan
    assert plan.air is not None
    return np.asarray(envelope.factor_at_limit(t, emissivity, plan.surroundings, values, plan.air) - limit)


def _mirroring(evidence: Evidence) -> NDArray[np.bool_]:
    """Pixels of surfaces too reflective to have a temperature of their own."""
    scene, corrected = evidence.planned.scene, evidence.corrected
    reflective = [scene[emissivity].value < LEAST_EMISSIVITY for emissivity, _ in corrected.optics_names]
    return np.asarray(reflective, np.bool_)[corrected.optics]


def _margins(evidence: Evidence, risks: tuple[_Risk, ...], inspected: NDArray[np.bool_]) -> list[_Margins]:
    """Margins of all pixels inspected, risk by risk, to first order."""
    corrected, scene = evidence.corrected, shared(evidence.planned.scene)
    found: list[list[_Margins]] = [[] for _ in risks]
    for index, optics in enumerate(corrected.optics_names):
        rows, columns = np.nonzero(inspected & (corrected.optics == index))
        if not rows.size:
            continue
        apparent = nodes(corrected, rows, columns)
        budget = propagate(partial(_curves, evidence, risks, apparent, optics), scene)
        t, *curves = np.split(np.stack([budget.values, budget.u]), len(risks) + 1, axis=1)
        solved = np.isfinite(t[0])
        here = corrected.t[rows, columns].astype(np.float64)
        for kept, curve in zip(found, curves, strict=True):
            known = solved & np.isfinite(curve).all(axis=0)
            if known.any():
                margin, u = (np.interp(here, t[0][known], one[known]) for one in curve)
                kept.append(_Margins(rows, columns, margin, u, here))
    return [_joined(parts) for parts in found]


def _curves(evidence: Evidence, risks: tuple[_Risk, ...], apparent: Array, optics: Optics, values: Columns) -> Array:
    """Temperatures and margins (n, (1 + risks) v) at readings (v,) [K]."""
    t = temperatures(evidence, apparent, optics, values)
    return np.concatenate([t, *(risk.margin(t, optics[0], values) for risk in risks)], axis=1)


def _joined(parts: list[_Margins]) -> _Margins:
    if not parts:
        none = np.zeros(0, np.intp)
        return _Margins(none, none, np.zeros(0), np.zeros(0), np.zeros(0))
    return _Margins(
        *(
            np.concatenate([getattr(part, name) for part in parts])
            for name in ("rows", "columns", "margin", "u", "temperature")
        )
    )


def _at_risk(risk: _Risk, margins: _Margins, evidence: Evidence, beyond: NDArray[np.bool_]) -> SurfaceAtRisk:
    """One limit; pixels beyond the cold end of the range, whose temperature is only a bound, may all be at risk."""
    areas = evidence.screened.pixel_area
    has_scale = areas is not None and bool(np.nanmax(areas) > 0)
    per_pixel = np.broadcast_to(areas if areas is not None and has_scale else 1.0, beyond.shape)
    weights = per_pixel[margins.rows, margins.columns]
    lost = float(per_pixel[beyond].sum())
    whole = float(weights.sum()) + lost
    sums = [float(weights[margins.margin + k * margins.u <= 0].sum()) for k in (0.0, 2.0, -2.0)]
    sums[2] += lost
    share, low, high = (one / whole for one in sums)
    area, area_low, area_high = sums if has_scale else (None, None, None)
    return SurfaceAtRisk(
        risk=risk.name,
        limit_c=risk.limit or _crossing(margins),
        share=share,
        share_low=low,
        share_high=high,
        area_m2=area,
        area_low_m2=area_low,
        area_high_m2=area_high,
        probability=None if lost else _probability(margins, evidence),
    )


def _crossing(margins: _Margins) -> Estimate | None:
    """The temperature [°C] at which the margin is nought; None where no pixel comes near it."""
    order = np.argsort(margins.temperature)
    margin, t = margins.margin[order], margins.temperature[order]
    if not margin.size or margin[0] > 0 or margin[-1] < 0:
        return None
    return Estimate(float(np.interp(0.0, margin, t)) - ZERO_CELSIUS, None)


def _probability(margins: _Margins, evidence: Evidence) -> float | None:
    """That the coldest measurement spot of the surface is at or below the limit."""
    surface = np.zeros(evidence.corrected.t.shape, np.bool_)
    surface[margins.rows, margins.columns] = True
    patch = cropped(surface)
    assert patch is not None
    spot = extreme_spot(evidence.corrected.t, patch, "cold", evidence.task.camera.spot_pixels)
    if spot is None or not margins.margin.size:
        return None
    t = float(evidence.corrected.t[spot.rows, spot.columns].mean())
    order = np.argsort(margins.temperature)
    margin, u = (float(np.interp(t, margins.temperature[order], one[order])) for one in (margins.margin, margins.u))
    return float(exceeds(-margin, u, 0.0, "hot"))
