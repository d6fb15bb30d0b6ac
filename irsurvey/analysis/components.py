"""From measured numbers to the records of a report: the components of one frame."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from math import isfinite

import numpy as np

from irsurvey.analysis.correction import Corrected
from irsurvey.analysis.evidence import Evidence, celsius
from irsurvey.analysis.findings import TOUCHES_EDGE, class_flips, lowest_emissivity
from irsurvey.analysis.planning import Planned
from irsurvey.analysis.pv import pv_pattern
from irsurvey.analysis.regions import near
from irsurvey.anomalies.patch import cropped
from irsurvey.assess.criteria import Criterion
from irsurvey.assess.electrical import assess_component
from irsurvey.assess.fragile import FRAGILE
from irsurvey.assess.limits import allowed_now, lowest
from irsurvey.assess.severity import CONDITIONS, HOTTER_BESIDE, NO_SOLUTION, SATURATED, SIZE_LIMITED
from irsurvey.assess.twins import Member, TwinPlan, load_ratio, rated_band, twins
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.geometry.polygons import mask
from irsurvey.model import (
    Band,
    Component,
    ComponentReport,
    Estimate,
    FrameTask,
    JointHeat,
    LimitReport,
    RatedLoad,
)

_NUMBERS = {
    "delta_similar_k": "delta_similar",
    "delta_ambient_k": "delta_ambient",
    "delta_similar_in_calm_k": "delta_similar_in_calm",
    "delta_ambient_in_calm_k": "delta_ambient_in_calm",
    "relative_difference_percent": "relative_difference",
    "above_limit_k": "above_limit",
    "above_allowed_k": "above_allowed",
    "delta_neighbours_k": "delta_neighbours",
}
"""Key of a number that criteria may judge → number of the measurand."""


def component_twins(
    task: FrameTask, corrected: Corrected, planned: Planned, chosen: tuple[Criterion, ...]
) -> dict[str, TwinPlan]:
    """Which twin each component is compared with, from the nominal spot temperatures."""
    members = [_member(component, task, corrected, planned) for component in task.components]
    ambient = planned.scene[planned.plan.ambient].value
    return dict(zip((member.name for member in members), twins(members, ambient, chosen), strict=True))


def components(evidence: Evidence, plans: Mapping[str, TwinPlan]) -> Iterator[ComponentReport]:
    """The components of a frame in the order of the survey."""
    task, corrected, results = evidence.task, evidence.corrected, evidence.numbers.results
    for component in task.components:
        name = component.name
        drawn = mask(component.polygon, (corrected.t.shape[0], corrected.t.shape[1]))
        member = _member(component, task, corrected, evidence.planned, is_valid=evidence.is_valid)
        plan = plans[name]
        numbers = {key: results.get((name, number)) for key, number in _NUMBERS.items()}
        judged = {"max_c": celsius(results.get((name, "max"))), **numbers}
        verdict = assess_component(member, plan, judged, evidence.criteria)
        budgets = evidence.numbers.budgets_of(name)
        changes = class_flips(verdict, judged, budgets, evidence)
        yield ComponentReport(
            name=name,
            key=f"{task.id}:component:{name}",
            group=component.group,
            phase=component.phase,
            load_a=component.load,
            rated_a=component.rated,
            polygon=component.polygon,
            pixels=int(np.count_nonzero(drawn)),
            max_c=judged["max_c"],
            mean_c=celsius(results.get((name, "mean"))),
            similar_to=None if plan.is_coolest else plan.name,
            **numbers,
            heat_flux_w_m2=results.get((name, "flux")),
            is_found=component.is_found,
            limit=_limit(component, evidence),
            joint=_joint(component, evidence),
            trend=None,
            indication=pv_pattern(component, evidence) if task.method == "pv" else None,
            at_rated_load=None if task.method in ("voltage-driven", "pv") else _at_rated(member, numbers),
            assessments=verdict.assessments,
            urgency=verdict.urgency,
            cleared=verdict.cleared,
            outcome=verdict.outcome,
            flips=changes,
            budgets=budgets,
            flags=(*verdict.flags, *((FRAGILE,) if changes else ())),
        )


def _member(
    component: Component, task: FrameTask, corrected: Corrected, planned: Planned, *, is_valid: bool = True
) -> Member:
    """A component as its group sees it."""
    measured = planned.components.get(component.name)
    drawn = mask(component.polygon, (corrected.t.shape[0], corrected.t.shape[1]))
    patch = cropped(drawn)
    saturated = drawn & corrected.saturated_hot
    place = near(component, (drawn.shape[0], drawn.shape[1]))
    flags = (
        (SATURATED, bool(saturated.any())),
        (SIZE_LIMITED, measured is not None and (measured.has_narrow_core or not measured.spot.is_full)),
        (NO_SOLUTION, measured is None or bool((drawn & np.isnan(corrected.t) & ~saturated).any())),
        (TOUCHES_EDGE, patch is not None and patch.touches_edge(drawn.shape)),
        (CONDITIONS, not is_valid),
        (HOTTER_BESIDE, any(one.sense == "hot" and one.patch.of(place).any() for one in planned.anomalies)),
    )
    own = planned.scene[component.emissivity].value
    return Member(
        name=component.name,
        t_spot=float("nan") if measured is None else measured.t_spot,
        emissivity=own if measured is None else lowest_emissivity(measured, planned),
        group=component.group,
        load=component.load,
        rated=component.rated,
        method=task.method,
        limits=component.limits,
        steady=component.steady,
        time_constant=component.time_constant,
        wind=_recorded(task, "wind"),
        irradiance=_recorded(task, "irradiance"),
        neighbours=len(planned.plan.facts[component.name].neighbours),
        flags=tuple(flag for flag, applies in flags if applies),
    )


def _recorded(task: FrameTask, name: str) -> float | None:
    """A condition that somebody recorded."""
    return task.scene[name].value if name in task.scene and task.scene[name].source != "default" else None


def _limit(component: Component, evidence: Evidence) -> LimitReport | None:
    """The lowest of a component's limits, and what it allows at this load and ambient."""
    if not component.limits:
        return None
    limit = lowest(component.limits)
    plan, scene = evidence.planned.plan, evidence.planned.scene
    ratio = component.load / component.rated if component.load is not None and component.rated else float("nan")
    low, high = (float(end) - ZERO_CELSIUS for end in allowed_now(limit, scene[plan.ambient].value, ratio))
    return LimitReport(
        name=limit.name,
        max_c=limit.t_max - ZERO_CELSIUS,
        rise_k=limit.rise,
        allowed_now_c=Band(low, high) if isfinite(low) else None,
        source=f"{limit.source}, {limit.edition} [{limit.mark}]",
    )


def _joint(component: Component, evidence: Evidence) -> JointHeat | None:
    if component.shape is None:
        return None
    results, name = evidence.numbers.results, component.name
    return JointHeat(
        form=component.shape.form,
        film_coefficient_w_m2k=results.get((name, "film")),
        power_w=results.get((name, "power")),
        excess_power_w=results.get((name, "excess_power")),
        excess_resistance_uohm=results.get((name, "excess_resistance")),
        voltage_drop_mv=results.get((name, "voltage_drop")),
        yearly_loss_kwh=results.get((name, "yearly_loss")),
    )


def _at_rated(member: Member, numbers: Mapping[str, Estimate | None]) -> RatedLoad | None:
    """Both rises at rated load; None where load or rating is not known."""
    ratio = load_ratio(member)
    if not ratio > 0:
        return None

    def band(estimate: Estimate | None) -> Band | None:
        if estimate is None:
            return None
        low, high = rated_band(estimate.value, ratio)
        return Band(float(low), float(high))

    return RatedLoad(band(numbers["delta_similar_k"]), band(numbers["delta_ambient_k"]))
