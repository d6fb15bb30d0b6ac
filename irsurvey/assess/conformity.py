"""Decisions with uncertainty: how probable each class is, when a value may be accepted, when it asks for action."""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.assess.criteria import Criterion, class_index

GUARD: Final = 2.0
"""Guard band in standard uncertainties: w = U with k = 2 (ILAC-G8:09/2019)."""

FOUR_WAY: Final = ("pass", "conditional pass", "conditional fail", "fail")
"""The non-binary statement with guard band of ILAC-G8:09/2019, 4.2.3."""

CLEARED: Final = "cleared"
NOT_SETTLED: Final = "not cleared"
ACT: Final = "act"
OUTCOMES: Final = (CLEARED, NOT_SETTLED, ACT)
"""What is done about one number: nothing, look again, act."""


def exceedance(value: ArrayLike, u: ArrayLike, limit: ArrayLike) -> NDArray[np.float64]:
    """Probability that the true value lies above `limit`, Φ((value − limit)/u); all in one unit.

    Normal distribution, no prior knowledge.  u = 0 gives 0 or 1, and 0 at the limit itself; a negative
    or NaN u gives NaN.  JCGM 106:2012, 7.3.
    """
    return _probability_above(value, u, limit, False)


def exceeds(value: ArrayLike, u: ArrayLike, threshold: ArrayLike, sense: str) -> NDArray[np.float64]:
    """Probability that a signed difference truly goes beyond a detection threshold, in the sense it was found in.

    "hot": above +threshold; "cold": below −threshold; "either": both together.  All in one unit.  NaN as in
    `exceedance`.  JCGM 106:2012, 7.3.
    """
    hot = exceedance(value, u, threshold)
    cold = exceedance(np.negative(value), u, threshold)
    return {"hot": hot, "cold": cold, "either": hot + cold}[sense]


def specific_risk(
    value: ArrayLike, u: ArrayLike, limit: ArrayLike, *, worse: int = 1, guard: float = 0.0
) -> NDArray[np.float64]:
    """Probability that the decision taken on this one value is wrong (JCGM 106:2012, clause 9: specific risks).

    Accepted is what keeps `guard` standard uncertainties inside the limit: then this is the consumer's risk,
    that the true value lies beyond; otherwise the producer's, that it does not.  `worse` is +1 for an upper
    limit, −1 for a lower one.  NaN without a value or an uncertainty.
    """
    margin = worse * (np.asarray(value, dtype=float) - np.asarray(limit, dtype=float))
    beyond = exceedance(margin, u, 0.0)
    return np.where(margin + guard * np.asarray(u, dtype=float) <= 0, beyond, 1 - beyond)


def class_probabilities(value: ArrayLike, u: ArrayLike, criterion: Criterion) -> dict[str, NDArray[np.float64]]:
    """Probability of each class of `criterion` for a value with standard uncertainty u (JCGM 106:2012, 7.4).

    u = 0 gives 1 for the class the value lies in; a negative or NaN u gives NaN.
    """
    above = [_probability_above(value, u, kind.low, kind.holds_low) for kind in criterion.classes]
    above.append(np.zeros_like(above[0]))
    return {kind.name: above[k] - above[k + 1] for k, kind in enumerate(criterion.classes)}


def action_probability(value: ArrayLike, u: ArrayLike, criterion: Criterion) -> NDArray[np.float64]:
    """Probability that the true value lies in a class that asks for something (urgency above 0)."""
    by_class = class_probabilities(value, u, criterion)
    return np.asarray(sum(by_class[kind.name] * (kind.urgency > 0) for kind in criterion.classes))


def accepted(value: ArrayLike, u: ArrayLike, criterion: Criterion) -> NDArray[np.bool_]:
    """Whether the value, moved by 2 u to the worse side, still lies in a class that asks for nothing.

    Guarded acceptance (JCGM 106:2012, 8.3.2) at the edge where action begins.  Never true for a NaN, for
    a negative u, or by a criterion that never asks for action.
    """
    u = np.asarray(u, dtype=float)
    index = class_index(np.asarray(value, dtype=float) + criterion.worse * GUARD * u, criterion)
    return np.asarray((index >= 0) & (u >= 0) & ~_asks(index, criterion) & (criterion.worse != 0))


