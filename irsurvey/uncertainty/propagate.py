"""First-order propagation with finite sensitivities, all inputs moved through the whole model at once."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from math import isfinite, isnan

import numpy as np
from numpy.typing import NDArray

from irsurvey.model import Estimate, Scene

Model = Callable[[Mapping[str, NDArray[np.float64]]], NDArray[np.float64]]
"""Values by name, each of shape (n, 1), to results of shape (n, m): n scenes, m numbers."""


@dataclass(frozen=True, slots=True, eq=False)
class Budget:
    """What each input contributes to each result.

    `values` (m,), `half_swings` (k, m) signed, one row per name in `terms`: the change of the results
    when that input moves by one standard uncertainty.
    """

    values: NDArray[np.float64]
    terms: tuple[str, ...]
    half_swings: NDArray[np.float64]

    @property
    def u(self) -> NDArray[np.float64]:
        """Standard uncertainty of each result for independent inputs, shape (m,).  JCGM 100:2008, eq. 11a."""
        return np.asarray(np.sqrt(np.sum(self.half_swings**2, axis=0)))

    def estimates(self) -> tuple[Estimate | None, ...]:
        """Each result with its uncertainty, None where it does not exist (NaN); u None where only that does not."""
        return tuple(
            None if isnan(value) else Estimate(value, u if isfinite(u) else None)
            for value, u in zip(self.values.tolist(), self.u.tolist(), strict=True)
        )


def propagate(model: Model, scene: Scene) -> Budget:
    """First-order propagation with finite sensitivities (JCGM 100:2008, 5.1.3 note 2).

    Every quantity with an uncertainty moves by ±u through the whole model, so what two results share
    cancels in their difference by itself.  A step that would leave the quantity's domain is cut at its
    edge and the swing scaled back to u; where the model has no solution on one side (NaN), the other
    side alone counts.
    """
    uncertain = [quantity for quantity in scene.quantities if quantity.u > 0]
    count = len(uncertain)
    columns = {q.name: np.full((2 * count + 1, 1), float(q.value)) for q in scene.quantities}
    steps = np.empty((2, count, 1))
    for row, quantity in enumerate(uncertain, start=1):
        up, down = min(quantity.value + quantity.u, quantity.high), max(quantity.value - quantity.u, quantity.low)
        columns[quantity.name][row] = up
        columns[quantity.name][row + count] = down
        steps[:, row - 1, 0] = (up - quantity.value) / quantity.u, (quantity.value - down) / quantity.u
    results = model(columns)
    rises = results[1 : count + 1] - results[0]
    falls = results[0] - results[count + 1 :]
    missing_up, missing_down = np.isnan(rises), np.isnan(falls)
    reach = np.where(missing_up, 0, steps[0]) + np.where(missing_down, 0, steps[1])
    swing = np.where(missing_up, 0, rises) + np.where(missing_down, 0, falls)
    with np.errstate(invalid="ignore", divide="ignore"):
        half_swings = swing / reach  # 0/0: no side has a solution, and the uncertainty does not exist
    return Budget(results[0], tuple(quantity.name for quantity in uncertain), half_swings)
