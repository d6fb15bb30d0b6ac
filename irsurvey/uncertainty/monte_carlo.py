"""Propagation of distributions by a Monte Carlo method, as many draws as its results need."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import isnan, sqrt

import numpy as np
from numpy.typing import NDArray

from irsurvey.model import Estimate, Scene
from irsurvey.uncertainty.joint import Array, Joint, joint, moved
from irsurvey.uncertainty.propagate import Budget, Model

COVERAGE = 0.95
UNSOLVED = 0.025
"""Share of draws without a solution up to which a result has an uncertainty: beyond it they may hold an end of
the 95 % interval, which leaves 2.5 % on each side."""

_ROWS = 100
"""Scenes a model is given at once: its arrays then stay in the processor's cache."""
_ROUNDING = 1e-12
"""Of a value: standard uncertainties below it are rounding, and do not differ."""


@dataclass(frozen=True, slots=True, eq=False)
class Drawn:
    """Distributions of m results, from `draws` scenes.

    `values` (m,) are the results at the inputs' own values: they stay what is reported, so that a report does
    not depend on its draws; `means` are those of the draws.  `u`: standard deviations of the draws; `interval`
    (2, m): ends of the 95 % interval with 2.5 % of the draws on each side, `shortest` (2, m): of the shortest;
    all NaN where more than `UNSOLVED` of a result's draws had no solution, else of those that had.  `missing`
    counts those that had none: all, where the value itself does not exist.  `converged`: further draws would
    not change the stated digits of u, and mean and ends as far.
    """

    values: Array
    means: Array
    u: Array
    interval: Array
    shortest: Array
    missing: NDArray[np.intp]
    converged: NDArray[np.bool_]
    draws: int

    def estimates(self) -> tuple[Estimate | None, ...]:
        """Each result with u and interval; None where it does not exist (NaN), both None where only they do not."""
        return tuple(
            None if isnan(value) else Estimate(value, None) if isnan(u) else Estimate(value, u, (low, high))
            for value, u, low, high in zip(self.values.tolist(), self.u.tolist(), *self.interval.tolist(), strict=True)
        )


def monte_carlo(
    model: Model,
    scene: Scene,
    *,
    seed: int | Sequence[int],
    draws_at_most: int = 100_000,
    batch: int = 10_000,
    digits: int = 1,
) -> Drawn:
    """Propagation of distributions (JCGM 101:2008) by its adaptive procedure (7.9): the same for the same seed.

    Batches of draws are added until, for every result, twice the standard deviation of the average over the
    batches of mean, standard uncertainty and both ends of the interval is within half a unit of the last of
    `digits` significant digits of u, or `draws_at_most` is reached.  Needs some 40·draws·m bytes.

    A "normal" input is cut off at the ends of its domain (drawn by the inverse of its distribution function),
    a "rectangular" one (half-width √3 u) likewise: `u` is that of the whole distribution, what is drawn spreads
    less.  Correlated inputs are drawn as normal and turned into their own distributions one by one: normal ones
    that are not cut off have the stated coefficients, others some per cent less.  What follows another moves with
    it by its deviation and then by its own; a leader goes no further than all that follows it can.
    """
    generator = np.random.default_rng(seed)
    inputs = joint(scene)
    root = _square_root(inputs.correlation)
    values = model({quantity.name: np.full((1, 1), float(quantity.value)) for quantity in scene.quantities})[0]
    batch = min(batch, draws_at_most)
    draws: list[Array] = []
    moments = np.zeros((3, values.size))
    summaries: list[Array] = []
    while True:
        normal = generator.standard_normal((batch, len(inputs.quantities))) @ root
        results = _results(model, scene, _deviations(inputs, normal), batch)
        draws.append((results - values).T)  # what does not vary is exactly 0
        moments += _moments(draws[-1])
        summaries.append(_summary(np.sort(draws[-1])))
        total = batch * len(draws)
        missing = total - moments[0]
        exists = missing <= UNSOLVED * total
        converged = exists & _settled(np.stack(summaries), _mean_and_u(moments)[1], digits)
        if np.all(converged | ~exists) or total + batch > draws_at_most:
            break
    ordered = np.concatenate(draws, axis=1)
    ordered.sort(axis=1)
    mean, u, low, high = np.where(exists, _summary(ordered), np.nan)
    shortest = np.where(exists, _shortest(ordered), np.nan)
    interval = values + np.stack([low, high])
    return Drawn(values, values + mean, u, interval, values + shortest, missing.astype(np.intp), converged, total)


def differ(budget: Budget, drawn: Drawn, by: float = 0.2) -> NDArray[np.bool_]:
    """Where (m,) first order does not do: u differs by more than `by` of that drawn, or the interval is skewed.

    Skewed: its arms, from the value, differ by more than `by` of their mean.  Where one of the two has an
    uncertainty and the other not, they differ; where neither has, there is nothing to differ.
    """
    low, high = drawn.values - drawn.interval[0], drawn.interval[1] - drawn.values
    rounding = _ROUNDING * np.abs(drawn.values)
    uneven = np.abs(budget.u - drawn.u) > by * drawn.u + rounding
    skewed = np.abs(high - low) > by * (high + low) / 2 + rounding
    return np.asarray(uneven | skewed | (np.isnan(budget.u) != np.isnan(drawn.u)))


