"""What is drawn on a frame: the surfaces and components of its group and its own, with optics and loads."""

from __future__ import annotations

from collections.abc import Sequence

from irsurvey.model import Component, Polygon, Strip, Surface
from irsurvey.survey import schema
from irsurvey.survey.known import Known
from irsurvey.survey.levels import Levels
from irsurvey.survey.optics import optics, own_reflected, put
from irsurvey.survey.scene import Quantities
from irsurvey.survey.uncertainties import Uncertainties
from irsurvey.survey.units import si


def surfaces(levels: Levels, quantities: Quantities, uncertainties: Uncertainties, known: Known) -> tuple[Surface, ...]:
    """Surfaces in order, the group's first; adds what is their own to `quantities`."""
    material = _target_material(levels)
    result = []
    for area in surface_tables(levels):
        temperature = None
        if area.temperature_c is not None:
            value = si("temperature_c", area.temperature_c)
            own_temperature = uncertainties.quantity("", value, "known_temperature_k", source="surface", low=0.0)
            temperature = put(quantities, [f"temperature:{area.name}"], own_temperature)
        surface = Surface(
            name=str(area.name),
            polygon=points(area.polygon),
            role=area.role,
            emissivity=optics(area, quantities, material, uncertainties, known),
            reflected=own_reflected(area, quantities, uncertainties),
            temperature=temperature,
            material=area.material or "",
        )
        result.append(surface)
    return tuple(result)


def components(
    levels: Levels, quantities: Quantities, uncertainties: Uncertainties, known: Known
) -> tuple[Component, ...]:
    """Components in order, the group's first, with the loads of their circuits; adds to `quantities`."""
    material = _target_material(levels)
    circuits = {circuit.id: circuit for circuit in levels.document.circuit}
    result = []
    for area in component_tables(levels):
        circuit = circuits.get(area.circuit or "")
        component = Component(
            name=str(area.name),
            polygon=points(area.polygon),
            group=area.group,
            phase=area.phase,
            load=_load(area, circuit) if area.load_a is None else area.load_a,
            rated=area.rated_a if area.rated_a is not None or circuit is None else circuit.rated_a,
            emissivity=optics(area, quantities, material, uncertainties, known),
            reflected=own_reflected(area, quantities, uncertainties),
        )
        result.append(component)
    return tuple(result)


def strips(frame: schema.Frame) -> tuple[Strip, ...]:
    """Strips of a frame in order."""
    result = []
    for number, strip in enumerate(frame.strip, 1):
        start, end = points([strip.start, strip.to])
        name = strip.name or f"strip {number}"
        result.append(Strip(name, start, end, strip.width_px, strip.undisturbed))
    return tuple(result)


def surface_tables(levels: Levels) -> list[schema.Surface]:
    """Surfaces of a frame, named; one of its own takes the place of its group's of the same name."""
    own = levels.frame.surface
    names = {area.name for area in own if area.name}
    inherited = [area for area in (levels.group.surface if levels.group else ()) if area.name not in names]
    return [
        area if area.name else area.model_copy(update={"name": f"surface {number}"})
        for number, area in enumerate([*inherited, *own], 1)
    ]


def component_tables(levels: Levels) -> list[schema.Component]:
    """Components of a frame, named; one of its own takes the place of its group's of the same name."""
    own = levels.frame.component
    names = {area.name for area in own if area.name}
    inherited = [area for area in (levels.group.component if levels.group else ()) if area.name not in names]
    return [
        area if area.name else area.model_copy(update={"name": f"component {number}"})
        for number, area in enumerate([*inherited, *own], 1)
    ]


def points(polygon: Sequence[tuple[float, float]]) -> Polygon:
    """A polygon of the file as a record holds it."""
    return tuple((float(x), float(y)) for x, y in polygon)


def _load(area: schema.Component, circuit: schema.Circuit | None) -> float | None:
    loads = circuit.load_a if circuit else None
    return loads.get(area.phase or "") if isinstance(loads, dict) else loads


def _target_material(levels: Levels) -> str | None:
    material = levels.stated("target").get("material")
    return None if material is None else material.value
