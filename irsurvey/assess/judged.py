"""A number as a criterion judges it, and the inputs its uncertainty comes from."""

from __future__ import annotations

from dataclasses import dataclass
from math import inf, nan

from irsurvey.assess.criteria import Criterion


@dataclass(frozen=True, slots=True)
class Sensitivity:
    """How far one number depends on one input of its measurement, to first order.

    `u` in the unit of the input, `sensitivity` in units of the number per unit of the input, signed.
    `least` and `most`: the furthest changes of the input its domain allows (an emissivity ends at 1).
    """

    name: str  # of the scene: "reflected", "emissivity:cover plate", …
    u: float
    sensitivity: float
    least: float = -inf
    most: float = inf

    @property
    def contribution(self) -> float:
        """Signed change of the number when the input moves by one u."""
        return self.sensitivity * self.u


@dataclass(frozen=True, slots=True)
class Judged:
    """One number on the axis of the criterion that judges it; u NaN where it is not known."""

    criterion: Criterion
    value: float
    u: float = nan
    sensitivities: tuple[Sensitivity, ...] = ()
