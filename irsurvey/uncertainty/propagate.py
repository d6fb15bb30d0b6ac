"""First-order propagation with finite sensitivities, every input moved through the whole model at once."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from math import inf, isfinite, isnan

import numpy as np
from numpy.typing import NDArray

from irsurvey.model import Estimate, Scene
from irsurvey.uncertainty.coverage import half_width
from irsurvey.uncertainty.joint import Array, joint, moved

Model = Callable[[Mapping[str, Array]], Array]
"""Values by name, each of shape (n, 1), to results of shape (n, m): n scenes, m numbers."""

_ROUNDING = 1e-14
"""Of (Σ |half swing|)²: a variance below it is what rounding left of swings that cancel."""
_LIKE_NORMAL = 0.04
"""Of u: a 95 % half-width this near to 1.96 u (2 %) needs no telling."""


@dataclass(frozen=True, slots=True)
class Term:
    """What one input contributes to one result.

    `u` of the input; `sensitivity` ∂result/∂input, finite and with all that follows the input moving along;
    `contribution` |sensitivity|·u, the result's standard uncertainty from this input alone; `share` of the
    result's variance: s Σ r s′ / u² over all inputs s′, so that the shares sum to 1.  What two correlated
    inputs do together is halved between them; an input that takes from the variance by its correlation has
    a negative share.  All shares are 0 where nothing contributes, NaN where the uncertainty does not exist.
    """

    name: str
    u: float
    sensitivity: float
    contribution: float
    share: float


@dataclass(frozen=True, eq=False)  # no slots: the parts of the variances are worked out once and kept
class Budget:
    """What each input contributes to each result.

    `values` (m,); for each of the k `names` its standard uncertainty `inputs_u` (k,) and `half_swings` (k, m),
    signed: the change of the results when that input moves by one standard uncertainty.  `correlation` (k, k);
    `adjusted`: the largest change of a stated coefficient that was needed to make them possible together.
    `rectangular` (k,): inputs whose distribution is.
    """

    values: Array
    names: tuple[str, ...]
    inputs_u: Array
    half_swings: Array
    correlation: Array
    adjusted: float
    rectangular: NDArray[np.bool_]

    @property
    def u(self) -> Array:
        """Standard uncertainty of each result, shape (m,): u² = Σ r_ij s_i s_j.  JCGM 100:2008, eq. 13 and 16."""
        return np.asarray(np.sqrt(self._shared.sum(axis=0)))

    def terms(self, index: int) -> tuple[Term, ...]:
        """The inputs of one result, the largest contribution first; what has none, because no step of it had a
        solution (NaN), stands before all."""
        swings, shared = self.half_swings[:, index], self._shared[:, index]
        variance = shared.sum()
        shares = shared / variance if variance != 0 else shared
        terms = [
            Term(name, u, swing / u, abs(swing), share)
            for name, u, swing, share in zip(
                self.names, self.inputs_u.tolist(), swings.tolist(), shares.tolist(), strict=True
            )
        ]
        return tuple(sorted(terms, key=lambda term: -inf if isnan(term.contribution) else -term.contribution))

    @property
    def half_widths(self) -> Array:
        """Half-width (m,) of the 95 % interval of each result: 1.96 u, less where one rectangular input dominates."""
        flat = np.where(self.rectangular[:, None], np.abs(self.half_swings), 0.0)
        largest = flat.max(axis=0) if flat.size else np.zeros(self.values.shape)
        rest = np.sqrt(np.maximum(self.u**2 - largest**2, 0.0))
        return half_width(rest, 3**0.5 * largest)

    def estimates(self) -> tuple[Estimate | None, ...]:
        """Each result with its uncertainty, None where it does not exist (NaN); u None where only that does not.

        With a 95 % interval where that is more than 2 % from 1.96 u.
        """
        return tuple(
            None if isnan(value) else _estimate(value, u, half)
            for value, u, half in zip(self.values.tolist(), self.u.tolist(), self.half_widths.tolist(), strict=True)
        )

    @cached_property
    def _shared(self) -> Array:
        """Parts (k, m) of the variances of the results: s_i Σ_j r_ij s_j."""
        parts = self.half_swings * (self.correlation @ self.half_swings)
        cancelled = parts.sum(axis=0) <= _ROUNDING * np.abs(self.half_swings).sum(axis=0) ** 2
        return np.where(cancelled, 0.0, parts)


def _estimate(value: float, u: float, half: float) -> Estimate:
    if not isfinite(u):
        return Estimate(value, None)
    return Estimate(value, u, None if abs(half - 1.96 * u) <= _LIKE_NORMAL * u else (value - half, value + half))


def propagate(model: Model, scene: Scene, reach: Mapping[str, Sequence[int]] | None = None) -> Budget:
    """First-order propagation with finite sensitivities (JCGM 100:2008, 5.1.3 note 2, 5.2.2).

    Every quantity with an uncertainty moves by ±u through the whole model, whatever follows it with it, so
    what two results share cancels in their difference by itself.  A step that would leave a domain is cut at
    its edge and the swing scaled back to u; where the model has no solution on one side (NaN), the other
    side alone counts.

    `reach`: of names that can move a few results only, the places of these results.  Inputs that reach none of
    the same results move in one scene together, so that what is known of each is the same and costs less (Curtis,
    Powell and Reid 1974, IMA J. Appl. Math. 13, 117–119).
    """
    inputs = joint(scene)
    reached, shared = _shared_moves(inputs.moves, reach or {})
    count = max(shared, default=-1) + 1
    inputs_u = np.array([quantity.u for quantity in inputs.quantities])
    up, down = np.minimum(inputs_u, inputs.high), np.maximum(-inputs_u, inputs.low)
    every = {quantity.name: quantity for quantity in scene.quantities}
    columns = {name: np.full((2 * count + 1, 1), float(quantity.value)) for name, quantity in every.items()}
    for row, names, highest, lowest in zip(shared, inputs.moves, up, down, strict=True):
        for name in names:
            columns[name][[row + 1, row + 1 + count], 0] = moved(every[name], np.array([highest, lowest]))
    results = model(columns)
    rises = (results[1 : count + 1] - results[0])[shared]
    falls = (results[0] - results[count + 1 :])[shared]
    for changes in (rises, falls):
        for row, own in enumerate(reached):
            if own is not None:
                changes[row] = _only(own, changes[row], results[0])
    missing_up, missing_down = np.isnan(rises), np.isnan(falls)
    width = np.where(missing_up, 0, up[:, None]) - np.where(missing_down, 0, down[:, None])
    swing = np.where(missing_up, 0, rises) + np.where(missing_down, 0, falls)
    with np.errstate(invalid="ignore", divide="ignore"):
        half_swings = swing / width * inputs_u[:, None]  # 0/0: no side has a solution, no uncertainty exists
    terms = tuple(quantity.name for quantity in inputs.quantities)
    rectangular = np.array([quantity.distribution == "rectangular" for quantity in inputs.quantities], np.bool_)
    return Budget(results[0], terms, inputs_u, half_swings, inputs.correlation, inputs.adjusted, rectangular)


def _shared_moves(
    moves: Sequence[Sequence[str]], reach: Mapping[str, Sequence[int]]
) -> tuple[list[frozenset[int] | None], list[int]]:
    """Of each input the results it reaches, None for all of them, and the number of the scene in which it moves."""
    reached = [
        frozenset(place for name in names for place in reach[name]) if all(name in reach for name in names) else None
        for names in moves
    ]
    scenes: list[frozenset[int] | None] = []  # the results that each moves already
    numbers = []
    for own in reached:
        number = len(scenes)
        if own is None:
            scenes.append(None)
        else:
            number = next((k for k, busy in enumerate(scenes) if busy is not None and busy.isdisjoint(own)), number)
            if number == len(scenes):
                scenes.append(frozenset())
            scenes[number] = own.union(scenes[number] or ())
        numbers.append(number)
    return reached, numbers


def _only(reached: frozenset[int], changes: Array, nominal: Array) -> Array:
    """Changes of the results reached, none of the others; NaN where the nominal result does not exist."""
    kept = nominal - nominal
    places = sorted(reached)
    kept[places] = changes[places]
    return kept
