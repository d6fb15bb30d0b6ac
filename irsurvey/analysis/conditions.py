"""What was recorded of the conditions of a frame, by the keys requirements are written in."""

from __future__ import annotations

from collections.abc import Iterable

from irsurvey.assess.conditions import review
from irsurvey.model import ConditionCheck, FrameTask

_VERDICTS = ("met", "not recorded", "not met")
"""From best to worst."""


def recorded(task: FrameTask) -> dict[str, float | None]:
    """Recorded values by requirement key; what was assumed (source "default") was not recorded."""
    stated = {quantity.name: quantity.value for quantity in task.scene.quantities if quantity.source != "default"}
    indoor, outdoor = stated.get("indoor_air"), stated.get("outdoor_air")
    loads = [
        component.load / component.rated if component.load is not None and component.rated else None
        for component in task.components
    ]
    return {
        "air_difference_k": None if indoor is None or outdoor is None else abs(indoor - outdoor),
        "wind_m_s": stated.get("wind"),
        "hours_since_sun": _hours(stated.get("hours_since_sun")),
        "hours_since_rain": _hours(stated.get("hours_since_rain")),
        "load_ratio": None if None in loads else min((load for load in loads if load is not None), default=None),
    }


def reviewed(tasks: Iterable[FrameTask]) -> tuple[ConditionCheck, ...]:
    """One row per group and requirement: what its frames recorded, of several values the one that fares worst."""
    rows: dict[tuple[str, str], ConditionCheck] = {}
    for task in tasks:
        for row in review(task.kind, task.method, recorded(task), task.group or ""):
            kept = rows.setdefault((row.group, row.check), row)
            if _VERDICTS.index(row.verdict) > _VERDICTS.index(kept.verdict):
                rows[row.group, row.check] = row
    return tuple(rows.values())


def _hours(seconds: float | None) -> float | None:
    return None if seconds is None else seconds / 3600
