"""From measured numbers to the records of a report: findings and components of one frame."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping

import numpy as np

from irsurvey.analysis.budgets import flips, on_axis
from irsurvey.analysis.building import envelope_of_finding
from irsurvey.analysis.correction import Corrected
from irsurvey.analysis.evidence import Evidence, celsius
from irsurvey.analysis.indications import indication_of, is_mirror
from irsurvey.analysis.planning import Measured, Planned
from irsurvey.analysis.regions import Screened, near
from irsurvey.anomalies.patch import Patch, cropped
from irsurvey.anomalies.shape import edge_sharpness, elongation
from irsurvey.assess.building import assess_finding
from irsurvey.assess.conformity import exceeds
from irsurvey.assess.criteria import Criterion, criteria
from irsurvey.assess.electrical import Member, TwinPlan, assess_component, load_ratio, rated_band, twins
from irsurvey.assess.fragile import FRAGILE
from irsurvey.assess.severity import (
    AUTOMATIC_REFERENCE,
    CONDITIONS,
    HOTTER_BESIDE,
    LEAST_EMISSIVITY,
    MIRRORS,
    NO_SOLUTION,
    SATURATED,
    SIZE_LIMITED,
    Verdict,
)
from irsurvey.geometry.polygons import mask, outline
from irsurvey.model import (
    Band,
    BudgetTerm,
    Component,
    ComponentReport,
    Estimate,
    Finding,
    Flip,
    FrameTask,
    Input,
    RatedLoad,
    Shape,
)

_KEY_GRID = 8
"""Positions in keys are rounded to this many pixels, so that a re-run with slightly other inputs keeps them."""
TOUCHES_EDGE = "touches frame edge"
REFLECTIVE = "reflective"


def component_twins(
    task: FrameTask, corrected: Corrected, planned: Planned, chosen: tuple[Criterion, ...]
) -> dict[str, TwinPlan]:
    """Which twin each component is compared with, from the nominal spot temperatures."""
    members = [_member(component, corrected, planned) for component in task.components]
    ambient = planned.scene[planned.plan.ambient].value
    return dict(zip((member.name for member in members), twins(members, ambient, chosen), strict=True))


def findings(evidence: Evidence) -> Iterator[Finding]:
    """The findings of a frame in the order of their labels."""
    task, screened, results = evidence.task, evidence.screened, evidence.numbers.results
    keys: Counter[str] = Counter()
    against = reference_emissivity(evidence)  # a ΔT is no better than what it is taken against
    for label, (found, measured) in enumerate(zip(screened.regions, evidence.planned.anomalies, strict=True), start=1):
        name = measured.region.name
        emissivity = _lowest_emissivity(measured, evidence.planned)
        flags = (
            (SATURATED, found.is_saturated),
            (SIZE_LIMITED, not measured.spot.is_full),
            (REFLECTIVE, emissivity < LEAST_EMISSIVITY),
            (TOUCHES_EDGE, measured.patch.touches_edge(screened.t.shape)),
            (AUTOMATIC_REFERENCE, task.reference is None and screened.reference is not None),
            (CONDITIONS, not evidence.is_valid),
            (MIRRORS, is_mirror(task, measured.patch, screened.t.shape, emissivity)),
        )
        factor, factor_at_limit = (
            results.get((name, number)) if evidence.is_valid else None
            for number in ("temperature_factor", "temperature_factor_at_limit")
        )
        numbers = {
            "extreme_c": celsius(results.get((name, "extreme"))),
            "mean_c": celsius(results.get((name, "mean"))),
            "delta_k": results.get((name, "delta")),
            "mean_delta_k": results.get((name, "mean_delta")),
            "temperature_factor": factor,
            "temperature_factor_at_0_25": factor_at_limit,
        }
        verdict = assess_finding(
            numbers,
            evidence.criteria,
            sense=measured.sense,
            emissivity=min(emissivity, against),
            flags=tuple(flag for flag, applies in flags if applies),
            viewed_from=task.viewed_from,
        )
        budgets = evidence.numbers.budgets_of(name)
        changes = _flips(verdict, numbers, budgets, evidence.inputs)
        key = _key(task.id, measured)
        keys[key] += 1
        yield Finding(
            id=name,
            key=key if keys[key] == 1 else f"{key}:{keys[key]}",
            label=label,
            sense=measured.sense,
            polygon=_outline(measured.patch),
            pixels=measured.patch.pixels,
            area_m2=results.get((name, "area")),
            extreme_c=numbers["extreme_c"],
            mean_c=numbers["mean_c"],
            delta_k=numbers["delta_k"],
            mean_delta_k=numbers["mean_delta_k"],
            temperature_factor=numbers["temperature_factor"],
            temperature_factor_at_0_25=numbers["temperature_factor_at_0_25"],
            **envelope_of_finding(evidence, name, measured.sense, verdict.flags),
            pressure_change_k=evidence.paired.findings[label - 1].change if evidence.paired else None,
            shape=_shape(measured, screened),
            exceeds_threshold=_exceeds(numbers["delta_k"], screened.min_delta, measured.sense),
            assessments=verdict.assessments,
            urgency=verdict.urgency,
            outcome=verdict.outcome,
            flips=changes,
            budgets=budgets,
            indication=indication_of(evidence, label, measured.patch, measured.sense, emissivity),
            flags=(*verdict.flags, *((FRAGILE,) if changes else ())),
        )


def components(evidence: Evidence, plans: Mapping[str, TwinPlan]) -> Iterator[ComponentReport]:
    """The components of a frame in the order of the survey."""
    task, corrected, results = evidence.task, evidence.corrected, evidence.numbers.results
    for component in task.components:
        name = component.name
        drawn = mask(component.polygon, (corrected.t.shape[0], corrected.t.shape[1]))
        member = _member(component, corrected, evidence.planned, is_valid=evidence.is_valid)
        plan = plans[name]
        numbers = {
            "max_c": celsius(results.get((name, "max"))),
            "delta_similar_k": results.get((name, "delta_similar")),
            "delta_ambient_k": results.get((name, "delta_ambient")),
        }
        verdict = assess_component(member, plan, numbers, evidence.criteria)
        budgets = evidence.numbers.budgets_of(name)
        changes = _flips(verdict, numbers, budgets, evidence.inputs)
        yield ComponentReport(
            name=name,
            key=f"{task.id}:component:{name}",
            group=component.group,
            phase=component.phase,
            load_a=component.load,
            rated_a=component.rated,
            polygon=component.polygon,
            pixels=int(np.count_nonzero(drawn)),
            max_c=numbers["max_c"],
            mean_c=celsius(results.get((name, "mean"))),
            delta_similar_k=numbers["delta_similar_k"],
            similar_to=None if plan.is_coolest else plan.name,
            delta_ambient_k=numbers["delta_ambient_k"],
            heat_flux_w_m2=results.get((name, "flux")),
            at_rated_load=_at_rated(member, numbers),
            assessments=verdict.assessments,
            urgency=verdict.urgency,
            cleared=verdict.cleared,
            outcome=verdict.outcome,
            flips=changes,
            budgets=budgets,
            flags=(*verdict.flags, *((FRAGILE,) if changes else ())),
        )


def _flips(
    verdict: Verdict,
    numbers: Mapping[str, Estimate | None],
    budgets: Mapping[str, tuple[BudgetTerm, ...]],
    inputs: Mapping[str, Input],
) -> tuple[Flip, ...]:
    """What would change the governing class; nothing where no class was given."""
    for assessment in verdict.assessments:
        criterion = criteria()[assessment.criterion]
        estimate = numbers.get(criterion.quantity)
        if assessment.governs and assessment.class_ is not None and estimate is not None:
            return flips(on_axis(criterion, estimate, budgets.get(criterion.quantity, ()), inputs))
    return ()


def _exceeds(delta: Estimate | None, threshold: float, sense: str) -> float | None:
    if delta is None or delta.u is None:
        return None
    return float(exceeds(delta.value, delta.u, threshold, sense))


def _member(component: Component, corrected: Corrected, planned: Planned, *, is_valid: bool = True) -> Member:
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
        emissivity=own if measured is None else _lowest_emissivity(measured, planned),
        group=component.group,
        load=component.load,
        rated=component.rated,
        flags=tuple(flag for flag, applies in flags if applies),
    )


def reference_emissivity(evidence: Evidence) -> float:
    """The emissivity that most of the reference area was corrected with; NaN without a reference area."""
    corrected = evidence.corrected
    pixels = np.bincount(corrected.optics[evidence.screened.reference_area])
    if pixels.size == 0:
        return float("nan")
    return corrected.scene[corrected.optics_names[int(pixels.argmax())][0]].value


def _lowest_emissivity(measured: Measured, planned: Planned) -> float:
    """The lowest that its pixels were corrected with: a part may lie on a surface with optics of its own."""
    return min(planned.scene[part.optics[0]].value for part in measured.region.whole.parts)


def _shape(measured: Measured, screened: Screened) -> Shape:
    centre = (round(measured.centre[0], 1), round(measured.centre[1], 1))
    sharpness = None if screened.delta is None else edge_sharpness(screened.delta, measured.patch)
    return Shape(elongation(measured.patch), sharpness, centre, measured.spot.centre)


def _key(frame: str, measured: Measured) -> str:
    """Where the finding is, coarsely: `F01:cold:120-88`."""
    x, y = (int(round(value / _KEY_GRID) * _KEY_GRID) for value in measured.centre)
    return f"{frame}:{measured.sense}:{x}-{y}"


def _outline(patch: Patch) -> tuple[tuple[int, int], ...]:
    return tuple((int(x) + patch.left, int(y) + patch.top) for x, y in outline(patch.mask))


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
