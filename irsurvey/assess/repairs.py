"""What to do about a part, in neutral words, and in which order: the repair list."""

from __future__ import annotations

import tomllib
from collections.abc import Collection, Iterable, Mapping
from dataclasses import replace
from functools import cache
from importlib.resources import files
from typing import Any, Final

from irsurvey.assess.conformity import class_probabilities
from irsurvey.assess.criteria import Criterion
from irsurvey.assess.electrical import OF_TWINS
from irsurvey.assess.judged import Judged
from irsurvey.assess.severity import (
    BELOW_AIR,
    BLOCKERS,
    LOAD_ABOVE_RATING,
    LOAD_UNKNOWN,
    LOW_LOAD,
    MIRRORS,
    NO_SOLUTION,
    REFLECTIVE,
)
from irsurvey.assess.twins import ALL_HOT
from irsurvey.model.conclusions import RepairItem
from irsurvey.model.report import Assessment
from irsurvey.texts import of_table, state

DOUBTFUL: Final = (REFLECTIVE, MIRRORS, NO_SOLUTION, BELOW_AIR)
"""Flags under which the reading itself is in question: it is confirmed before anything is repaired."""
OF_LOAD: Final = (LOW_LOAD, LOAD_UNKNOWN, LOAD_ABOVE_RATING)
"""Flags that only another look under a suitable load lifts."""

JOINT, GROUP, ALONE, LIMIT = "joint", "group", "alone", "limit"
VOLTAGE, MODULE, REGION, COLD, DOUBT = "voltage", "module", "region", "cold", "doubtful"
_UNLOADED = (VOLTAGE, MODULE)
"""Situations in which what is seen does not depend on a load current."""
_BY_LIMIT = ("above_limit_k", "above_allowed_k")
_BY_METHOD: Final[Mapping[tuple[str, ...], str]] = {("voltage-driven",): VOLTAGE, ("pv",): MODULE}


def repairs(items: Iterable[RepairItem]) -> tuple[RepairItem, ...]:
    """Items in the order of the repair list, their ranks 1, 2, … set.

    By urgency, then confidence, then |ΔT|, the highest first; of one urgency those without a confidence or a ΔT last.
    What asks for nothing but is not cleared follows below, that without any urgency first: nothing is known of it.
    """
    ordered = sorted(items, key=_importance)
    return tuple(replace(item, rank=rank) for rank, item in enumerate(ordered, start=1))


def confidence(assessment: Assessment | None, criterion: Criterion | None, judged: Judged | None) -> float | None:
    """Probability that the urgency of an assessment, or a higher one, is the true one: Σ over all classes that ask for
    as much, of the probabilities the assessment states.

    Where it states none because the number is a bound, those of the bound as a value (`judged`): the truth being worse,
    it is at least so probable.  None without a class or an uncertainty, and where nothing is asked for.
    """
    if assessment is None or criterion is None or not assessment.urgency or assessment.class_ is None:
        return None
    stated: Mapping[str, float] = assessment.probabilities
    if not stated and judged is not None and judged.u >= 0:
        stated = {name: float(p) for name, p in class_probabilities(judged.value, judged.u, criterion).items()}
    urgent = [kind.name for kind in criterion.classes if kind.urgency >= assessment.urgency and kind.name in stated]
    return min(sum(stated[name] for name in urgent), 1.0) if urgent else None


def situation(quantity: str, flags: Collection[str], *, methods: tuple[str, ...] = (), sense: str = "") -> str:
    """What made a part stand out, a name of `situation` in repairs.toml.

    `quantity`: key of the number that governs; `methods` those of its criterion; `sense`: of a region that is no drawn
    component, else "".
    """
    if set(flags) & set(DOUBTFUL):
        return DOUBT
    if sense:
        return REGION if sense == "hot" else COLD
    if methods in _BY_METHOD:
        return _BY_METHOD[methods]
    if quantity in _BY_LIMIT:
        return LIMIT
    if ALL_HOT in flags:
        return GROUP
    return JOINT if quantity in OF_TWINS else ALONE


def action(urgency: int | None, of: str, flags: Iterable[str]) -> str:
    """The recommended action: when and what, then how to look again at what is not cleared, then who may do it.

    `of`: a situation.  Without an urgency, or one that asks for nothing, only how to look again.
    """
    words = _words()
    look_again = [state(BLOCKERS[flag]) for flag in flags if flag in BLOCKERS]
    told = []
    if urgency:
        what = words["situation"][of]["find" if urgency == 1 else "repair"]
        told.append(f"{of_table(words['when'][str(urgency)])}: {of_table(what)}.")
    elif not look_again:
        told.append(of_table(words["open"]))
    told += (f"{text[0].upper()}{text[1:]}." for text in dict.fromkeys(look_again))
    return " ".join((*told, of_table(words["caution"])))


def inspect_again(urgency: int | None, of: str, flags: Collection[str]) -> str:
    """When to inspect a part again; `of`: a situation."""
    again = {key: of_table(words) for key, words in _words()["again"].items()}
    if urgency:
        if of in _UNLOADED:
            return again["unloaded"]
        return again["investigated" if urgency == 1 or of == DOUBT else "repaired"]
    if of in _UNLOADED:
        return again["unloaded_open"]
    unreadable = any(flag in BLOCKERS and flag not in OF_LOAD for flag in flags)
    told = [again["load"]] if set(flags) & set(OF_LOAD) else []
    if unreadable:
        told.append(again["readable"])
    return "; ".join(told) or again["open"]


@cache
def _words() -> dict[str, Any]:
    return tomllib.loads((files("irsurvey.assess") / "repairs.toml").read_text("utf-8"))


def _importance(item: RepairItem) -> tuple[float, float, float]:
    unknown_first = 0.5 if item.urgency is None else 0.0
    delta = abs(item.delta_k.value) if item.delta_k else -1.0
    sure = -1.0 if item.confidence is None else round(item.confidence, 2)  # as it is shown
    return -(item.urgency or unknown_first), -sure, -delta
