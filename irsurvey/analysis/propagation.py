"""The numbers of one frame with their uncertainty, to first order or by drawing."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.budgets import terms
from irsurvey.analysis.exchange import Columns
from irsurvey.analysis.measurand import names, reach, stacked
from irsurvey.analysis.planning import Planned
from irsurvey.model import BudgetTerm, Estimate
from irsurvey.texts import state
from irsurvey.uncertainty import Budget, Drawn, differ, monte_carlo, propagate

FIRST_ORDER, DRAWN = "first-order", "monte-carlo"
UNCERTAINTIES = (FIRST_ORDER, DRAWN)
"""How uncertainty may be propagated."""

BUDGETED = {
    "delta": "delta_k",
    "extreme": "extreme_c",
    "flux": "heat_flux_w_m2",
    "temperature_factor_at_limit": "temperature_factor_at_0_25",
    "u_value_increase": "u_value_increase_w_m2k",
    "mould_margin": "mould_margin_k",
    "delta_similar": "delta_similar_k",
    "delta_ambient": "delta_ambient_k",
    "max": "max_c",
    "above_limit": "above_limit_k",
    "above_allowed": "above_allowed_k",
    "delta_similar_in_calm": "delta_similar_in_calm_k",
    "delta_ambient_in_calm": "delta_ambient_in_calm_k",
    "relative_difference": "relative_difference_percent",
    "delta_neighbours": "delta_neighbours_k",
}
"""Numbers of the measurand whose budgets are reported → their keys."""

_ROUNDING = 1e-6
"""Of a correlation coefficient."""


@dataclass(frozen=True, slots=True, eq=False)
class Propagated:
    """Results and budgets by (region, number), region "" the frame itself; SI units, budgets in shown units."""

    results: dict[tuple[str, str], Estimate | None]
    budgets: dict[tuple[str, str], tuple[BudgetTerm, ...]]
    how: str
    draws: int | None
    doubts: tuple[str, ...]

    def budgets_of(self, region: str) -> dict[str, tuple[BudgetTerm, ...]]:
        """Budgets of one region by the key of the number."""
        return {key: self.budgets[region, name] for name, key in BUDGETED.items() if self.budgets.get((region, name))}


def propagated(measured: Planned, how: str, seed: str) -> Propagated:
    """All numbers of a frame and what their uncertainty consists of.

    `how` is one of `UNCERTAINTIES`; draws are the same for the same `seed`.  Budgets are those of first order.
    """

    def model(values: Columns) -> NDArray[np.float64]:
        return stacked(measured.plan, values)

    numbers = names(measured.plan, measured.scene)
    budget = propagate(model, measured.scene, reach(measured.plan, numbers))
    drawn = monte_carlo(model, measured.scene, seed=tuple(seed.encode())) if how == DRAWN else None
    estimates = budget.estimates() if drawn is None else drawn.estimates()
    return Propagated(
        results=dict(zip(numbers, estimates, strict=True)),
        budgets={name: terms(budget, index) for index, name in enumerate(numbers) if name[1] in BUDGETED},
        how=how,
        draws=None if drawn is None else drawn.draws,
        doubts=tuple(_doubts(budget, drawn)),
    )


def _doubts(budget: Budget, drawn: Drawn | None) -> Iterator[str]:
    """Where the propagation itself is in doubt."""
    if budget.adjusted > _ROUNDING:
        yield state("flag_contradiction", most=f"{budget.adjusted:.2f}")
    if drawn is None:
        return
    if count := int(np.count_nonzero(differ(budget, drawn))):
        yield state("flag_not_first_order", count=count)
    if count := int(np.count_nonzero(~drawn.converged & np.isfinite(drawn.u))):
        yield state("flag_not_settled", draws=drawn.draws, count=count)
