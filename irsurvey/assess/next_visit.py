"""The next-visit card: which single measurement would settle which open decisions."""

from __future__ import annotations

import tomllib
from collections.abc import Collection, Sequence
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from math import inf, isnan, sqrt
from typing import Final

from irsurvey.assess.conformity import GUARD, accepted, action_probability
from irsurvey.assess.judged import Judged
from irsurvey.assess.severity import AGAINST_REFERENCE, AUTOMATIC_REFERENCE
from irsurvey.model.conclusions import NextMeasurement
from irsurvey.texts import of_table, state

SURE: Final = 0.95
"""Probability from which an action counts as certain [house]; a clearance needs guarded acceptance."""


@dataclass(frozen=True, slots=True)
class Decision:
    """What has to be decided about one finding or component: every number that governs it, as judged."""

    id: str
    judged: tuple[Judged, ...]
    blockers: tuple[str, ...] = ()
    urgency: int | None = None


@dataclass(frozen=True, slots=True)
class Residual:
    """The standard uncertainty a measurement would leave in one input, in `unit`."""

    term: str
    u: float
    unit: str
    source: str
    mark: str


@dataclass(frozen=True, slots=True)
class Measurement:
    """One kind of measurement: how it is done, what it gives and what it removes."""

    how: str
    gives: str
    lifts: tuple[str, ...]
    measured_anew: bool  # the number will be another one afterwards
    leaves: tuple[Residual, ...]


@cache
def measurements() -> tuple[Measurement, ...]:
    """All measurements of `measurements.toml`, in its order."""
    table = tomllib.loads((files("irsurvey.assess") / "measurements.toml").read_text("utf-8"))
    return tuple(
        Measurement(
            how=of_table(row["how"]),
            gives=of_table(row["gives"]),
            lifts=tuple(row["lifts"]),
            measured_anew=row["measured_anew"],
            leaves=tuple(Residual(**residual) for residual in row.get("leaves", ())),
        )
        for row in table["measurement"]
    )


def next_visit(decisions: Sequence[Decision]) -> tuple[NextMeasurement, ...]:
    """Measurements that by themselves would settle open decisions, the one that settles most first.

    Each is to be taken wherever the decisions it settles need it: foil in every one of their frames.  Of
    two that settle as many, the one that settles the more urgent comes first.  A decision is settled where
    each number that governs it either asks for action with 95 % probability or is accepted with its guard
    band, nothing then blocking.  Foreseen is a smaller uncertainty about the same number, or the end of the
    last blocker; what will be measured, nobody knows.
    """
    undecided = [decision for decision in decisions if is_open(decision)]
    lines = []
    for measurement in measurements():
        settled = [decision for decision in undecided if _would_settle(measurement, decision)]
        if settled:
            ids = tuple(decision.id for decision in settled)
            rank = (-len(settled), sorted(-(decision.urgency or 0) for decision in settled))
            lines.append((rank, NextMeasurement(measurement.how, ids, _why(measurement, settled))))
    return tuple(line for _, line in sorted(lines, key=lambda ranked: ranked[0]))


def is_open(decision: Decision) -> bool:
    """Whether something that governs it is neither accepted nor sure to ask for action; also without any number."""
    return not decision.judged or not all(_settled(one, one.u, decision.blockers) for one in decision.judged)


def remaining_u(judged: Judged, measurement: Measurement) -> float:
    """Standard uncertainty of a number once the inputs a measurement gives are known that well.

    Inputs already better known stay as they are.  Where the sensitivities do not add up to u (correlated
    or unlisted inputs), the less optimistic of the difference and the proportion of variances.
    """
    residuals = {residual.term: residual.u for residual in measurement.leaves}
    largest = max((abs(one.contribution) for one in judged.sensitivities), default=0.0)
    if isnan(judged.u) or not 0 < largest < inf:
        return judged.u
    before = after = 0.0  # in squares of the largest, which however small it is does not vanish when squared
    for one in judged.sensitivities:
        u = min(one.u, residuals.get(one.name.partition(":")[0], one.u))
        before += (one.contribution / largest) ** 2
        after += (one.sensitivity * u / largest) ** 2
    difference = sqrt(max(judged.u**2 - (before - after) * largest**2, 0.0))
    return min(max(difference, judged.u * sqrt(after / before)), judged.u)  # squares of tiny numbers round up


def _would_settle(measurement: Measurement, decision: Decision) -> bool:
    left = [blocker for blocker in decision.blockers if blocker not in measurement.lifts]
    lifted = len(left) < len(decision.blockers)
    if lifted and not left and measurement.measured_anew:
        return True
    if not decision.judged:
        return False
    return all(_settled(one, remaining_u(one, measurement), left) for one in decision.judged)


def _settled(judged: Judged, u: float, blockers: Collection[str]) -> bool:
    suggested = AUTOMATIC_REFERENCE in blockers and judged.criterion.quantity in AGAINST_REFERENCE
    if not suggested and action_probability(judged.value, u, judged.criterion) >= SURE:
        return True
    return not blockers and bool(accepted(judged.value, u, judged.criterion))


def _why(measurement: Measurement, settled: Sequence[Decision]) -> str:
    """What it changes for the decisions it settles, in one sentence."""
    inputs = [one for decision in settled for judged in decision.judged for one in judged.sensitivities]
    lifted = [
        state("lifts", flag=state(flag)) for flag in measurement.lifts if any(flag in one.blockers for one in settled)
    ]
    known = [
        state("leaves", input=of_table(residual.term.replace("_", " ")), uncertainty=_left(residual))
        for residual in measurement.leaves
        if any(one.name.partition(":")[0] == residual.term and one.u > residual.u for one in inputs)
    ]
    key = "measurement_gives_known" if known else "measurement_gives"
    return state(key, gives=measurement.gives, what=", ".join([*lifted, *known]))


def _left(residual: Residual) -> str:
    """The expanded uncertainty that a measurement leaves, with its unit."""
    return f"±{GUARD * residual.u:g} {of_table(residual.unit)}".rstrip()
