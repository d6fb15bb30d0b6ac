"""Electrical components: which twin each is compared with, and how urgent what is then measured is."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from math import isfinite, nan
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.assess.criteria import Criterion, class_of, criteria
from irsurvey.assess.severity import (
    BELOW_AIR,
    BOUNDING,
    LEAST_EMISSIVITY,
    LOAD_ABOVE_RATING,
    LOAD_UNKNOWN,
    LOW_LOAD,
    NO_CRITERION,
    NO_SOLUTION,
    NOT_CLEARED,
    SATURATED,
    SIZE_LIMITED,
    Verdict,
    assess,
    blockers,
    clears,
    governed,
    remedy,
)
from irsurvey.model.quantities import Estimate
from irsurvey.model.report import Assessment

LOAD_EXPONENTS: Final = (1.6, 2.0)
"""A rise grows as load^n: 2 for a constant resistance with linear loss, 1.6 for free convection alone [S]."""
LOAD_EXPONENT: Final = 1.8
"""The middle of that band, for bringing twins to one load."""
LOAD_EXPONENT_U: Final = 0.2 / 3**0.5
"""Its standard uncertainty: the band taken as rectangular."""

LEAST_LOAD: Final = 0.40
"""Of rated load; below it nothing is cleared (NFPA 70B-2023, 7.4 [S])."""
MOST_LOAD: Final = 1.05
"""Of rated load; above it the part is overloaded whatever its joints are like, and nothing is cleared [house]: a clamp
meter beside live conductors reads to a few percent, so that up to a twentieth too much is no more than a full load."""
LIKE_LOADS: Final = 1.10
"""Largest over smallest load of twins compared as they are [house]: a load read beside a thermogram, varying over
the thermal time constant of the part, is hardly known better than to a tenth; correcting below that adds noise."""
WARM: Final = 10.0
"""Rise over ambient air [K] from which what a component shares with its twins (load, air) is in question [house];
the edge above which the ambient column of ANSI/NETA asks for a repair."""

NO_TWIN: Final = "no twin"
ALL_HOT: Final = "whole group warm"
NORMALISED: Final = "normalised to the same load"
TWIN_SIZE_LIMITED: Final = "twin size-limited"


@dataclass(frozen=True, slots=True)
class Member:
    """One component as its group sees it, from the nominal run; temperatures [K], currents [A]."""

    name: str
    t_spot: float  # highest mean over a full spot; NaN where not measurable; where saturated, the lower bound
    emissivity: float
    group: str | None = None
    load: float | None = None
    rated: float | None = None
    flags: tuple[str, ...] = ()  # upstream ones: "saturated", "size-limited", "no physical solution", …


@dataclass(frozen=True, slots=True)
class TwinPlan:
    """What one component is compared with; fixed by the nominal run, so that differences move jointly."""

    twin: int | None = None  # index among the members, its own for the coolest of a group; None: no twin
    name: str | None = None  # the twin's
    is_coolest: bool = False  # it is that twin itself
    load_ratio: float = 1.0  # own over twin's load; 1 where they are compared as they are
    flags: tuple[str, ...] = ()  # "no twin", "whole group warm", "normalised to the same load", "twin size-limited"


def load_factor(load_ratio: ArrayLike, exponent: ArrayLike = LOAD_EXPONENT) -> NDArray[np.float64]:
    """Factor on a rise when the load changes by `load_ratio`; NaN unless the ratio is positive."""
    load_ratio = np.asarray(load_ratio, dtype=float)
    return np.asarray(np.power(np.where(load_ratio > 0, load_ratio, np.nan), exponent))


def similar_rise(
    t_spot: ArrayLike, t_twin: ArrayLike, t_ambient: ArrayLike, factor: ArrayLike = 1.0
) -> NDArray[np.float64]:
    """How much warmer [K] than its twin, the twin's rise over ambient air first multiplied by `factor`.

    Temperatures [K].  With factor 1, the difference itself, whatever the air.
    """
    t_spot, t_twin, t_ambient, factor = (np.asarray(a, dtype=float) for a in (t_spot, t_twin, t_ambient, factor))
    return np.asarray(t_spot - t_twin + (1 - factor) * (t_twin - t_ambient))


def rated_band(delta: ArrayLike, load_ratio: ArrayLike) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Lowest and highest rise [K] at rated load, ΔT·(load/rated)^−n for n from 1.6 to 2.0.

    `load_ratio` is load over rated; NaN unless it is positive.
    """
    low, high = (np.asarray(delta, dtype=float) / load_factor(load_ratio, n) for n in LOAD_EXPONENTS)
    return np.minimum(low, high), np.maximum(low, high)


