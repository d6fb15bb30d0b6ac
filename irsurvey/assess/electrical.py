"""Electrical components: which twin each is compared with, and how urgent what is then measured is."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from math import isfinite, nan
from typing import Final

from irsurvey.assess.criteria import Criterion
from irsurvey.assess.limits import Limit, allowed_now, lowest
from irsurvey.assess.pv import LEAST_IRRADIANCE, LEAST_NEIGHBOURS, STANDARD_IRRADIANCE
from irsurvey.assess.severity import (
    BELOW_AIR,
    BOUNDING,
    CONDITIONS,
    FEW_NEIGHBOURS,
    LOAD_ABOVE_RATING,
    LOAD_UNKNOWN,
    LOW_LOAD,
    LOW_SUN,
    NO_CRITERION,
    NOT_CLEARED,
    SATURATED,
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
from irsurvey.assess.twins import (
    ALL_HOT,
    CONTACT,
    LEAST_LOAD,
    NORMALISED,
    PV,
    TWIN_LOAD_UNKNOWN,
    TWIN_SIZE_LIMITED,
    UNBALANCED,
    WARM,
    Member,
    TwinPlan,
    load_ratio,
    rated_band,
)
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.model.quantities import Estimate
from irsurvey.model.report import Assessment
from irsurvey.numbers import number, unit, with_symbol
from irsurvey.texts import state

MOST_LOAD: Final = 1.05
"""Of rated load; above it the part is overloaded whatever its joints are like, and nothing is cleared [house]: a clamp
meter beside live conductors reads to a few percent, so that up to a twentieth too much is no more than a full load."""
USUAL_TIME_CONSTANT: Final = 1200.0
"""Of a part whose own is not stated [s] [house]: lugs and contacts take some tens of minutes."""
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
    cleared = accepted and not blocked and not warm and TWIN_LOAD_UNKNOWN not in plan.flags
    return Verdict(assessments, urgency, cleared, (*flags, NOT_CLEARED) if blocked else flags)


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
    lasting = STEADY_FOR * (member.time_constant or USUAL_TIME_CONSTANT)
    is_steady = member.steady is None or member.steady >= lasting
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
        told, words = with_symbol(number(least), unit(key)), _words(key, member, plan, limit)
        return unclassed(criterion, state("not_graded", least=told, words=words))
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
    is_calm = quantity in IN_CALM.values()
    if quantity in OVER_AIR:
        return state("above_air_in_calm" if is_calm else "above_air")
    if quantity == "relative_difference_percent":
        return state("of_rise", words=_beyond(plan))
    if quantity in OF_TWINS:
        return state("in_calm", words=_beyond(plan)) if is_calm else _beyond(plan)
    if quantity == "above_limit_k" and limit is not None:
        return state("against_limit", limit=f"{limit.t_max - ZERO_CELSIUS:.0f}", name=limit.name)
    if quantity == "above_allowed_k" and limit is not None:
        return state("against_allowed", rise=f"{limit.rise:.0f}", name=limit.name)
    if quantity == "delta_neighbours_k":
        return state("above_neighbours", count=member.neighbours, sun=_sun(member))
    return f"({quantity})"


def _sun(member: Member) -> str:
    """At which irradiance a difference between modules is told."""
    if member.irradiance is None:
        return state("sun_unknown")
    if member.irradiance < LEAST_IRRADIANCE:
        return state("sun_low", least=f"{LEAST_IRRADIANCE:.0f}")
    return state("sun_full" if member.irradiance >= STANDARD_IRRADIANCE else "sun_scaled")


def _beyond(plan: TwinPlan) -> str:
    if plan.twin is None:
        return state("above_no_twin")
    if plan.is_coolest:
        return state("is_twin")
    if NORMALISED in plan.flags:
        return state("above_twin_at_load", twin=plan.name, times=f"{plan.load_ratio:.2f}")
    return state("above_twin", twin=plan.name)


def _state(member: Member, plan: TwinPlan, only_warm: bool) -> str:
    """What is said of a part because of its group."""
    if member.method == PV:
        return ""
    by_load = member.method == CONTACT
    if ALL_HOT in plan.flags:
        if not by_load:
            return state("group_warm_shared")
        load = load_ratio(member)
        return state("group_overloaded", load=f"{load:.0%}") if load > MOST_LOAD else state("group_warm")
    if plan.twin is None:
        return _alone(member, plan, by_load)
    told = []
    if TWIN_LOAD_UNKNOWN in plan.flags:
        told.append(state("twin_load_unknown", twin=plan.name))
    if UNBALANCED in plan.flags:
        told.append(state("loads_differ"))
    if only_warm:
        told.append(state("shared_load" if by_load else "shared_sun"))
    return " ".join(told)


def _alone(member: Member, plan: TwinPlan, by_load: bool) -> str:
    if member.group is None:
        return state("no_twin_by_load" if by_load else "no_twin")
    if plan.others == 0:
        return state("only_one_by_load" if by_load else "only_one", group=member.group)
    return state("no_other_by_load" if by_load else "no_other", group=member.group)


def _at_rated(member: Member, values: Mapping[str, Estimate | None]) -> str:
    delta = values.get("delta_ambient_k")
    if delta is None or not 0 < load_ratio(member) < 1:
        return ""
    low, high = rated_band(delta.value, load_ratio(member))
    return state("at_rated", low=f"{low:.0f}", high=f"{high:.0f}")
