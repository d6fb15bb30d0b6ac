"""Findings: temperature factor at the coldest point, and how urgent a deviation is."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from math import isfinite
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.assess.criteria import Criterion
from irsurvey.assess.severity import (
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

FILM_RESISTANCE: Final = 0.13
"""Inner film resistance a camera sees on a plane wall [m² K W⁻¹] (ISO 6946, horizontal heat flow [P])."""

AGAINST_REFERENCE: Final = ("delta_k", "mean_delta_k")
"""Numbers that depend on the reference area; criteria judge their magnitude."""


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
    film_resistance: float = FILM_RESISTANCE,
) -> Verdict:
    """Assessments of one finding of any kind of survey, the highest urgency, and its flags; never cleared.

    `values` are its measured numbers by their key in report.json (`delta_k`, `temperature_factor`, …).
    With the flag "automatic reference" whatever depends on the reference gets neither class nor urgency
    until somebody confirms it.  `film_resistance` [m² K W⁻¹] is the one behind `temperature_factor`.
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
    assessed = [_assess(criterion, values.get(criterion.quantity), film_resistance, blocked) for criterion in used]
    told = [*flags, *blocked, *(() if used else (NO_CRITERION,)), *((NOT_CLEARED,) if blocked else ())]
    assessments, urgency = governed(assessed, {criterion.name for criterion in used}, remedy(blocked))
    return Verdict(assessments, urgency, False, tuple(dict.fromkeys(told)))


def _assess(
    criterion: Criterion, estimate: Estimate | None, film_resistance: float, blocked: Sequence[str]
) -> Assessment:
    if criterion.quantity in AGAINST_REFERENCE:
        return _against_reference(criterion, estimate, blocked)
    if criterion.film_resistance is None or estimate is None:
        return assess(criterion, estimate, f"({criterion.quantity})", blocked)
    converted = _at_resistance(estimate, film_resistance, criterion.film_resistance)
    words = (
        f"temperature factor at the film resistance of {criterion.film_resistance:g} m² K/W the limit assumes "
        f"({estimate.value:.2f} at the {film_resistance:g} m² K/W seen)"
    )
    return assess(criterion, converted, words, blocked)


def _against_reference(criterion: Criterion, estimate: Estimate | None, blocked: Sequence[str]) -> Assessment:
    if estimate is None:
        return assess(criterion, None, "against the reference area", blocked)
    words = f"{'colder' if estimate.value < 0 else 'warmer'} than the reference area"
    magnitude = replace(estimate, value=abs(estimate.value))
    assessment = assess(criterion, magnitude, words, blocked)
    if AUTOMATIC_REFERENCE not in blocked:
        return assessment
    statement = "A suggestion: the reference area was found automatically, no severity until it is confirmed."
    return replace(assessment, class_=None, urgency=None, probabilities={}, statement=statement)


def _at_resistance(estimate: Estimate, seen: float, wanted: float) -> Estimate:
    """The estimate of a temperature factor at another film resistance; its u by half the swing over ±u."""
    value = float(factor_at_resistance(estimate.value, seen, wanted))
    if estimate.u is None:
        return Estimate(value, None)
    low, high = factor_at_resistance([estimate.value - estimate.u, estimate.value + estimate.u], seen, wanted)
    u = float(high - low) / 2
    return Estimate(value, u if isfinite(u) else None)