def twins(members: Sequence[Member], t_ambient: float, chosen: Sequence[Criterion] = ()) -> tuple[TwinPlan, ...]:
    """For each member, in order, the coolest comparable twin of its group.

    Comparable is what is measured: a spot temperature, not saturated, emissivity at least 0.6, and, while
    two such are left, neither size-limited nor partly without solution.  Where loads in a group differ by
    more than a tenth, rises are first brought to one load, and what carries less than 0.4 of the largest
    load is no twin.  A member itself is always taken at face value, so that nothing that is wrong with it
    can choose it a milder comparison.  `chosen` are the survey's criteria: from where on twins differ.
    """
    plans = [TwinPlan(flags=(NO_TWIN,)) for _ in members]
    for group in dict.fromkeys(member.group for member in members if member.group is not None):
        places = {k: member for k, member in enumerate(members) if member.group == group}
        for k, member in places.items():
            at_face_value = replace(member, flags=(), emissivity=1.0)
            plans[k] = _plan(k, {**places, k: at_face_value}, t_ambient, chosen)
    return tuple(plans)


def load_ratio(member: Member) -> float:
    """Load over rated load; NaN where either is not known."""
    return member.load / member.rated if member.load is not None and member.rated else nan


def assess_component(
    member: Member, plan: TwinPlan, values: Mapping[str, Estimate | None], chosen: Sequence[Criterion]
) -> Verdict:
    """Assessments of one component, the urgency that governs, whether it is cleared, and its flags.

    `values` are its measured numbers by their key in report.json (`delta_similar_k`, `delta_ambient_k`,
    …).  With a twin the comparison with it governs; the rise over ambient air governs alone without one or
    where the whole group is warm.  Cleared only by guarded acceptance of everything that governs, with no
    blocker, and, if by comparison, only where the rise over ambient air is no question of its own.
    """
    doubts = (*_load_blockers(member), *_air_blockers(values.get("delta_ambient_k")))
    blocked = tuple(dict.fromkeys([*blockers(member.flags, member.emissivity), *doubts]))
    flags = tuple(dict.fromkeys([*member.flags, *blocked, *plan.flags]))
    used = [criterion for criterion in chosen if criterion.applies_to == "component"]
    if not used:
        return Verdict((), None, False, (*flags, NO_CRITERION, NOT_CLEARED))
    by_twin = (
        plan.twin is not None
        and ALL_HOT not in plan.flags
        and values.get("delta_similar_k") is not None
        and any(criterion.quantity == "delta_similar_k" for criterion in used)
    )
    aside = "delta_ambient_k" if by_twin else "delta_similar_k"
    governing = [criterion for criterion in used if criterion.quantity != aside]
    assessed = [_assess(criterion, values.get(criterion.quantity), plan, blocked) for criterion in used]
    warm = by_twin and not _surely_below(values.get("delta_ambient_k"), WARM)
    accepted = bool(governing) and all(clears(criterion, values.get(criterion.quantity)) for criterion in governing)
    remarks = (
        _state(plan, warm and accepted),
        _at_rated(member, values) if LOW_LOAD in blocked else "",
        remedy(blocked),
    )
    names = {criterion.name for criterion in governing or used}
    assessments, urgency = governed(assessed, names, " ".join(filter(None, remarks)))
    cleared = accepted and not blocked and not warm
    return Verdict(assessments, urgency, cleared, (*flags, NOT_CLEARED) if blocked else flags)


def _plan(own: int, group: Mapping[int, Member], t_ambient: float, chosen: Sequence[Criterion]) -> TwinPlan:
    """What member `own` of a group is compared with."""
    loads = _relative_loads(group)
    stated = [load for load in loads.values() if load > 0]
    differ = bool(stated) and max(stated) > LIKE_LOADS * min(stated)
    seen = [k for k, one in group.items() if isfinite(one.t_spot) and one.emissivity >= LEAST_EMISSIVITY]
    references = _references(group, seen, loads, differ)
    if not set(references) - {own}:  # nothing but itself to compare with
        return TwinPlan(flags=(NO_TWIN,))

    def rise(k: int) -> float:
        return group[k].t_spot - t_ambient

    def ratio(k: int, twin: int) -> float:
        return loads[k] / loads[twin] if differ and loads[k] > 0 and loads[twin] > 0 else 1.0

    coolest = min(references, key=lambda k: rise(k) / float(load_factor(ratio(k, references[0]))))

    def alike(k: int) -> bool:
        factor = load_factor(ratio(k, coolest))
        return _alike(float(similar_rise(group[k].t_spot, group[coolest].t_spot, t_ambient, factor)), chosen)

    flags = {
        ALL_HOT: all(rise(k) > WARM for k in references) and all(alike(k) for k in seen),
        NORMALISED: ratio(own, coolest) != 1.0,
        TWIN_SIZE_LIMITED: own != coolest and SIZE_LIMITED in group[coolest].flags,
    }
    told = tuple(flag for flag, applies in flags.items() if applies)
    return TwinPlan(coolest, group[coolest].name, own == coolest, ratio(own, coolest), told)


