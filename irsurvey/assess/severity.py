"""One number, one criterion, one assessment: class, urgency, wording, and what keeps it from clearing anything."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import replace
from math import isnan
from typing import Final, NamedTuple

from irsurvey.assess.conformity import (
    ACT,
    CLEARED,
    FOUR_WAY,
    NOT_SETTLED,
    accepted,
    class_probabilities,
    four_way_by,
)
from irsurvey.assess.criteria import Criterion, class_of
from irsurvey.model.quantities import Estimate
from irsurvey.model.report import Assessment
from irsurvey.numbers import shown, unit, with_symbol
from irsurvey.texts import state

SATURATED: Final = "saturated"
SIZE_LIMITED: Final = "size-limited"
REFLECTIVE: Final = "too reflective for a claim"
MIRRORS: Final = "may be a reflection"
NO_SOLUTION: Final = "no physical solution"
LOW_LOAD: Final = "low load"
LOAD_UNKNOWN: Final = "load unknown"
LOAD_ABOVE_RATING: Final = "load above rating"
UNSTEADY: Final = "load not steady"
WINDY: Final = "windy"
LOW_SUN: Final = "low irradiance"
SUN_UNKNOWN: Final = "irradiance unknown"
FEW_NEIGHBOURS: Final = "few neighbours"
BELOW_AIR: Final = "colder than its air"
CONDITIONS: Final = "conditions not valid"
AUTOMATIC_REFERENCE: Final = "automatic reference"
HOTTER_BESIDE: Final = "hotter beside it"

NOT_CLEARED: Final = "cannot be cleared"
NO_CRITERION: Final = "no criterion for this method"

BLOCKERS: Final[Mapping[str, str]] = {
    SATURATED: "again_range",
    SIZE_LIMITED: "again_closer",
    REFLECTIVE: "again_taped",
    MIRRORS: "again_elsewhere",
    NO_SOLUTION: "again_inputs",
    LOW_LOAD: "again_loaded",
    LOAD_UNKNOWN: "again_load_measured",
    LOAD_ABOVE_RATING: "again_load_lowered",
    UNSTEADY: "again_steady",
    WINDY: "again_calm",
    LOW_SUN: "again_sunny",
    SUN_UNKNOWN: "again_sun_measured",
    FEW_NEIGHBOURS: "again_neighbours",
    BELOW_AIR: "again_air",
    CONDITIONS: "again_conditions",
    AUTOMATIC_REFERENCE: "again_reference",
    HOTTER_BESIDE: "again_outline",
}
"""Flags that never clear anything and may always raise it → how to look again, a key of `texts.state`."""

BOUNDING: Final = (SATURATED, SIZE_LIMITED)
"""Blockers that make a number a bound: the truth is at least as bad."""

AGAINST_REFERENCE: Final = ("delta_k", "mean_delta_k")
"""Numbers of a finding that depend on the reference area; criteria judge their magnitude."""

LEAST_EMISSIVITY: Final = 0.6
"""Below it a surface shows its surroundings rather than itself: no class."""


class Verdict(NamedTuple):
    """All assessments of one component or finding, the urgency that governs, and whether it is cleared."""

    assessments: tuple[Assessment, ...]
    urgency: int | None
    cleared: bool
    flags: tuple[str, ...]

    @property
    def outcome(self) -> str:
        """One of `conformity.OUTCOMES`: "act" wherever what governs asks for anything, else by `cleared`."""
        if self.urgency:
            return ACT
        return CLEARED if self.cleared else NOT_SETTLED


def blockers(flags: Iterable[str], emissivity: float) -> tuple[str, ...]:
    """What keeps a surface with these flags and this emissivity from being cleared, without repeats."""
    reflective = () if emissivity >= LEAST_EMISSIVITY else (REFLECTIVE,)  # NaN is reflective too
    return tuple(dict.fromkeys([*(flag for flag in flags if flag in BLOCKERS), *reflective]))


def assess(
    criterion: Criterion,
    estimate: Estimate | None,
    words: str,
    blocked: Collection[str],
    *,
    bounding: Collection[str] = BOUNDING,
    quantity: str = "",
) -> Assessment:
    """One criterion applied to one number, in the unit the criterion's quantity ends in.

    `quantity` is the key of the number where it stands in for the criterion's own (a rise brought to calm).
    `words` say what the number is ("above ambient air"), `bounding` which of the blockers make it a bound.
    No blocker changes the urgency: a bound is classed by its value and may be worse; a reflective surface
    keeps the urgency of its number but gets no class.  The one exception is a wall, pane or roof that mirrors: what it
    shows is elsewhere, so that it gets neither, and is not cleared.  Where anything blocks, no number is said to pass.
    """
    blank = unclassed(criterion, "", quantity=quantity)
    kind = None if estimate is None else class_of(estimate.value, criterion)
    if estimate is None or kind is None:
        return replace(blank, statement=state("no_value", words=words))
    bound = bool(set(bounding) & set(blocked))
    sign = ("≥ " if criterion.worse >= 0 else "≤ ") if bound else ""
    number = f"{sign}{_shown(estimate, criterion)}"
    if MIRRORS in blocked:
        return replace(blank, statement=state("mirrors", number=number, words=words))
    if REFLECTIVE in blocked:
        return replace(blank, urgency=kind.urgency, statement=state("reflects", number=number, words=words))
    probabilities = {} if bound else _probabilities(estimate, criterion)
    return replace(
        blank,
        class_=kind.name,
        urgency=kind.urgency,
        statement=state("classed", number=number, words=words, meaning=kind.statement),
        probabilities=probabilities,
        verdict=_verdict(estimate, criterion, blocked),
    )


def unclassed(criterion: Criterion, statement: str, *, quantity: str = "") -> Assessment:
    """An assessment that gives neither class nor urgency, and says why."""
    source = f"{criterion.source}, {criterion.edition} [{criterion.mark}]"
    return Assessment(criterion.name, None, None, statement, {}, source, quantity=quantity or criterion.quantity)


def clears(criterion: Criterion, estimate: Estimate | None) -> bool:
    """Whether this number by itself would clear: guarded acceptance where action begins."""
    if estimate is None or estimate.u is None:
        return False
    return bool(accepted(estimate.value, estimate.u, criterion))


def governed(
    assessments: Sequence[Assessment], candidates: Collection[str], remark: str = ""
) -> tuple[tuple[Assessment, ...], int | None]:
    """Mark the most urgent assessment among the criteria named `candidates` as the governing one.

    Returns the assessments, the governing one (or, without any urgency, the first) with `remark` added,
    and its urgency.
    """
    among = [one for one in assessments if one.criterion in candidates and one.urgency is not None]
    governing = max(among, key=lambda one: one.urgency or 0, default=None)
    told = governing or next(iter(assessments), None)
    marked = tuple(
        replace(one, governs=one is governing, statement=f"{one.statement} {remark}".strip()) if one is told else one
        for one in assessments
    )
    return marked, None if governing is None else governing.urgency


def remedy(blocked: Iterable[str]) -> str:
    """One sentence that says what is not cleared and how to look again; empty where nothing blocks."""
    told = "; ".join(f"{state(flag)}, {state(BLOCKERS[flag])}" for flag in blocked)
    return state("not_cleared", blockers=told) if told else ""


def _verdict(estimate: Estimate, criterion: Criterion, blocked: Collection[str]) -> str | None:
    """The four-way statement at the edge where action begins; None without u, and for a pass something blocks."""
    if estimate.u is None:
        return None
    verdict = str(four_way_by(estimate.value, estimate.u, criterion))
    return None if verdict == "" or (blocked and verdict in FOUR_WAY[:2]) else verdict


def _probabilities(estimate: Estimate, criterion: Criterion) -> dict[str, float]:
    u = float("nan") if estimate.u is None else estimate.u
    by_class = class_probabilities(estimate.value, u, criterion)
    return {name: float(p) for name, p in by_class.items() if not isnan(p)}


def _shown(estimate: Estimate, criterion: Criterion) -> str:
    """The number as people read it everywhere, with its unit and k."""
    known = " (k = 2)" if estimate.u else ""
    return f"{with_symbol(shown(estimate), unit(criterion.quantity))}{known}"
