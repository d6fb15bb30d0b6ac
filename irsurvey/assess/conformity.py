"""Decisions with uncertainty: how probable each class is, and when a value may be accepted."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.assess.criteria import Criterion, class_index

GUARD = 2.0
"""Guard band in standard uncertainties: w = U with k = 2 (ILAC-G8:09/2019)."""


def exceedance(value: ArrayLike, u: ArrayLike, limit: ArrayLike) -> NDArray[np.float64]:
    """Probability that the true value lies above `limit`, Φ((value − limit)/u); all in one unit.

    Normal distribution, no prior knowledge.  u = 0 gives 0 or 1, and 0 at the limit itself; a negative
    or NaN u gives NaN.  JCGM 106:2012, 7.3.
    """
    return _probability_above(value, u, limit, False)


def class_probabilities(value: ArrayLike, u: ArrayLike, criterion: Criterion) -> dict[str, NDArray[np.float64]]:
    """Probability of each class of `criterion` for a value with standard uncertainty u (JCGM 106:2012, 7.4).

    u = 0 gives 1 for the class the value lies in; a negative or NaN u gives NaN.
    """
    above = [_probability_above(value, u, kind.low, kind.holds_low) for kind in criterion.classes]
    above.append(np.zeros_like(above[0]))
    return {kind.name: above[k] - above[k + 1] for k, kind in enumerate(criterion.classes)}


def accepted(value: ArrayLike, u: ArrayLike, criterion: Criterion) -> NDArray[np.bool_]:
    """Whether the value, moved by 2 u to the worse side, still lies in a class that asks for nothing.

    Guarded acceptance (JCGM 106:2012, 8.3.2) at the edge where action begins.  Never true for a NaN, for
    a negative u, or by a criterion that never asks for action.
    """
    u = np.asarray(u, dtype=float)
    index = class_index(np.asarray(value, dtype=float) + criterion.worse * GUARD * u, criterion)
    asks_nothing = np.array([kind.urgency == 0 for kind in criterion.classes])
    return np.asarray((index >= 0) & (u >= 0) & asks_nothing[index] & (criterion.worse != 0))


def _probability_above(value: ArrayLike, u: ArrayLike, limit: ArrayLike, or_equal: bool) -> NDArray[np.float64]:
    from scipy.special import ndtr

    distance, u = np.broadcast_arrays(np.asarray(value, dtype=float) - np.asarray(limit, dtype=float), u)
    certain = (distance > 0) | ((distance == 0) & or_equal)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        uncertain = ndtr(distance / u)
    known = ~np.isnan(distance) & (u >= 0)
    return np.where(known, np.where(u > 0, uncertain, certain), np.nan)
