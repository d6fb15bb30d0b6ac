"""Findings: temperature factor at the coldest point, and how urgent a deviation is."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import replace
from math import copysign, isfinite, nan
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.assess.criteria import Criterion
from irsurvey.assess.judged import Judged, Sensitivity
from irsurvey.assess.severity import (
    AGAINST_REFERENCE,
    AUTOMATIC_REFERENCE,
    NO_CRITERION,
    NOT_CLEARED,
    Verdict,
    assess,
    blockers,
    governed,
    remedy,
)
from irsurvey.model.quantities import Estimate
from irsurvey.model.report import Assessment
from irsurvey.texts import state

AT_LIMIT: Final = "temperature_factor_at_0_25"
"""The temperature factor at the film resistance [m² K W⁻¹] that its limits assume; seen is another one."""


def temperature_factor(t_surface: ArrayLike, t_indoor: ArrayLike, t_outdoor: ArrayLike) -> NDArray[np.float64]:
    """Temperature factor f_Rsi = (T_s − T_e)/(T_i − T_e) of an inner surface, at the film resistance seen.

    Temperatures [K] or [°C].  NaN unless it is warmer indoors.  ISO 10211, ISO 13788.
    """
    t_surface, t_indoor, t_outdoor = (np.asarray(t, dtype=float) for t in (t_surface, t_indoor, t_outdoor))
    across = np.where(t_indoor > t_outdoor, t_indoor - t_outdoor, np.nan)
    return np.asarray((t_surface - t_outdoor) / across)


def factor_at_resistance(factor: ArrayLike, seen: ArrayLike, wanted: ArrayLike) -> NDArray[np.float64]:
    """The temperature factor the same wall would have at another inner film resistance.

    Film resistances [m² K W⁻¹].  The rest of the wall is kept: R_rest = R_seen·f/(1 − f),
    f' = R_rest/(R_rest + R_wanted), multiplied out so that f = 1 needs no special case.  NaN where a
    resistance is not positive or no wall can have that factor.
    """
    factor, seen, wanted = (np.asarray(a, dtype=float) for a in (factor, seen, wanted))
    whole = seen * factor + wanted * (1 - factor)
    possible = (whole > 0) & (seen > 0) & (wanted > 0)
    return np.asarray(seen * factor / np.where(possible, whole, np.nan))


def assess_finding(
    values: Mapping[str, Estimate | None],
    chosen: Sequence[Criterion],
    *,
    sense: str,
    emissivity: float,
    flags: Sequence[str] = (),
    viewed_from: str | None = None,
) -> Verdict:
    """Assessments of one finding of any kind of survey, the highest urgency, and its flags; never cleared.

    `values` are its measured numbers by their key in report.json (`delta_k`, `temperature_factor`, …).
    With the flag "automatic reference" whatever depends on the reference gets neither class nor urgency
    until somebody confirms it.
    Criteria for the other sense or the other face do not apply and are left out.
    """
    blocked = blockers(flags, emissivity)
    used = [
        criterion
        for criterion in chosen
        if criterion.applies_to == "finding"
        and criterion.sense in ("either", sense)
        and criterion.viewed_from in (None, viewed_from)
    ]
    assessed = [_assess(criterion, values, blocked) for criterion in used]
    told = [*flags, *blocked, *(() if used else (NO_CRITERION,)), *((NOT_CLEARED,) if blocked else ())]
    assessments, urgency = governed(assessed, {criterion.name for criterion in used}, remedy(blocked))
    return Verdict(assessments, urgency, False, tuple(dict.fromkeys(told)))


def judged(criterion: Criterion, estimate: Estimate, sensitivities: Iterable[Sensitivity] = ()) -> Judged:
    """A number of a finding on the axis of the criterion that judges it, its sensitivities brought along.

    A difference against the reference area becomes its magnitude; any other number stays as it is.
    """
    value, u, slope = estimate.value, nan if estimate.u is None else estimate.u, 1.0
    if criterion.quantity in AGAINST_REFERENCE:
        value, slope = abs(value), copysign(1.0, value)
    moved = tuple(replace(one, sensitivity=slope * one.sensitivity) for one in sensitivities)
    return Judged(criterion, value, u, moved)


def _assess(criterion: Criterion, values: Mapping[str, Estimate | None], blocked: Sequence[str]) -> Assessment:
    estimate = values.get(criterion.quantity)
    if estimate is None:
        against = criterion.quantity in AGAINST_REFERENCE
        words = state("against_reference") if against else f"({criterion.quantity})"
        return assess(criterion, None, words, blocked)
    on_axis = judged(criterion, estimate)
    number = Estimate(on_axis.value, on_axis.u if isfinite(on_axis.u) else None)
    if criterion.quantity in AGAINST_REFERENCE:
        words = state("colder_than_reference" if estimate.value < 0 else "warmer_than_reference")
        return _until_confirmed(assess(criterion, number, words, blocked), blocked)
    seen = values.get("temperature_factor")
    if criterion.quantity != AT_LIMIT or seen is None:
        return assess(criterion, number, f"({criterion.quantity})", blocked)
    return assess(criterion, number, state("factor_at_limit", seen=f"{seen.value:.2f}"), blocked)


def _until_confirmed(assessment: Assessment, blocked: Sequence[str]) -> Assessment:
    """The assessment, or without class and urgency where the reference area is only a suggestion."""
    if AUTOMATIC_REFERENCE not in blocked:
        return assessment
    blank = replace(assessment, class_=None, urgency=None, probabilities={}, verdict=None)
    return replace(blank, statement=state("suggestion"))
