"""What was recorded of the conditions of a frame, by the keys requirements are written in."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from functools import cache
from typing import Final

from irsurvey.assess.conditions import LEVELS, claim, review, suited
from irsurvey.heat.building_materials import building_materials
from irsurvey.heat.storage import HEAVY, class_time_constant, time_constant
from irsurvey.model import ConditionCheck, Element, FrameTask, Layer

_VERDICTS = ("met", "not recorded", "not met")
"""From best to worst."""

HELD_DIFFERENCE: Final = 10.0
"""Least difference [K] between indoor and outdoor air that counts as held, and as heating (EN 13187 as applied [S])."""

OUTDOOR_WIND: Final = "outdoor-wind"

_HOURS = ("hours_difference_held", "hours_steady", "hours_since_sun", "hours_since_rain", "hours_furniture_clear")


def recorded(task: FrameTask) -> dict[str, float | None]:
    """Recorded values by requirement key; what was assumed (source "default") was not recorded.

    What the survey file states goes before what logs tell (`task.history`): a log may be shorter than what is known.
    Yes and no are 1 and 0.
    """
    stated = {quantity.name: quantity.value for quantity in task.scene.quantities if quantity.source != "default"}
    told = dict(task.history)
    hours = {name: stated[name] / 3600 if name in stated else told.get(name) for name in _HOURS}
    constant = element_time_constant(task.element)
    indoor, outdoor = stated.get("indoor_air"), stated.get("outdoor_air")
    across = None if indoor is None or outdoor is None else abs(indoor - outdoor)
    least = told.get("air_difference_24h_min_k")
    if hours["hours_difference_held"] is None and least is not None and least >= HELD_DIFFERENCE:
        hours["hours_difference_held"] = 24.0
    return {
        **hours,
        "air_difference_k": across,
        "air_difference_24h_min_k": least,
        "outdoor_change_24h_k": told.get("outdoor_change_24h_k", _change_of_the_day(stated)),
        "outdoor_change_survey_k": told.get("outdoor_change_survey_k"),
        "indoor_change_survey_k": told.get("indoor_change_survey_k"),
        "wind_m_s": stated.get("wind"),
        "irradiance_w_m2": stated.get("irradiance"),
        "pressure_difference_pa": _pressure(task, stated.get("pressure_difference")),
        "unheated_before": told.get("unheated_before"),
        "time_constant_h": None if constant is None else constant / 3600,
        "u_value_w_m2k": task.element.u_value if task.element else stated.get("u_value"),
        "load_ratio": _least_load(task),
        "is_heavy": None if constant is None else float(constant >= HEAVY),
        "is_outside": None if task.viewed_from is None else float(task.viewed_from == "outside"),
        "is_heated": None if across is None else float(across >= HELD_DIFFERENCE),
    }


def claimed_by(task: FrameTask) -> tuple[str, str]:
    """What the conditions of a frame allow to claim, and why."""
    known = recorded(task)
    return claim(_standards(task, known), task.kind, task.method, known)


@cache
def element_time_constant(element: Element | None) -> float | None:
    """Slowest time constant [s] of an element from its layers, else from its mass; None where neither is known."""
    if element is None:
        return None
    layers = [_storing(layer) for layer in element.layers]
    known = [layer for layer in layers if layer is not None]
    if layers and len(known) == len(layers):
        return time_constant(known)
    return None if element.mass is None else class_time_constant(element.mass)


def reviewed(tasks: Iterable[FrameTask]) -> tuple[ConditionCheck, ...]:
    """One row per group and requirement, its bound included: what its frames recorded, of several the worst.

    A group that shows two elements is asked two bounds where these depend on the element."""
    rows: dict[tuple[str, str, str, str], ConditionCheck] = {}
    for task in tasks:
        known = recorded(task)
        for row in review(_standards(task, known), known, task.group or ""):
            key = row.group, row.check, row.source, row.requirement
            rows[key] = max(rows.get(key, row), row, key=_badness)
    return tuple(rows.values())


def _standards(task: FrameTask, known: Mapping[str, float | None]) -> tuple[str, ...]:
    """Whose requirements are asked; of electrical parts those on wind only outdoors, where it was recorded."""
    named = suited(task.standards, task.kind, task.method)
    is_outdoors = task.kind == "electrical" and known["wind_m_s"] is not None
    return (*named, OUTDOOR_WIND) if is_outdoors and OUTDOOR_WIND not in named else named


def _badness(row: ConditionCheck) -> tuple[int, int, float]:
    """By verdict, by what it leaves to be claimed, and of equals by how near the value comes to its bound."""
    value = 0.0 if row.value is None else row.value
    nearer = -value if row.requirement.startswith("≥") else value
    return _VERDICTS.index(row.verdict), -LEVELS.index(row.limits_to or LEVELS[-1]), nearer


def _storing(layer: Layer) -> tuple[float, float] | None:
    """Resistance [m² K W⁻¹] and heat capacity per area [J m⁻² K⁻¹] of a layer; None where a figure is not known."""
    if layer.resistance is not None:
        return layer.resistance, 0.0
    material = building_materials().get(layer.material)
    listed = (material.conductivity, material.density, material.specific_heat) if material else (None, None, None)
    own = layer.conductivity, layer.density, layer.specific_heat
    conductivity, density, specific_heat = (of if own is None else own for own, of in zip(own, listed, strict=True))
    if conductivity is None or density is None or specific_heat is None or conductivity <= 0:
        return None
    return layer.thickness / conductivity, layer.thickness * density * specific_heat


def _change_of_the_day(stated: dict[str, float]) -> float | None:
    """Largest change of the outdoor air against now, from the day's extremes; None where they were not stated."""
    now, low, high = (stated.get(name) for name in ("outdoor_air", "outdoor_24h_low", "outdoor_24h_high"))
    if now is None or low is None or high is None:
        return None
    return max(abs(now - low), abs(high - now))


def _pressure(task: FrameTask, stated: float | None) -> float | None:
    """Magnitude of the pressure difference: that of the pair it was taken for, else as stated."""
    pressure = task.pair.pressure if task.pair else stated
    return None if pressure is None else abs(pressure)


def _least_load(task: FrameTask) -> float | None:
    """Load over rating of the least loaded component; None where one of them is not known."""
    loads = [
        component.load / component.rated if component.load is not None and component.rated else None
        for component in task.components
    ]
    return None if None in loads else min((load for load in loads if load is not None), default=None)
