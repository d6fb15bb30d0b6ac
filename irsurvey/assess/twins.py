"""Which twin of its group a part is compared with, and the laws by which rises are brought to one load."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from math import isfinite, nan
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.assess.criteria import Criterion, class_of, criteria
from irsurvey.assess.limits import LOAD_EXPONENTS
from irsurvey.assess.severity import (
    LEAST_EMISSIVITY,
    NO_SOLUTION,
    SATURATED,
    SIZE_LIMITED,
)

CONTACT: Final = "contact"
VOLTAGE: Final = "voltage-driven"
PV: Final = "pv"

LOAD_EXPONENT: Final = 1.8
"""The middle of the band of `LOAD_EXPONENTS`, for bringing twins to one load."""
LOAD_EXPONENT_U: Final = 0.2 / 3**0.5
"""Its standard uncertainty: the band taken as rectangular."""

LEAST_LOAD: Final = 0.40
"""Of rated load; below it nothing is cleared (NFPA 70B-2023, 7.4 [S])."""
LIKE_LOADS: Final = 1.03
"""Largest over smallest load of twins compared as they are [house]: clamp meters beside live conductors read to a few
percent, so that correcting below that adds noise."""
WARM: Final = 10.0
"""Rise over ambient air [K] from which what a component shares with its twins (load, air) is in question [house];
the edge above which the ambient column of ANSI/NETA asks for a repair."""
NO_TWIN: Final = "no twin"
ALL_HOT: Final = "whole group warm"
NORMALISED: Final = "normalised to the same load"
UNBALANCED: Final = "unbalanced group"
TWIN_SIZE_LIMITED: Final = "twin size-limited"
TWIN_LOAD_UNKNOWN: Final = "twin load unknown"
COLD: Final = 2.0
"""Below ambient air [K] from which a part is no twin [house]: a part gives off heat, so an input of it is wrong; the
air where it sits is known to a kelvin or two."""


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

    Temperatures [K].  With factor 1, the difference itself, whatever the air.  A twin that reads colder than its air
    has no rise to multiply.
    """
    t_spot, t_twin, t_ambient, factor = (np.asarray(a, dtype=float) for a in (t_spot, t_twin, t_ambient, factor))
    return np.asarray(t_spot - t_twin + (1 - factor) * np.maximum(t_twin - t_ambient, 0.0))


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
    more than a few percent, rises are first brought to one load, and what carries less than 0.4 of the
    largest load is no twin; nor is what reads colder than its air.  A member itself is always taken at face
    value, so that nothing that is wrong with it can choose it a milder comparison.  `chosen` are the survey's
    criteria: from where on twins differ.
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


def _plan(own: int, group: Mapping[int, Member], t_ambient: float, chosen: Sequence[Criterion]) -> TwinPlan:
    """What member `own` of a group is compared with."""
    loads = _relative_loads(group)
    stated = [load for load in loads.values() if isfinite(load)]
    by_load = group[own].method == CONTACT
    differ = by_load and bool(stated) and max(stated) > LIKE_LOADS * min(stated)
    seen = [
        k
        for k, one in group.items()
        if isfinite(one.t_spot) and one.emissivity >= LEAST_EMISSIVITY and (k == own or one.t_spot > t_ambient - COLD)
    ]
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
        TWIN_LOAD_UNKNOWN: by_load and isfinite(loads[own]) and not isfinite(loads[coolest]),
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
    """Whether no criterion for twins asks for a repair at this difference: a row is not less overloaded for one part in
    it that is a little warmer, and the rise over air that then governs asks for more."""
    similar = [criterion for criterion in chosen if criterion.quantity == "delta_similar_k"]
    found = [class_of(difference, criterion) for criterion in similar or [criteria()["neta-similar"]]]
    return all(kind is not None and kind.urgency <= 1 for kind in found)