def _references(
    group: Mapping[int, Member], seen: Sequence[int], loads: Mapping[int, float], differ: bool
) -> Sequence[int]:
    """Those of a group that others may be compared with."""
    measured = [k for k in seen if SATURATED not in group[k].flags]
    whole = [k for k in measured if not {SIZE_LIMITED, NO_SOLUTION} & set(group[k].flags)]
    pool = whole if len(whole) > 1 else measured  # one too small reads low, which can only raise the others
    if not differ:
        return pool
    most = max((loads[k] for k in pool if loads[k] > 0), default=nan)
    # A slightly loaded part hardly shows its joint, and its rise would be multiplied many times over.
    return [k for k in pool if loads[k] >= LEAST_LOAD * most] or pool


def _relative_loads(group: Mapping[int, Member]) -> dict[int, float]:
    """Loads that compare within a group: over the rating where all state one, else the currents; NaN unknown."""
    if all(member.rated for member in group.values()):
        return {k: load_ratio(member) for k, member in group.items()}
    return {k: nan if member.load is None else member.load for k, member in group.items()}


def _alike(difference: float, chosen: Sequence[Criterion]) -> bool:
    """Whether no criterion for twins asks for anything at this difference."""
    similar = [criterion for criterion in chosen if criterion.quantity == "delta_similar_k"]
    found = [class_of(difference, criterion) for criterion in similar or [criteria()["neta-similar"]]]
    return all(kind is not None and kind.urgency == 0 for kind in found)


def _load_blockers(member: Member) -> tuple[str, ...]:
    ratio = load_ratio(member)
    if not isfinite(ratio):
        return (LOAD_UNKNOWN,)
    if ratio > MOST_LOAD:
        return (LOAD_ABOVE_RATING,)
    return () if ratio >= LEAST_LOAD else (LOW_LOAD,)


def _air_blockers(above_air: Estimate | None) -> tuple[str, ...]:
    """A part that carries current is no colder than its air: where it reads so, an input is wrong and it reads low."""
    surely = above_air is not None and above_air.u is not None and above_air.value + 2 * above_air.u < 0
    return (BELOW_AIR,) if surely else ()


def _assess(criterion: Criterion, estimate: Estimate | None, plan: TwinPlan, blocked: Sequence[str]) -> Assessment:
    """One assessment; a part and a twin that are both too small give a difference that is no bound."""
    both_small = criterion.quantity == "delta_similar_k" and TWIN_SIZE_LIMITED in plan.flags
    bounding = (SATURATED,) if both_small else BOUNDING
    return assess(criterion, estimate, _words(criterion.quantity, plan), blocked, bounding=bounding)


def _surely_below(estimate: Estimate | None, limit: float) -> bool:
    return estimate is not None and estimate.u is not None and estimate.value + 2 * estimate.u <= limit


def _words(quantity: str, plan: TwinPlan) -> str:
    if quantity == "delta_ambient_k":
        return "above ambient air"
    if quantity != "delta_similar_k":
        return f"({quantity})"
    if plan.twin is None:
        return "above a twin (none can be compared)"
    if plan.is_coolest:
        return "by definition, being the coolest of its group"
    if NORMALISED in plan.flags:
        return f"above “{plan.name}”, its rise first brought to {plan.load_ratio:.2f} times its load"
    return f"above “{plan.name}”, the coolest comparable one of its group"


def _state(plan: TwinPlan, only_warm: bool) -> str:
    if ALL_HOT in plan.flags:
        return "The whole group is alike and warm: check load, harmonics and ambient air before the joints."
    if plan.twin is None:
        return "With no twin to compare with this may be its load or the ambient air: check these as well."
    if only_warm:
        return "What it shares with its twins, load and ambient air, is not cleared by comparing them."
    return ""


def _at_rated(member: Member, values: Mapping[str, Estimate | None]) -> str:
    delta = values.get("delta_ambient_k")
    if delta is None or not load_ratio(member) > 0:
        return ""
    low, high = rated_band(delta.value, load_ratio(member))
    return f"At rated load it would be {low:.0f} to {high:.0f} K above ambient air."
