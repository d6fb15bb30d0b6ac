"""Uncertainty budgets of single numbers: as records of a report, and as what decisions are made with."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from math import isfinite

from irsurvey.analysis.inputs import domain, in_si, named, shown
from irsurvey.assess.building import judged
from irsurvey.assess.criteria import Criterion
from irsurvey.assess.fragile import fragile
from irsurvey.assess.judged import Judged, Sensitivity
from irsurvey.model import BudgetTerm, Estimate, Flip, Input
from irsurvey.uncertainty import Budget

_LEAST_SHARE = 1e-4
"""Terms below this share of the variance are left out of a report: together they move no digit of u."""


def terms(budget: Budget, index: int) -> tuple[BudgetTerm, ...]:
    """The terms of one result, the largest first, in the units their inputs are shown in."""
    found = []
    for term in budget.terms(index):
        if not (isfinite(term.contribution) and abs(term.share) >= _LEAST_SHARE):
            continue
        key, factor = shown(term.name)
        found.append(BudgetTerm(key, term.u * factor, term.sensitivity / factor, term.contribution, term.share))
    return tuple(found)


def on_axis(
    criterion: Criterion, estimate: Estimate, budget: Iterable[BudgetTerm], inputs: Mapping[str, Input]
) -> Judged:
    """A number as a criterion judges it, with the sensitivities of its budget, in SI units and by scene names."""
    return judged(criterion, estimate, (_sensitivity(term, inputs) for term in budget))


def flips(one: Judged) -> tuple[Flip, ...]:
    """Plausible changes of single inputs that would change the class, the likeliest first, in the inputs' units."""
    found = fragile(one.value, one.criterion, (part for part in one.sensitivities if _is_input(part.name)))
    return tuple(Flip(shown(flip.name)[0], flip.change * shown(flip.name)[1], flip.to_class) for flip in found)


def _sensitivity(term: BudgetTerm, inputs: Mapping[str, Input]) -> Sensitivity:
    name = named(term.input)
    factor = shown(name)[1]
    low, high = domain(name)
    value = in_si(name, inputs[term.input].value) if term.input in inputs else 0.0
    return Sensitivity(name, term.u / factor, term.sensitivity * factor, low - value, high - value)


def _is_input(name: str) -> bool:
    """Whether somebody could have stated it differently: noise and outlines are nobody's statement."""
    return name.partition(":")[0] not in ("noise", "outline", "slope_x", "slope_y", "selection")
