"""What is drawn on a frame: the surfaces and components of its group and its own, with optics and loads."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import datetime

from irsurvey.model import Component, JointShape, Polygon, Strip, Surface
from irsurvey.survey import schema
from irsurvey.survey.context import Context
from irsurvey.survey.known import Known
from irsurvey.survey.levels import Levels
from irsurvey.survey.loads import STEADY, Load, by_circuit, load_at
from irsurvey.survey.optics import optics, own_reflected, put
from irsurvey.survey.scene import Quantities
from irsurvey.survey.schema_drawn import Surface as SurfaceTable
from irsurvey.survey.schema_electrical import Circuit
from irsurvey.survey.schema_electrical import Component as ComponentTable
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
    levels: Levels, taken: datetime | None, quantities: Quantities, uncertainties: Uncertainties, context: Context
) -> tuple[Component, ...]:
    """Components in order, the group's first, with the loads of their circuits; adds to `quantities`."""
    material = _target_material(levels)
    circuits = by_circuit(levels.document)
    result = []
    for area in component_tables(levels):
        circuit = circuits.get(area.circuit or "")
        load, steady = _load(area, circuit, levels.id, taken, context)
        own = area if area.time_constant_min is not None else circuit
        minutes = None if own is None else own.time_constant_min
        component = Component(
            name=str(area.name),
            polygon=points(area.polygon),
            group=area.group,
            phase=area.phase,
            load=load,
            rated=area.rated_a if area.rated_a is not None or circuit is None else circuit.rated_a,
            emissivity=optics(area, quantities, material, uncertainties, context.known),
            reflected=own_reflected(area, quantities, uncertainties),
            limits=tuple(dict.fromkeys(area.limits)),
            shape=_shape(area),
            steady=steady,
            time_constant=None if minutes is None else si("time_constant_min", minutes),
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


def surface_tables(levels: Levels) -> list[SurfaceTable]:
    """Surfaces of a frame, named; one of its own takes the place of its group's of the same name."""
    own = levels.frame.surface
    names = {area.name for area in own if area.name}
    inherited = [area for area in (levels.group.surface if levels.group else ()) if area.name not in names]
    return [
        area if area.name else area.model_copy(update={"name": f"surface {number}"})
        for number, area in enumerate([*inherited, *own], 1)
    ]


def component_tables(levels: Levels) -> list[ComponentTable]:
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


def _load(
    area: ComponentTable, circuit: Circuit | None, frame: str, taken: datetime | None, context: Context
) -> tuple[float | None, float | None]:
    """The load of a component [A], its own before its circuit's, and how long it has been steady [s], by the log."""
    if circuit is None:
        return area.load_a, None
    series = context.loads.get(circuit.id)
    told = Load() if series is None else load_at(circuit.id, series, area.phase, taken)
    if told.notice:
        context.notices.append((frame, told.notice))
    own, logged = area.load_a, told.amperes
    if own is not None and logged is not None and abs(own - logged) > STEADY * logged:
        text = f"load_a of {area.name} stated as {own:g}, by the log {logged:.4g}: what is stated counts"
        context.notices.append((frame, text))
    loads = circuit.load_a
    stated_load = loads.get(area.phase or "") if isinstance(loads, dict) else loads
    return next((load for load in (own, logged, stated_load) if load is not None), None), told.steady


def _shape(area: ComponentTable) -> JointShape | None:
    if area.cylinder is not None:
        return JointShape("cylinder", diameter=area.cylinder.diameter_m, length=area.cylinder.length_m)
    if area.plate is not None:
        return JointShape("plate", length=area.plate.height_m, width=area.plate.width_m)
    if area.sphere is not None:
        return JointShape("sphere", diameter=area.sphere.diameter_m)
    return None if area.area_m2 is None else JointShape("area", area=area.area_m2)


def _target_material(levels: Levels) -> str | None:
    material = levels.stated("target").get("material")
    return None if material is None else material.value
