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
    SATURATED: "look again with a temperature range that holds it",
    SIZE_LIMITED: "look again from closer or with a longer lens, so that a whole measurement spot lies on it",
    REFLECTIVE: "look again with matt tape or paint on it (on electrical parts by qualified persons, part dead)",
    MIRRORS: "look again from another side, as a reflection moves with the camera, or with matt tape on it",
    NO_SOLUTION: "look again after checking emissivity and reflected temperature, best with matt tape on it",
    LOW_LOAD: "look again at load, 40 % of its rating or more",
    LOAD_UNKNOWN: "look again with its load measured and its rating noted; a mild reading proves nothing",
    LOAD_ABOVE_RATING: "look again with its load brought down to its rating, both checked first",
    UNSTEADY: "look again when its load has been steady for three of its thermal time constants",
    WINDY: "look again in 5 m/s of wind or less",
    LOW_SUN: "look again at 600 W/m² or more in the plane of the modules",
    SUN_UNKNOWN: "look again with the irradiance in the plane of the modules measured",
    FEW_NEIGHBOURS: "look again with six or more modules of its kind around it in the frame",
    BELOW_AIR: "look again after checking ambient air, emissivity and reflected temperature: a part gives off heat",
    CONDITIONS: "look again under conditions that allow the claim",
    AUTOMATIC_REFERENCE: "confirm the reference area and run again",
    HOTTER_BESIDE: "draw its outline around all of it, or name what lies beside it, and run again",
}
"""Flags that never clear anything and may always raise it, and how to look again."""

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
        return replace(blank, statement=f"No value {words}: it could not be measured here.")
    bound = bool(set(bounding) & set(blocked))
    sign = ("≥ " if criterion.worse >= 0 else "≤ ") if bound else ""
    measured = f"{sign}{_shown(estimate, criterion)} {words}"
    if MIRRORS in blocked:
        return replace(blank, statement=f"{measured}: it {MIRRORS}, neither class nor urgency is given.")
    if REFLECTIVE in blocked:
        statement = f"{measured}: the surface is {REFLECTIVE}, no class is given."
        return replace(blank, urgency=kind.urgency, statement=statement)
    probabilities = {} if bound else _probabilities(estimate, criterion)
    return replace(
        blank,
        class_=kind.name,
        urgency=kind.urgency,
        statement=f"{measured}: {kind.statement}.",
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
    told = "; ".join(f"{flag}, {BLOCKERS[flag]}" for flag in blocked)
    return f"It {NOT_CLEARED}: {told}." if told else ""


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
