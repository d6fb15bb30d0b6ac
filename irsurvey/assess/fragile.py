"""Fragile classes: which plausible change of a single input would put a number into another class."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from math import isfinite
from typing import Final

from irsurvey.assess.conformity import GUARD
from irsurvey.assess.criteria import Criterion, class_of
from irsurvey.assess.judged import Sensitivity

FRAGILE: Final = "fragile"
"""The flag of a number with at least one flip."""


@dataclass(frozen=True, slots=True)
class Flip:
    """A change of one input that carries the number to the edge of the neighbouring class."""

    name: str
    change: float  # added to the input, in its own unit; its sign is the direction
    to_class: str
    in_u: float  # |change| over the input's standard uncertainty: the smaller, the more fragile


def fragile(
    value: float, criterion: Criterion, sensitivities: Iterable[Sensitivity], *, reach: float = GUARD
) -> tuple[Flip, ...]:
    """Changes of one input by at most `reach` u, within its domain, that change the class; the likeliest first.

    `value` and the sensitivities are those of the number the criterion judges.  First order: the number
    moves by sensitivity × change, all other inputs held.  An input may appear twice, once for each
    direction.  Empty where nothing flips, or without a value.
    """
    now = class_of(value, criterion)
    if now is None:
        return ()
    place = criterion.classes.index(now)
    # written so that even a gap of 0 has the sign of its direction
    gaps = [(criterion.classes[place - 1].name, -(value - now.low))] if place > 0 else []
    gaps += [(kind.name, kind.low - value) for kind in criterion.classes[place + 1 : place + 2]]
    flips = (flip for one in sensitivities for flip in _flips(gaps, one, reach))
    return tuple(sorted(flips, key=lambda flip: flip.in_u))


def _flips(gaps: Iterable[tuple[str, float]], one: Sensitivity, reach: float) -> Iterator[Flip]:
    """Flips by one input; `gaps` are the neighbouring classes and how far the number has to go to them."""
    if not (one.u > 0 and isfinite(one.sensitivity) and one.sensitivity != 0):
        return
    for to_class, gap in gaps:
        change = gap / one.sensitivity
        if one.least <= change <= one.most and abs(change) <= reach * one.u:
            yield Flip(one.name, change, to_class, abs(change) / one.u)
