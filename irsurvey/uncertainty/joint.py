"""How the inputs of a scene move together: who follows whom, how far each can go, how they correlate."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from math import isfinite

import numpy as np
from numpy.typing import NDArray

from irsurvey.model import Quantity, Scene

Array = NDArray[np.float64]

_ROUNDING = 1e-12
"""Per input: how far below zero rounding takes the smallest eigenvalue of a singular correlation matrix."""


@dataclass(frozen=True, slots=True, eq=False)
class Joint:
    """The uncertain inputs of a scene, in its order, and what moving each of them does.

    `moves` names what moves with each, one to one: itself first, then all that follow it, at any remove.
    `low` ≤ 0 ≤ `high` (k,) are how far it can go until one of these reaches the end of its domain.
    `correlation` (k, k) is that of the inputs' own movements; `adjusted` the largest change of a stated
    coefficient that was needed to make them possible together, 0 where they are.
    """

    quantities: tuple[Quantity, ...]
    moves: tuple[tuple[str, ...], ...]
    low: Array
    high: Array
    correlation: Array
    adjusted: float


def joint(scene: Scene) -> Joint:
    """The uncertain inputs of a scene: those with a value and u > 0.

    Raises KeyError where a quantity follows one the scene does not have, ValueError where it follows itself.
    """
    every = {quantity.name: quantity for quantity in scene.quantities}
    chains = {name: _chain(name, every) for name in every}
    uncertain = tuple(quantity for quantity in scene.quantities if quantity.u > 0 and isfinite(quantity.value))
    moves = tuple(
        (lead.name, *(name for name, chain in chains.items() if lead.name in chain[1:])) for lead in uncertain
    )
    followed = [[every[name] for name in names if isfinite(every[name].value)] for names in moves]
    low = np.array([max(mover.low - mover.value for mover in movers) for movers in followed])
    high = np.array([min(mover.high - mover.value for mover in movers) for movers in followed])
    correlation, adjusted = correlation_matrix([quantity.name for quantity in uncertain], scene.correlations)
    return Joint(uncertain, moves, low, high, correlation, adjusted)


def correlation_matrix(names: Sequence[str], correlations: Iterable[tuple[str, str, float]]) -> tuple[Array, float]:
    """Correlation matrix (k, k) of these names, and the largest change of a coefficient that it took.

    Coefficients stated pair by pair can contradict each other (a with b and b with c fully, a with c not at
    all): then the variance of some sum would be negative.  Such a matrix is replaced by one with its negative
    eigenvalues set to zero and its diagonal brought back to one (Rebonato and Jäckel 1999, spectral
    decomposition).  Names not asked for are passed over.
    """
    place = {name: index for index, name in enumerate(names)}
    stated = np.eye(len(names))
    for one, other, coefficient in correlations:
        if one != other and one in place and other in place:
            stated[place[one], place[other]] = stated[place[other], place[one]] = coefficient
    eigenvalues, vectors = np.linalg.eigh(stated)
    if np.all(eigenvalues >= -_ROUNDING * len(names)):
        return stated, 0.0
    clipped = (vectors * np.maximum(eigenvalues, 0)) @ vectors.T
    scale = np.sqrt(np.diag(clipped))
    possible = clipped / np.outer(scale, scale)
    return possible, float(np.abs(possible - stated).max())


def moved(quantity: Quantity, deviation: Array) -> Array:
    """The quantity's value moved by these deviations, in its domain: value + (end − value) may round past the end."""
    return np.asarray(np.clip(quantity.value + deviation, quantity.low, quantity.high))


def _chain(name: str, every: dict[str, Quantity]) -> tuple[str, ...]:
    """The name, what it follows, what that follows, …"""
    chain = [name]
    while (leader := every[chain[-1]].follows) is not None:
        if leader in chain:
            raise ValueError(f"quantities of a scene: expected no circle, got {' follows '.join([*chain, leader])}")
        chain.append(leader)
    return tuple(chain)
