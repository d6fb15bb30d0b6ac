"""Electrical components: which twin each is compared with, and how urgent what is then measured is."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from math import isfinite, nan
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.assess.criteria import Criterion, class_of, criteria
from irsurvey.assess.limits import LOAD_EXPONENTS, Limit, allowed_now, lowest
from irsurvey.assess.pv import LEAST_IRRADIANCE, LEAST_NEIGHBOURS
from irsurvey.assess.severity import (
    BELOW_AIR,
    BOUNDING,
    CONDITIONS,
    FEW_NEIGHBOURS,
    LEAST_EMISSIVITY,
    LOAD_ABOVE_RATING,
    LOAD_UNKNOWN,
    LOW_LOAD,
    LOW_SUN,
    NO_CRITERION,
    NO_SOLUTION,
    NOT_CLEARED,
    SATURATED,
    SIZE_LIMITED,
    SUN_UNKNOWN,
    UNSTEADY,
    WINDY,
    Verdict,
    assess,
    blockers,
    clears,
    governed,
    remedy,
    unclassed,
)
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.model.quantities import Estimate
from irsurvey.model.report import Assessment
from irsurvey.numbers import number, unit, with_symbol

CONTACT: Final = "contact"
VOLTAGE: Final = "voltage-driven"
PV: Final = "pv"

LOAD_EXPONENT: Final = 1.8
"""The middle of the band of `LOAD_EXPONENTS`, for bringing twins to one load."""
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
STEADY_FOR: Final = 3.0
"""Time constants that a load must have been steady for: 5 % of a change are then still to come [S]."""
STRONG_WIND: Final = 5.0
"""Wind [m s⁻¹] above which nothing is cleared outdoors [CP]."""
MOST_WIND: Final = 10.0
"""Wind [m s⁻¹] above which no correction holds and conditions are not valid [CP]."""

OF_TWINS: Final = ("delta_similar_k", "delta_similar_in_calm_k", "relative_difference_percent")
"""Numbers that compare a part with its twin: with a valid one they decide between joints."""
OVER_AIR: Final = ("delta_ambient_k", "delta_ambient_in_calm_k")
"""Numbers that hold load and ambient air against a part as well."""
IN_CALM: Final[Mapping[str, str]] = {
    "delta_similar_k": "delta_similar_in_calm_k",
    "delta_ambient_k": "delta_ambient_in_calm_k",
}
"""A rise → the same brought to calm.  A criterion for either is applied to both, and the worse counts."""

NO_TWIN: Final = "no twin"
ALL_HOT: Final = "whole group warm"
NORMALISED: Final = "normalised to the same load"
UNBALANCED: Final = "unbalanced group"
TWIN_SIZE_LIMITED: Final = "twin size-limited"


@dataclass(frozen=True, slots=True)
class Member:
    """One component as its group sees it, from the nominal run; temperatures [K], currents [A], times [s].

    What was not recorded is None: `wind` [m s⁻¹] indoors, `irradiance` [W m⁻²] of anything but PV modules.
    """

    name: str
    t_spot: float  # highest mean over a full spot; NaN where not measurable; where saturated, the lower bound
    emissivity: float
    group: str | None = None
    load: float | None = None
    rated: float | None = None
    flags: tuple[str, ...] = ()  # upstream ones: "saturated", "size-limited", "no physical solution", …
    method: str = CONTACT  # of the survey
    limits: tuple[str, ...] = ()  # names of absolute limits
    steady: float | None = None  # how long its load has been steady
    time_constant: float | None = None
    wind: float | None = None
    irradiance: float | None = None
    neighbours: int = 0  # PV: how many modules it is held against


@dataclass(frozen=True, slots=True)
class TwinPlan:
    """What one component is compared with; fixed by the nominal run, so that differences move jointly."""

    twin: int | None = None  # index among the members, its own for the coolest of a group; None: no twin
    name: str | None = None  # the twin's
    is_coolest: bool = False  # it is that twin itself
    load_ratio: float = 1.0  # own over twin's load; 1 where they are compared as they are
    flags: tuple[str, ...] = ()  # NO_TWIN, ALL_HOT, UNBALANCED, NORMALISED, TWIN_SIZE_LIMITED
    others: int = 0  # in its group


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
    Only current-carrying parts (method "contact") are brought to one load: a voltage knows no load.
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

    `values` are its measured numbers by their key in report.json (`delta_similar_k`, `above_limit_k`, …).  All criteria
    are shown and the highest governs, but with a twin only the comparison with it decides between joints; the rise
    over ambient air governs without one or where the whole group is warm.  Where rises were brought to calm each
    criterion is applied to both, and the worse counts.
    Cleared only by guarded acceptance of everything that governs, with no blocker, never by an absolute limit alone,
    and, if by comparison, only where the rise over ambient air is no question of its own.
    """
    limit = lowest(member.limits) if member.limits else None
    doubts = (*_doubts(member), *_air_blockers(values.get("delta_ambient_k")))
    blocked = tuple(dict.fromkeys([*blockers(member.flags, member.emissivity), *doubts]))
    flags = tuple(dict.fromkeys([*member.flags, *blocked, *plan.flags]))
    used = [criterion for criterion in chosen if criterion.applies_to == "component" and _applies(criterion, limit)]
    if not used:
        return Verdict((), None, False, (*flags, NO_CRITERION, NOT_CLEARED))
    by_twin = (
        plan.twin is not None and ALL_HOT not in plan.flags and any(_compares(criterion, values) for criterion in used)
    )
    aside = OVER_AIR if by_twin else OF_TWINS
    governing = [criterion for criterion in used if criterion.quantity not in aside]
    assessed = [_worst(criterion, values, member, plan, limit, blocked) for criterion in used]
    warm = by_twin and not _surely_below(values, WARM)
    deciding = [criterion for criterion in governing if _is_graded(criterion, values)]
    accepted = any(criterion.quantity != "above_limit_k" for criterion in deciding) and all(
        _accepted(criterion, values, member, limit) for criterion in deciding
    )
    above = any(one.quantity == "above_allowed_k" and one.urgency for one in assessed)
    remarks = (
        _state(member, plan, warm and accepted),
        _at_rated(member, values) if above or LOW_LOAD in blocked else "",
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
    by_load = group[own].method == CONTACT
    differ = by_load and bool(stated) and max(stated) > LIKE_LOADS * min(stated)
    seen = [k for k, one in group.items() if isfinite(one.t_spot) and one.emissivity >= LEAST_EMISSIVITY]
    references = _references(group, seen, loads, differ)
    if not set(references) - {own}:  # nothing but itself to compare with
        return TwinPlan(flags=(NO_TWIN,), others=len(group) - 1)

    def rise(k: int) -> float:
        return group[k].t_spot - t_ambient

    def ratio(k: int, twin: int) -> float:
        return loads[k] / loads[twin] if differ and loads[k] > 0 and loads[twin] > 0 else 1.0

    coolest = min(references, key=lambda k: rise(k) / float(load_factor(ratio(k, references[0]))))

    def alike(k: int) -> bool:
        factor = load_factor(ratio(k, coolest))
        return _alike(float(similar_rise(group[k].t_spot, group[coolest].t_spot, t_ambient, factor)), chosen)

    may_be_told = group[own].method != PV  # the sun warms all modules
    flags = {
        ALL_HOT: may_be_told and all(rise(k) > WARM for k in references) and all(alike(k) for k in seen),
        UNBALANCED: differ,
        NORMALISED: ratio(own, coolest) != 1.0,
        TWIN_SIZE_LIMITED: own != coolest and SIZE_LIMITED in group[coolest].flags,
    }
    told = tuple(flag for flag, applies in flags.items() if applies)
    return TwinPlan(coolest, group[coolest].name, own == coolest, ratio(own, coolest), told, len(group) - 1)


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


def _doubts(member: Member) -> tuple[str, ...]:
    """What keeps a part from being cleared because of its load, its sun or the wind; it may still be raised."""
    wind, irradiance = (nan if value is None else value for value in (member.wind, member.irradiance))
    applies = {
        FEW_NEIGHBOURS: member.method == PV and member.neighbours < LEAST_NEIGHBOURS,
        SUN_UNKNOWN: member.method == PV and not isfinite(irradiance),
        LOW_SUN: member.method == PV and irradiance < LEAST_IRRADIANCE,
        WINDY: wind > STRONG_WIND,
        CONDITIONS: wind > MOST_WIND,
    }
    by_load = _load_blockers(member) if member.method == CONTACT else ()
    return (*by_load, *(flag for flag, is_so in applies.items() if is_so))


def _load_blockers(member: Member) -> tuple[str, ...]:
    ratio = load_ratio(member)
    is_steady = member.steady is None or not member.time_constant or member.steady >= STEADY_FOR * member.time_constant
    unsteady = () if is_steady else (UNSTEADY,)
    if not isfinite(ratio):
        return (LOAD_UNKNOWN, *unsteady)
    if ratio > MOST_LOAD:
        return (LOAD_ABOVE_RATING, *unsteady)
    return unsteady if ratio >= LEAST_LOAD else (LOW_LOAD, *unsteady)


def _air_blockers(above_air: Estimate | None) -> tuple[str, ...]:
    """A part that carries current is no colder than its air: where it reads so, an input is wrong and it reads low."""
    surely = above_air is not None and above_air.u is not None and above_air.value + 2 * above_air.u < 0
    return (BELOW_AIR,) if surely else ()


def _applies(criterion: Criterion, limit: Limit | None) -> bool:
    """Whether there is anything of this part it could judge: one for absolute limits needs a limit."""
    if criterion.quantity == "above_limit_k":
        return limit is not None
    return criterion.quantity != "above_allowed_k" or (limit is not None and limit.rise is not None)


def _keys(quantity: str, values: Mapping[str, Estimate | None]) -> tuple[str, ...]:
    """Keys of the numbers there are that a criterion for this one judges: also in calm; without any, its own."""
    pair = next((pair for pair in IN_CALM.items() if quantity in pair), (quantity,))
    return tuple(key for key in pair if values.get(key) is not None) or (quantity,)


def _is_graded(criterion: Criterion, values: Mapping[str, Estimate | None]) -> bool:
    """Whether the part reaches what the criterion asks for before it grades anything."""
    if criterion.classed_from is None:
        return True
    key, least = criterion.classed_from
    found = [values.get(one) for one in _keys(key, values)]
    return any(estimate is not None and estimate.value >= least for estimate in found)


def _compares(criterion: Criterion, values: Mapping[str, Estimate | None]) -> bool:
    """Whether a criterion grades this part by its twin; as it reads: no correction may put the rise over air aside."""
    as_read = {key: estimate for key, estimate in values.items() if key not in IN_CALM.values()}
    measured = any(values.get(key) is not None for key in _keys(criterion.quantity, as_read))
    return criterion.quantity in OF_TWINS and measured and _is_graded(criterion, as_read)


def _worst(
    criterion: Criterion,
    values: Mapping[str, Estimate | None],
    member: Member,
    plan: TwinPlan,
    limit: Limit | None,
    blocked: Sequence[str],
) -> Assessment:
    """One criterion applied to its number as it reads and, where there is one, in calm: the more urgent of the two."""
    if not _is_graded(criterion, values):
        key, least = criterion.classed_from or ("", nan)
        told = f"{with_symbol(number(least), unit(key))} {_words(key, member, plan, limit)}"
        return unclassed(criterion, f"Not classed by this scheme, which grades from {told} on.")
    # a part and a twin that are both too small give a difference that is no bound
    both_small = criterion.quantity in OF_TWINS and TWIN_SIZE_LIMITED in plan.flags
    found = [
        assess(
            criterion,
            values.get(key),
            _words(key, member, plan, limit),
            blocked,
            bounding=(SATURATED,) if both_small else BOUNDING,
            quantity=key,
        )
        for key in _keys(criterion.quantity, values)
    ]
    worst = max(found, key=lambda one: -1 if one.urgency is None else one.urgency)
    if limit is None or criterion.quantity not in ("above_limit_k", "above_allowed_k"):
        return worst
    return replace(worst, source=f"{limit.source}, {limit.edition} [{limit.mark}]; {worst.source}")


def _accepted(criterion: Criterion, values: Mapping[str, Estimate | None], member: Member, limit: Limit | None) -> bool:
    """Whether every number it judges would clear, limits held against the part in calm and at their strictest."""
    margin = 0.0
    if limit is not None and criterion.quantity in ("above_limit_k", "above_allowed_k"):
        calm, as_read = values.get("delta_ambient_in_calm_k"), values.get("delta_ambient_k")
        if calm is not None and as_read is not None:
            margin = max(calm.value - as_read.value, 0.0)
        if criterion.quantity == "above_limit_k":
            margin += limit.t_max - limit.t_sure
        else:  # between the allowances by the highest and the lowest exponent; far from the limit itself
            low, high = allowed_now(limit, 0.0, load_ratio(member))
            margin += float(high - low)

    def moved(estimate: Estimate | None) -> Estimate | None:
        return None if estimate is None else Estimate(estimate.value + criterion.worse * margin, estimate.u)

    return all(clears(criterion, moved(values.get(key))) for key in _keys(criterion.quantity, values))


def _surely_below(values: Mapping[str, Estimate | None], rise: float) -> bool:
    """Whether the rise over ambient air, also in calm, is not above `rise` even by U."""
    found = [values.get(key) for key in _keys("delta_ambient_k", values)]
    return all(one is not None and one.u is not None and one.value + 2 * one.u <= rise for one in found)


def _words(quantity: str, member: Member, plan: TwinPlan, limit: Limit | None) -> str:
    calm = " when brought to 1 m/s of wind" if quantity in IN_CALM.values() else ""
    if quantity in OVER_AIR:
        return f"above ambient air{calm}"
    if quantity in OF_TWINS:
        of_rise = "of its rise over ambient air, " if quantity == "relative_difference_percent" else ""
        return f"{of_rise}{_beyond(plan)}{calm}"
    if quantity == "above_limit_k" and limit is not None:
        return f"against its limit of {limit.t_max - ZERO_CELSIUS:.0f} °C ({limit.name})"
    if quantity == "above_allowed_k" and limit is not None:
        at_rated = f"{limit.rise:.0f} K at rated load, {limit.name}"
        return f"against what its limit allows at this load and ambient air ({at_rated})"
    if quantity == "delta_neighbours_k":
        return f"above the median of its {member.neighbours} neighbours, at 1000 W/m²"
    return f"({quantity})"


def _beyond(plan: TwinPlan) -> str:
    if plan.twin is None:
        return "above a twin (none can be compared)"
    if plan.is_coolest:
        return "by definition, being the coolest of its group"
    if NORMALISED in plan.flags:
        return f"above “{plan.name}”, its rise first brought to {plan.load_ratio:.2f} times its load"
    return f"above “{plan.name}”, the coolest comparable one of its group"


def _state(member: Member, plan: TwinPlan, only_warm: bool) -> str:
    """What is said of a part because of its group."""
    if member.method == PV:
        return ""
    by_load = member.method == CONTACT
    if ALL_HOT in plan.flags:
        if not by_load:
            return "The whole group is alike and warm: sun, soiling, or ageing that all of it shares."
        overload = f" at {load_ratio(member):.0%} of its rating" if load_ratio(member) > MOST_LOAD else ""
        first = f"The whole group is alike and warm{overload}, which is not the matter of one joint"
        return f"{first}: check load, harmonics and ambient air before the joints."
    if plan.twin is None:
        rest = (
            "this may be its load or the ambient air: check these as well." if by_load else "nothing can be told of it."
        )
        return f"{_alone(member, plan)} {rest}"
    told = []
    if UNBALANCED in plan.flags:
        told.append("The loads of its group differ, rises were brought to one load before they were compared.")
    if only_warm:
        shared = "load and ambient air" if by_load else "sun, soiling and ageing"
        told.append(f"What it shares with its twins, {shared}, is not cleared by comparing them.")
    return " ".join(told)


def _alone(member: Member, plan: TwinPlan) -> str:
    if member.group is None:
        return "With no twin to compare with"
    if plan.others == 0:
        return f"As the only one of its group “{member.group}”, with no twin to compare with,"
    return f"As no other of its group “{member.group}” can be compared with it,"


def _at_rated(member: Member, values: Mapping[str, Estimate | None]) -> str:
    delta = values.get("delta_ambient_k")
    if delta is None or not 0 < load_ratio(member) < 1:
        return ""
    low, high = rated_band(delta.value, load_ratio(member))
    return f"At rated load it would be {low:.0f} to {high:.0f} K above ambient air."
