"""What to improve first: the inputs that make a number most uncertain, and what to do about each."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cache
from math import isfinite

import numpy as np

from irsurvey.assess.next_visit import measurements
from irsurvey.uncertainty import Budget

_CAUSES = {"selection": "noise", "slope_x": "noise", "slope_y": "noise", "shading_x": "shading", "shading_y": "shading"}
"""Inputs that go back to another one: who improves that improves them."""
_ADVICE = {
    "noise": "Use a quieter camera, or more pixels that average: a longer lens, or closer where that is allowed",
    "shading": "Keep what is compared near the middle, or subtract a frame of a uniform surface",
    "size_of_source": "Take a longer lens, or go closer where that is allowed",
    "camera_gain": "Have the camera calibrated",
    "convection": "Choose the correlation that fits the surface; outside, measure the wind",
    "mean_radiant": "Read the surfaces opposite and take their mean",
    "atmosphere": "Go closer where that is allowed",
    "view_angle": "Stand square to the surface",
    "outline": "Draw outlines along the steepest edge",
    "pressure": "Read a barometer",
    "wind": "Measure the wind at the surface",
    "ifov": "Take the camera's IFOV from a target of known size",
}
"""What to do about inputs for which no measurement of a next visit is listed."""


@dataclass(frozen=True, slots=True)
class Gain:
    """An input's share in the variance of a number, what u of that number is once it is known twice as well, and how.

    `input` is a name in the Scene, without its owner."""

    input: str
    share: float
    u_halved: float
    how: str


def gains(budget: Budget, index: int, count: int = 3) -> tuple[Gain, ...]:
    """The inputs that most is gained from, the best first, those of one cause together; none without uncertainty."""
    if not isfinite(budget.u[index]):
        return ()
    shares: dict[str, float] = {}
    for term in budget.terms(index):
        shares[_cause(term.name)] = shares.get(_cause(term.name), 0.0) + term.share
    found = (Gain(cause, share, _u_halved(budget, index, cause), _how(cause)) for cause, share in shares.items())
    return tuple(sorted(found, key=lambda gain: gain.u_halved)[:count])


def _u_halved(budget: Budget, index: int, cause: str) -> float:
    parts = np.array([[0.5 if _cause(name) == cause else 1.0] for name in budget.names])
    return float(replace(budget, half_swings=budget.half_swings * parts).u[index])


def _cause(name: str) -> str:
    base = name.partition(":")[0]
    return _CAUSES.get(base, base)


def _how(cause: str) -> str:
    return _ADVICE.get(cause) or _measurements().get(cause, "")


@cache
def _measurements() -> dict[str, str]:
    """How to measure an input better, by its name: the first measurement that gives it."""
    listed = [(left.term, measurement.how) for measurement in measurements() for left in measurement.leaves]
    return dict(reversed(listed))