def outcome(value: ArrayLike, u: ArrayLike, criterion: Criterion, blocked: ArrayLike = False) -> NDArray[np.str_]:
    """One of OUTCOMES for each value: when in doubt, look again.

    Action begins, for every criterion, at its lowest urgency above 0: investigating is an action too.
    "act" is raised by the value itself (simple acceptance), whatever its uncertainty and whatever is
    `blocked`; "cleared" needs guarded acceptance and nothing blocked; all else, NaN included, is "not
    cleared".  So an uncertainty or a blocker may only take a clearance away, never give one.
    """
    raised = _asks(class_index(value, criterion), criterion)
    clear = accepted(value, u, criterion) & ~np.asarray(blocked, dtype=bool)
    return np.where(raised, ACT, np.where(clear, CLEARED, NOT_SETTLED))


def four_way(value: ArrayLike, u: ArrayLike, limit: ArrayLike, *, worse: int = 1) -> NDArray[np.str_]:
    """One of FOUR_WAY for each value against an upper (`worse` +1) or a lower limit (−1), guard band w = 2 u.

    The limit itself still passes.  Without an uncertainty (NaN or negative) only conditionally; "" without
    a value or a limit.
    """
    margin = worse * (np.asarray(value, dtype=float) - np.asarray(limit, dtype=float))
    guard = _guard(u)
    return _four_way(np.isnan(margin), margin > 0, margin + guard > 0, margin - guard > 0, guard)


def four_way_by(value: ArrayLike, u: ArrayLike, criterion: Criterion) -> NDArray[np.str_]:
    """`four_way` at the edge where a criterion begins to ask for action; "" by one that never does.

    "pass" is exactly what `accepted` accepts.
    """
    value, guard = np.asarray(value, dtype=float), _guard(u)
    worst = _asks(class_index(value + criterion.worse * guard, criterion), criterion)
    best = _asks(class_index(value - criterion.worse * guard, criterion), criterion)
    never = not any(kind.urgency for kind in criterion.classes)
    return _four_way(np.isnan(value) | never, _asks(class_index(value, criterion), criterion), worst, best, guard)


def _asks(index: NDArray[np.intp], criterion: Criterion) -> NDArray[np.bool_]:
    """Whether the class at each index asks for something; −1, no class, does not."""
    asks = np.array([kind.urgency > 0 for kind in criterion.classes])
    return np.asarray((index >= 0) & asks[index])


def _guard(u: ArrayLike) -> NDArray[np.float64]:
    u = np.asarray(u, dtype=float)
    return np.where(u >= 0, GUARD * u, np.nan)


def _four_way(
    unknown: NDArray[np.bool_],
    at: NDArray[np.bool_],
    worst: NDArray[np.bool_],
    best: NDArray[np.bool_],
    guard: NDArray[np.float64],
) -> NDArray[np.str_]:
    """From what the value, and its worst and best within the guard band, ask for."""
    unguarded = np.isnan(guard)
    graded = (unknown, best & ~unguarded, at, worst | unguarded)
    return np.select(np.broadcast_arrays(*graded), ("", FOUR_WAY[3], FOUR_WAY[2], FOUR_WAY[1]), FOUR_WAY[0])


def _probability_above(value: ArrayLike, u: ArrayLike, limit: ArrayLike, or_equal: bool) -> NDArray[np.float64]:
    from scipy.special import ndtr

    distance, u = np.broadcast_arrays(np.asarray(value, dtype=float) - np.asarray(limit, dtype=float), u)
    certain = (distance > 0) | ((distance == 0) & or_equal)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        uncertain = ndtr(distance / u)
    known = ~np.isnan(distance) & (u >= 0)
    return np.where(known, np.where(u > 0, uncertain, certain), np.nan)
