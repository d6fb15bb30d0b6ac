"""From measured numbers to the records of a report: the findings of one frame."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping

import numpy as np

from irsurvey.analysis.budgets import flips, on_axis
from irsurvey.analysis.building import envelope_of_finding
from irsurvey.analysis.evidence import Evidence, celsius
from irsurvey.analysis.indications import indication_of, is_mirror
from irsurvey.analysis.planning import Measured, Planned
from irsurvey.analysis.regions import Screened
from irsurvey.anomalies.patch import Patch
from irsurvey.anomalies.shape import edge_sharpness, elongation
from irsurvey.assess.building import assess_finding
from irsurvey.assess.conformity import exceeds
from irsurvey.assess.fragile import FRAGILE
from irsurvey.assess.severity import (
    AUTOMATIC_REFERENCE,
    CONDITIONS,
    LEAST_EMISSIVITY,
    MIRRORS,
    SATURATED,
    SIZE_LIMITED,
    Verdict,
)
from irsurvey.geometry.polygons import outline
from irsurvey.model import (
    BudgetTerm,
    Estimate,
    Finding,
    Flip,
    Shape,
)

_KEY_GRID = 8
"""Positions in keys are rounded to this many pixels, so that a re-run with slightly other inputs keeps them."""
TOUCHES_EDGE = "touches frame edge"
REFLECTIVE = "reflective"


def findings(evidence: Evidence) -> Iterator[Finding]:
    """The findings of a frame in the order of their labels."""
    task, screened, results = evidence.task, evidence.screened, evidence.numbers.results
    keys: Counter[str] = Counter()
    against = reference_emissivity(evidence)  # a ΔT is no better than what it is taken against
    for label, (found, measured) in enumerate(zip(screened.regions, evidence.planned.anomalies, strict=True), start=1):
        name = measured.region.name
        emissivity = lowest_emissivity(measured, evidence.planned)
        mirrors = is_mirror(task, measured.patch, screened.t.shape, emissivity)
        flags = (
            (SATURATED, found.is_saturated),
            (SIZE_LIMITED, not measured.spot.is_full),
            (REFLECTIVE, emissivity < LEAST_EMISSIVITY),
            (TOUCHES_EDGE, measured.patch.touches_edge(screened.t.shape)),
            (AUTOMATIC_REFERENCE, task.reference is None and screened.reference is not None),
            (CONDITIONS, not evidence.is_valid),
            (MIRRORS, mirrors),
        )
        factor, factor_at_limit = (
            results.get((name, number)) if evidence.is_valid and not mirrors else None
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
        if task.kind == "building" and not evidence.is_valid:  # a wall in the sun asks for another look, not for repair
            verdict = verdict._replace(urgency=None)
        budgets = evidence.numbers.budgets_of(name)
        changes = class_flips(verdict, numbers, budgets, evidence)
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


def class_flips(
    verdict: Verdict,
    numbers: Mapping[str, Estimate | None],
    budgets: Mapping[str, tuple[BudgetTerm, ...]],
    evidence: Evidence,
) -> tuple[Flip, ...]:
    """What would change the governing class; nothing where no class was given."""
    known = {criterion.name: criterion for criterion in evidence.criteria}
    for assessment in verdict.assessments:
        estimate = numbers.get(assessment.quantity)
        if assessment.governs and assessment.class_ is not None and estimate is not None:
            terms = budgets.get(assessment.quantity, ())
            return flips(on_axis(known[assessment.criterion], estimate, terms, evidence.inputs))
    return ()


def _exceeds(delta: Estimate | None, threshold: float, sense: str) -> float | None:
    if delta is None or delta.u is None:
        return None
    return float(exceeds(delta.value, delta.u, threshold, sense))


def reference_emissivity(evidence: Evidence) -> float:
    """The emissivity that most of the reference area was corrected with; NaN without a reference area."""
    corrected = evidence.corrected
    pixels = np.bincount(corrected.optics[evidence.screened.reference_area])
    if pixels.size == 0:
        return float("nan")
    return corrected.scene[corrected.optics_names[int(pixels.argmax())][0]].value


def lowest_emissivity(measured: Measured, planned: Planned) -> float:
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
