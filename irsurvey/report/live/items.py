"""Findings and components as the page carries them: the numbers that criteria judge, and what each is made of."""

from __future__ import annotations

from collections.abc import Mapping
from math import isfinite
from typing import Any, Final

import numpy as np

from irsurvey import numbers, texts
from irsurvey.assess.electrical import OF_TWINS, OVER_AIR
from irsurvey.assess.pv import LEAST_IRRADIANCE, STANDARD_IRRADIANCE, neighbours, sound
from irsurvey.assess.severity import AGAINST_REFERENCE, AUTOMATIC_REFERENCE, MIRRORS, SATURATED
from irsurvey.assess.twins import ALL_HOT, NO_TWIN, NORMALISED
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.geometry.polygons import mask
from irsurvey.model import ComponentReport, Estimate, Finding, FrameReport, FrameTask
from irsurvey.numbers import SI, Style
from irsurvey.report.labels import component_mark
from irsurvey.report.live.areas import Json, Pixels, whole_and_spot
from irsurvey.report.ranking import governing

_OF_FINDINGS: Final = (
    *("extreme_c", "mean_c", "delta_k", "mean_delta_k"),
    *("temperature_factor", "temperature_factor_at_0_25"),
)
_OF_COMPONENTS: Final = (
    *("max_c", "mean_c", "delta_similar_k", "delta_ambient_k", "delta_similar_in_calm_k", "delta_ambient_in_calm_k"),
    *("relative_difference_percent", "above_limit_k", "above_allowed_k", "delta_neighbours_k"),
)
"""Numbers the page works out again; any other stays as reported."""

Item = Finding | ComponentReport


def findings(frame: FrameReport, task: FrameTask, pixels: Pixels, *, style: Style = SI) -> list[Json]:
    """The findings of a frame in the order of their labels; without areas where one is only a bound."""
    return [_finding(finding, task, pixels) | sureness(finding.mean_c, frame, style) for finding in frame.findings]


def components(frame: FrameReport, task: FrameTask, pixels: Pixels, *, style: Style = SI) -> list[Json]:
    """The components of a frame in the order of the survey; without areas where one is only a bound."""
    ambient = "ambient_c" if "ambient_c" in frame.inputs else "air_c"
    t_ambient = frame.inputs[ambient].value
    irradiance = frame.inputs["irradiance_w_m2"].value if "irradiance_w_m2" in frame.inputs else None
    by_name = {component.name: component for component in frame.components}
    return [
        _component(place, component, by_name, t_ambient, irradiance, task, pixels)
        | sureness(component.mean_c, frame, style)
        for place, component in enumerate(frame.components, 1)
    ]


def sureness(temperature: Estimate | None, frame: FrameReport, style: Style) -> Json:
    """The expanded uncertainty of a temperature in words, `expanded`; None where numbers may not be relied on."""
    u = temperature.u if temperature and frame.claim == "quantitative" else None
    if u is None or not isfinite(u) or u <= 0:
        return {"expanded": None}
    to = numbers.difference_scale("mean_c", style)
    expanded = numbers.number(numbers.COVERAGE_FACTOR * u * to.factor, 2, style=style)
    return {"expanded": f"±\u00a0{numbers.with_symbol(expanded, to.symbol)}"}


def _finding(finding: Finding, task: FrameTask, pixels: Pixels) -> Json:
    inside = pixels.labels == finding.label
    return {
        "id": finding.id,
        "mark": str(finding.label),
        "name": f"{finding.id} ({texts.sense(finding.sense)})",
        "kind": "finding",
        "sense": finding.sense,
        "polygon": [list(corner) for corner in finding.polygon],
        **_common(finding, _OF_FINDINGS),
        **_areas(finding, inside, finding.sense, task, pixels),
    }


def _component(
    place: int,
    component: ComponentReport,
    by_name: Mapping[str, ComponentReport],
    t_ambient: float,
    irradiance: float | None,
    task: FrameTask,
    pixels: Pixels,
) -> Json:
    is_coolest = component.similar_to is None and component.delta_similar_k is not None
    twin = component if is_coolest else by_name.get(component.similar_to or "")
    inside = mask(component.polygon, (pixels.t.shape[0], pixels.t.shape[1]))
    return {
        "id": component.key,
        "mark": component_mark(place),
        "name": component.name,
        "kind": "component",
        "sense": "hot",
        "polygon": [list(corner) for corner in component.polygon],
        **_common(component, _OF_COMPONENTS),
        "has_twin": NO_TWIN not in component.flags and ALL_HOT not in component.flags,
        "twin": None if twin is None else list(by_name).index(twin.name),
        "load_factor": _load_factor(component, twin, t_ambient),
        "calm_factor": _ratio(component.delta_ambient_in_calm_k, component.delta_ambient_k),
        "limit": None if component.limit is None else component.limit.max_c + ZERO_CELSIUS,
        "neighbours": _neighbours(component, by_name),
        "sun_factor": _sun_factor(irradiance),
        **_areas(component, inside, "hot", task, pixels),
    }