def _deviations(inputs: Joint, normal: Array) -> dict[str, Array]:
    """Deviations (n,) by name of all that moves, from standard normal draws (n, k), leaders before followers."""
    deviations = {name: np.zeros(len(normal)) for names in inputs.moves for name in names}
    leaders_first = sorted(range(len(inputs.moves)), key=lambda index: -len(inputs.moves[index]))
    for index in leaders_first:
        quantity = inputs.quantities[index]
        already = deviations[quantity.name]
        low, high = inputs.low[index] - already, inputs.high[index] - already
        own = DISTRIBUTIONS[quantity.distribution](normal[:, index], quantity.u, low, high)
        for name in inputs.moves[index]:
            deviations[name] = deviations[name] + own
    return deviations


def _results(model: Model, scene: Scene, deviations: dict[str, Array], count: int) -> Array:
    """The model's results (count, m) for scenes with these deviations (count,)."""
    columns = {quantity.name: np.full((count, 1), float(quantity.value)) for quantity in scene.quantities}
    columns |= {name: moved(scene[name], deviation[:, None]) for name, deviation in deviations.items()}
    pieces = (slice(start, start + _ROWS) for start in range(0, count, _ROWS))
    return np.concatenate([model({name: column[rows] for name, column in columns.items()}) for rows in pieces])


def _normal(z: Array, u: float, low: Array, high: Array) -> Array:
    """Deviations of a normal distribution cut off at `low` and `high`, from standard normal draws."""
    from scipy.special import ndtr, ndtri

    below, within = ndtr(low / u), ndtr(high / u) - ndtr(low / u)
    return np.clip(u * ndtri(below + ndtr(z) * within), low, high)


def _rectangular(z: Array, u: float, low: Array, high: Array) -> Array:
    """Deviations of a rectangular distribution cut off at `low` and `high`, from standard normal draws."""
    from scipy.special import ndtr

    start, end = np.maximum(-sqrt(3) * u, low), np.minimum(sqrt(3) * u, high)
    return np.asarray(start + ndtr(z) * (end - start))


DISTRIBUTIONS = {"normal": _normal, "rectangular": _rectangular}


def _square_root(correlation: Array) -> Array:
    """The symmetric square root of a correlation matrix: it exists where the matrix is singular, and is unique."""
    eigenvalues, vectors = np.linalg.eigh(correlation)
    return np.asarray((vectors * np.sqrt(np.maximum(eigenvalues, 0))) @ vectors.T)


def _moments(draws: Array) -> Array:
    """Number, sum and sum of squares (3, m) of the draws (m, n) that have a solution."""
    return np.stack([np.sum(~np.isnan(draws), axis=1), np.nansum(draws, axis=1), np.nansum(draws**2, axis=1)])


def _mean_and_u(moments: Array) -> Array:
    """Mean and standard deviation (2, m); JCGM 101:2008, 7.6."""
    count, total, squares = moments
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.stack([total / count, np.sqrt(np.maximum(squares - total**2 / count, 0) / (count - 1))])


def _summary(ordered: Array) -> Array:
    """Mean, standard deviation and ends of the symmetric interval (4, m) of ordered draws (m, n), NaN last.

    Ends: the draws that leave equally many outside on each side; JCGM 101:2008, 7.7."""
    moments = _moments(ordered)
    width = _width(moments[0])
    first = (moments[0].astype(np.intp) - width + 1) // 2 - 1
    places = np.clip(np.stack([first, first + width], axis=1), 0, ordered.shape[1] - 1)
    return np.concatenate([_mean_and_u(moments), np.take_along_axis(ordered, places, axis=1).T])


def _shortest(ordered: Array) -> Array:
    """Ends (2, m) of the shortest interval of ordered draws (m, n), NaN last; JCGM 101:2008, 7.7."""
    ends = np.full((2, len(ordered)), np.nan)
    counts = np.sum(~np.isnan(ordered), axis=1)
    for row, (count, width) in enumerate(zip(counts, _width(counts), strict=True)):
        starts, stops = ordered[row, : count - width], ordered[row, width:count]
        if starts.size:
            at = np.argmin(stops - starts)
            ends[:, row] = starts[at], stops[at]
    return ends


def _width(counts: NDArray[np.number]) -> NDArray[np.intp]:
    """Draws between the ends of a 95 % interval of so many."""
    return (COVERAGE * counts + 0.5).astype(np.intp)


def _settled(summaries: Array, u: Array, digits: int) -> NDArray[np.bool_]:
    """Which results (m,) further batches would not change; `summaries` (h, 4, m).  JCGM 101:2008, 7.9.2 and 7.9.4.

    The last digit is that of u as it is, not rounded: 9.97 counts as 9.9, which is never looser."""
    with np.errstate(divide="ignore"):
        tolerance = 0.5 * 10 ** (np.floor(np.log10(u)) - (digits - 1))
    batches = len(summaries)
    if batches < 2:
        return np.zeros(u.shape, bool)
    scatter = summaries.std(axis=0, ddof=1) / sqrt(batches)
    return np.asarray(np.all(2 * scatter <= tolerance, axis=0))