def _common(item: Item, quantities: tuple[str, ...]) -> Json:
    """What findings and components share: numbers as reported in the unit of their key, and how they were judged."""
    judged = [assessment.quantity for assessment in item.assessments]
    wanted = dict.fromkeys((*quantities, *judged))
    told = governing(item.assessments)
    return {
        "reported": {key: _value(getattr(item, key)) for key in wanted},
        "judged": [
            {
                "criterion": assessment.criterion,
                "quantity": assessment.quantity,
                "class": assessment.class_,
                "urgency": assessment.urgency,
                "magnitude": assessment.quantity in AGAINST_REFERENCE,
                "by": _named(assessment.quantity),
                "against": "twin" if assessment.quantity in OF_TWINS else _beside(assessment.quantity),
            }
            for assessment in item.assessments
        ],
        "class": None if told is None else told.class_,
        "urgency": item.urgency,
        "cleared": item.outcome == "cleared",
        "by": _judged_by(item),
        "unconfirmed": AUTOMATIC_REFERENCE in item.flags,
        "mirrors": MIRRORS in item.flags,
    }


def _beside(quantity: str) -> str:
    return "air" if quantity in OVER_AIR else "other"


def _judged_by(item: Item) -> Json:
    """The number that the class goes by, or the ΔT where no criterion applies."""
    told = governing(item.assessments) or next(iter(item.assessments), None)
    return _named(told.quantity if told else "mean_delta_k" if isinstance(item, Finding) else "delta_ambient_k")


def _named(key: str) -> Json:
    """A number as the page tells of it: its key, its name, and how it is shown."""
    show = "delta" if key.endswith("_k") else "celsius" if key.endswith("_c") else "plain"
    return {"key": key, "label": texts.name(key), "show": show}


def _areas(item: Item, inside: Any, sense: str, task: FrameTask, pixels: Pixels) -> Json:
    """Its areas; none where part of it is beyond the range: then its numbers are bounds."""
    if SATURATED in item.flags:
        return {"areas": None}
    return {"areas": whole_and_spot(pixels, np.asarray(inside, np.bool_), sense, task.camera.spot_pixels)}


def _load_factor(component: ComponentReport, twin: ComponentReport | None, t_ambient: float) -> float:
    """What the rise of the twin was multiplied by to bring it to the same load, read off the three numbers."""
    numbers = component.max_c, component.delta_similar_k, twin.max_c if twin else None
    if NORMALISED not in component.flags or any(number is None for number in numbers):
        return 1.0
    t, delta, t_twin = (number.value for number in numbers if number is not None)
    rise = t_twin - t_ambient
    return 1 - (delta - (t - t_twin)) / rise if rise > 0 else 1.0


def _neighbours(component: ComponentReport, by_name: Mapping[str, ComponentReport]) -> list[int]:
    """PV: indices of the modules its median is taken of, chosen as the analysis chose them; of anything else none."""
    if component.delta_neighbours_k is None:
        return []
    group = [one for one in by_name.values() if one.group == component.group]
    centres = [np.mean(one.polygon, axis=0) for one in group]
    near = [one for index in neighbours(group.index(component), centres) if (one := group[index]).max_c is not None]
    kept = sound([one.max_c.value for one in near if one.max_c is not None])
    places = list(by_name)
    return [places.index(one.name) for one, is_sound in zip(near, kept, strict=True) if is_sound]


def _sun_factor(irradiance: float | None) -> float:
    """What a rise over neighbours is multiplied by to bring it to full sun; as it reads where the sun is unknown."""
    if irradiance is None:
        return 1.0
    return STANDARD_IRRADIANCE / min(max(irradiance, LEAST_IRRADIANCE), STANDARD_IRRADIANCE)


def _ratio(number: Estimate | None, other: Estimate | None) -> float | None:
    return number.value / other.value if number and other and other.value else None


def _value(estimate: Estimate | None) -> float | None:
    return None if estimate is None or not isfinite(estimate.value) else estimate.value
