"""The validated survey file to frame tasks: levels applied, references followed, units converted."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from dataclasses import replace
from datetime import UTC, datetime, tzinfo
from pathlib import Path
from typing import Any

from irsurvey.errors import Fault, SurveyError
from irsurvey.model import (
    Camera,
    Detection,
    FrameTask,
    KnownLength,
    KnownRectangle,
    Pair,
    Polygon,
    ReadOptions,
    Scene,
    Signal,
)
from irsurvey.survey import loads, log, logged, places, scene, schema, windows
from irsurvey.survey.cameras import cameras
from irsurvey.survey.context import Context
from irsurvey.survey.correlations import correlations
from irsurvey.survey.elements import elements, material_faults
from irsurvey.survey.entries import Entry, entries
from irsurvey.survey.faults import nearest
from irsurvey.survey.known import Known
from irsurvey.survey.levels import DEPTH, Levels, Stated
from irsurvey.survey.marks import components, points, strips, surface_tables, surfaces
from irsurvey.survey.optics import target
from irsurvey.survey.own_criteria import names, own_criteria
from irsurvey.survey.references import every_level, reference_faults
from irsurvey.survey.schema_building import Pair as PairTable
from irsurvey.survey.schema_camera import Camera as CameraTable
from irsurvey.survey.schema_drawn import Area
from irsurvey.survey.times import instant, zone_named
from irsurvey.survey.uncertainties import Uncertainties

METHODS = {"building": ("envelope", "air-leakage", "roof-moisture"), "electrical": ("contact", "voltage-driven", "pv")}
"""Methods by kind, the default first."""
_NO_CAMERA = Camera("", (7.5e-6, 13e-6), Signal("apparent-temperature"))
"""Stands in for one that is at fault, so that other faults are still found; never leaves this folder."""

_CONVECTION = {"building": ("iso-6946", 2.5), "electrical": ("churchill-chu", 0.1)}
"""Default correlation of the film coefficient and the height it takes [m], by kind of survey."""
_CEILING, _FLOOR = 150.0, 30.0
"""Tilts [°] above and below which heat flows upward or downward, within 30° (ISO 6946 counts 30° to the horizontal)."""


def resolved(
    document: schema.Document,
    folder: Path,
    known: Known,
    named: Mapping[str, Collection[str]],
    *,
    ahead: bool = False,
) -> tuple[list[FrameTask], list[Fault], list[tuple[str, str]]]:
    """All frames of a survey, in order; what is wrong; and what only resolving shows to be assumed, as notices.

    `named` are the names of groups, cameras, circuits, assets and frames as written, also of those whose table is
    at fault: a reference to such a one is no second fault.  `ahead`: before any frame was taken, see `entries`; a log
    that is not there yet is then a notice.
    """
    faults: list[Fault] = []
    try:
        zone = zone_named(document.survey.timezone)
    except SurveyError as error:
        faults += error.faults
        zone = UTC
    found = entries(document, folder, faults, ahead=ahead)
    groups = {group.id: group for group in document.group}
    levels = [Levels(document, groups.get(entry.group or ""), entry.frame, entry.id) for entry in found]
    missing: list[Fault] = []
    logs = _logs(document, folder, zone, missing)
    of_circuits = loads.logs(document, folder, zone, missing)
    notices = [("", f"{fault.where}: {fault.got}, not used") for fault in missing] if ahead else []
    if ahead:
        logs = {written: series for written, series in logs.items() if series is not None}
        of_circuits = {circuit: series for circuit, series in of_circuits.items() if series is not None}
    else:
        faults += missing
    faults += material_faults(document, known)
    context = Context(
        folder, known, zone, cameras(document), elements(document, known), logs, of_circuits, faults, notices, ahead
    )
    seen = {of.id: windows.window_of(of, faults, notices) for of in levels}
    own = own_criteria(document, folder, known, faults)
    tasks = [
        replace(_task(entry, of, seen[of.id], context), own_criteria=own)
        for entry, of in zip(found, levels, strict=True)
    ]
    tasks = windows.with_window_frames(tasks, seen, faults)
    changes = logged.over_the_survey(tasks, {of.id: logged.columns(of, context) for of in levels})
    tasks = [replace(task, history=(*task.history, *changes.get(task.id, {}).items())) for task in tasks]
    buildings = {task.id for task in tasks if task.kind == "building"}
    tasks = _paired(tasks, {entry.id: entry.frame.pair for entry in found if entry.id in buildings}, faults)
    every = {**named, "frame": {*named["frame"], *(entry.id for entry in found)}}
    without_reflector = {task.id for task in tasks} - {task.id for task in tasks if _draws_reflector(task)}
    faults += reference_faults(document, every, without_reflector, of_circuits, known)
    if not every["camera"]:
        faults.append(Fault("camera", "a camera", "nothing", "describe it under [camera], or several under [cameras]"))
    if None not in logs.values():
        faults += _missing(tasks, context.unlogged)
    return tasks, faults, context.notices


def _task(entry: Entry, levels: Levels, seen: windows.Seen | None, context: Context) -> FrameTask:
    frame = entry.frame
    kind, method, viewed_from = _kind(levels, context)
    is_building, is_roof = kind == "building", (method, viewed_from) == ("roof-moisture", "outside")
    _without_effect(levels, kind, context)
    camera, fill_values = _camera(levels, context)
    taken = _taken(levels, context)
    conditions, history = _conditions(levels, taken, context)
    uncertainties = Uncertainties(levels.stated("uncertainty"), viewed_from or "electrical")
    element = context.elements.get(levels.name("element") or "") if is_building else None
    if is_roof and "tilt_deg" not in conditions:
        context.notices.append((levels.id, "tilt_deg not stated: a level roof assumed"))
    sky_model = _value(conditions, "sky_model", schema.SKY_MODEL)
    sky_model_u = context.known.sky_models.get(sky_model)

    quantities: scene.Quantities = {q.name: q for q in target(levels.stated("target"), uncertainties, context.known)}
    quantities |= {q.name: q for q in scene.conditions(conditions, uncertainties, is_roof=is_roof)}
    quantities |= {q.name: q for q in scene.surroundings(quantities, sky_model_u, uncertainties)}
    quantities |= {q.name: q for q in scene.element(element.u_value if element else None, uncertainties)}
    if seen is not None:
        through = scene.window(
            seen.window, seen.source, quantities.get("air"), uncertainties, is_ahead=context.is_ahead
        )
        quantities |= {q.name: q for q in through}
    quantities |= {q.name: q for q in scene.scale(frame, camera, uncertainties)}
    quantities |= {q.name: q for q in scene.imperfections(uncertainties)}
    areas = surfaces(levels, quantities, uncertainties, context.known)  # these add what is their own
    parts = components(levels, taken, quantities, uncertainties, context)
    searched = None if is_building else levels.choice("find_components")

    task = FrameTask(
        id=entry.id,
        file=entry.file,
        path=str(context.folder / entry.file),
        kind=kind,
        method=method,
        camera=camera,
        scene=Scene(tuple(quantities.values())),
        viewed_from=viewed_from,
        read=_read(levels, fill_values),
        surfaces=areas,
        components=parts,
        reference=_area(levels.choice("reference")),
        inspect=_area(levels.choice("inspect")),
        has_window=seen is not None,
        known_scale=_known_scale(frame),
        detection=_detection(levels),
        convection=_value(conditions, "convection", _convection(kind, viewed_from, conditions)),
        surface_height=_value(conditions, "surface_height_m", _CONVECTION[kind][1]),
        criteria=names(levels.document),
        standards=tuple(levels.document.survey.standards),
        strips=strips(frame) if is_building else (),
        element=element,
        history=tuple(history.items()),
        sky_model=sky_model,
        find_components=searched is not None and searched.value,
        humidity_class=_value(conditions, "humidity_class", None),
        orientation=levels.name("orientation") or "",
        reflected_from=_value(conditions, "reflected_from", None),
        group=entry.group,
        label=frame.label,
        asset=frame.asset,
        notes=frame.notes,
        photo=frame.photo,
        photo_path=_photo_path(levels, context),
        taken=taken,
    )
    return replace(task, scene=replace(task.scene, correlations=correlations(task, levels, context.faults)))


def _kind(levels: Levels, context: Context) -> tuple[str, str, str | None]:
    """Kind, method and side.  A method of another kind, stated above the level that changes the kind, is dropped."""
    kind: str | None = None
    method: Stated | None = None
    for source, table in levels.tables():
        own = table.survey if isinstance(table, schema.Document) else table
        if own.kind is not None and own.kind != kind:
            kind = own.kind
            method = method if method is not None and method.value in METHODS[kind] else None
        if own.method is not None:
            method = Stated(own.method, source, 0)
    if kind is None:
        where = f"group[{levels.group.id}].kind" if levels.group else "survey.kind"
        context.faults.append(
            Fault(where, '"building" or "electrical"', "nothing", "state it in [survey] or in every group")
        )
        kind = "building"
    elif method is not None and method.value not in METHODS[kind]:
        where = levels.where(method.source, "method" if method.source != "survey" else "survey.method")
        methods = METHODS[kind]
        fault = Fault(
            where, f"a method of kind {kind}: {', '.join(methods)}", method.value, nearest(method.value, methods)
        )
        context.faults.append(fault)
    if kind == "electrical":
        return kind, method.value if method else METHODS[kind][0], None
    side, how = levels.choice("viewed_from"), method.value if method else METHODS[kind][0]
    assumed = "outside" if how == "roof-moisture" else "inside"
    if side is None:
        context.notices.append((levels.id, f"viewed_from not stated: {assumed} assumed"))
    return kind, how, side.value if side else assumed


def _without_effect(levels: Levels, kind: str, context: Context) -> None:
    """Tells of what stands on a frame or its group, and is for the other kind of survey alone."""
    searched = levels.choice("find_components")
    for key, of, is_stated in (
        ("pair", "building", levels.frame.pair is not None),
        ("strip", "building", bool(levels.frame.strip)),
        ("element", "building", levels.name("element") is not None),
        ("find_components", "electrical", searched is not None and searched.value),
    ):
        if is_stated and kind != of:
            where = "an electrical" if kind == "electrical" else "a building"
            context.notices.append((levels.id, f"{key} has no effect in {where} survey"))


def _camera(levels: Levels, context: Context) -> tuple[Camera, list[float]]:
    """The camera that took a frame, and the stored numbers that mean no data in it."""
    chosen = levels.choice("camera")
    name = None if chosen is None else "camera" if isinstance(chosen.value, CameraTable) else chosen.value
    if name is None and len(context.cameras) == 1:
        name = next(iter(context.cameras))
    if name is None and context.cameras:
        choices = ", ".join(context.cameras)
        remedy = "name it in [survey], in the group or in the frame"
        context.faults.append(Fault("survey.camera", f"one of the cameras {choices}", "nothing", remedy))
    table = levels.document.camera if name == "camera" else levels.document.cameras.get(name or "")
    return context.cameras.get(name or "", _NO_CAMERA), [] if table is None else table.fill_values


def _taken(levels: Levels, context: Context) -> datetime | None:
    taken = levels.frame.taken
    if taken is None:
        return None
    if taken.tzinfo is None and levels.document.survey.timezone is None:
        context.notices.append((levels.id, "survey.timezone not stated: local times read as UTC"))
    try:
        return instant(taken, context.zone, f"frame[{levels.id}].taken")
    except SurveyError as error:
        context.faults.extend(error.faults)
        return None


def _logs(document: schema.Document, folder: Path, zone: tzinfo, faults: list[Fault]) -> dict[str, log.Log | None]:
    """All logs by their path as written; None for one that is at fault."""
    logs: dict[str, log.Log | None] = {}
    for where, table in every_level(document):
        written = table.conditions.log
        if written is None or written in logs:
            continue
        place, logs[written] = f"{where}conditions.log", None
        try:
            logs[written] = log.read(folder / places.inside(folder, written, place), zone, place)
        except SurveyError as error:
            faults += error.faults
    return logs


def _conditions(levels: Levels, taken: datetime | None, context: Context) -> tuple[dict[str, Stated], dict[str, float]]:
    """Conditions of a frame, stated ones and logged ones; and what logs tell of the time before, by requirement key.

    A reflector drawn on the frame is the lowest level that speaks about the reflected temperature; a pair about the
    pressure.
    """
    conditions = levels.stated("conditions", logged.at(levels, taken, context))
    if any(area.role == "reflector" for area in surface_tables(levels)):
        if "reflected_c" in levels.frame.conditions.model_fields_set:
            context.notices.append((levels.id, "reflected_c not used: measured on the frame's reflector"))
        conditions = {key: stated for key, stated in conditions.items() if key not in ("reflected_c", "reflected_from")}
    pair, own = levels.frame.pair, levels.frame.conditions.pressure_pa
    if pair is not None:
        if own is not None and own != pair.pressure_pa:
            where, got = f"frame[{levels.id}].pair.pressure_pa", f"{pair.pressure_pa:g}"
            context.faults.append(Fault(where, f"the frame's own pressure_pa, {own:g}", got, "state it once"))
        conditions["pressure_pa"] = Stated(pair.pressure_pa, "frame", DEPTH["frame"])
    conditions, history, notices = logged.before(logged.columns(levels, context), taken, conditions)
    context.notices.extend((levels.id, text) for text in notices)
    return conditions, history


def _convection(kind: str, viewed_from: str | None, conditions: Mapping[str, Stated]) -> str:
    """Default correlation: of ISO 6946 inside buildings, that of the way the heat flows."""
    default = _CONVECTION[kind][0]
    if viewed_from != "inside":
        return default
    indoor, outdoor = (_value(conditions, key, 0.0) for key in ("indoor_air_c", "outdoor_air_c"))
    is_known = "indoor_air_c" in conditions and "outdoor_air_c" in conditions
    is_cooled = is_known and indoor < outdoor
    tilt = _value(conditions, "tilt_deg", 90.0)
    if tilt > _CEILING:
        return "iso-6946-down" if is_cooled else "iso-6946-up"
    if tilt < _FLOOR:
        return "iso-6946-up" if is_cooled else "iso-6946-down"
    return default


def _paired(tasks: list[FrameTask], pairs: Mapping[str, PairTable | None], faults: list[Fault]) -> list[FrameTask]:
    """The tasks, those of a pair with the whole task of their partner; adds to `faults`."""
    by_id = {task.id: task for task in tasks}
    result = []
    for task in tasks:
        pair = pairs.get(task.id)
        partner = None if pair is None else by_id.get(pair.frame)  # an unknown one is a fault of references
        if pair is None or partner is None:
            result.append(task)
            continue
        where = f"frame[{task.id}].pair.with"
        pressure = partner.scene.value("pressure_difference")
        if partner.id == task.id:
            faults.append(Fault(where, "another frame", partner.id))
        elif pairs.get(partner.id) is not None:
            remedy = "name the frame without pressure difference"
            faults.append(Fault(where, "a frame that is no pair itself", partner.id, remedy))
        elif partner.camera.name != task.camera.name:
            faults.append(Fault(where, f"a frame of the same camera, {task.camera.name}", partner.camera.name))
        elif pressure == pair.pressure_pa:
            got = f"{partner.id}, at the same {pressure:g} Pa"
            faults.append(Fault(where, "a frame at another pressure", got, "state its own conditions.pressure_pa"))
        result.append(replace(task, pair=Pair(partner, pair.pressure_pa)))
    return result


def _value(conditions: Mapping[str, Stated], key: str, default: Any) -> Any:
    return conditions[key].value if key in conditions else default


def _read(levels: Levels, fill_values: list[float]) -> ReadOptions:
    stated = {key: levels.choice(key) for key in ("page", "array", "shape", "dtype", "byte_order")}
    own = levels.choice("fill_values")
    fills = tuple(float(number) for number in (own.value if own else fill_values))
    return ReadOptions(**{key: choice.value for key, choice in stated.items() if choice}, fill_values=fills)


def _area(choice: Stated | None) -> Polygon | None:
    return points(choice.value.polygon) if choice and isinstance(choice.value, Area) else None


def _known_scale(frame: schema.Frame) -> KnownLength | KnownRectangle | None:
    if frame.known_length is not None:
        start, end = points([frame.known_length.start, frame.known_length.to])
        return KnownLength(start, end)
    return None if frame.known_rectangle is None else KnownRectangle(points(frame.known_rectangle.corners))


def _detection(levels: Levels) -> Detection:
    stated = {key: choice.value for key, choice in levels.stated("detection").items()}
    return Detection(stated.get("min_delta_k"), stated.get("min_pixels", 25), stated.get("min_area_m2"))


def _photo_path(levels: Levels, context: Context) -> str | None:
    if levels.frame.photo is None:
        return None
    try:
        path = context.folder / places.inside(context.folder, levels.frame.photo, f"frame[{levels.id}].photo")
    except SurveyError as error:
        context.faults.extend(error.faults)
        return None
    return str(path)


def _draws_reflector(task: FrameTask) -> bool:
    return any(surface.role == "reflector" for surface in task.surfaces)


def _missing(tasks: list[FrameTask], unlogged: Mapping[tuple[str, str], str]) -> Iterator[Fault]:
    """Conditions without which nothing can be corrected, and the frames that lack them; why no log has them."""
    lacking = {
        "air_c": [task for task in tasks if "air" not in task.scene],
        "distance_m": [task for task in tasks if "distance" not in task.scene],
        "reflected_c": [
            task
            for task in tasks
            if "reflected" not in task.scene and task.reflected_from is None and not _draws_reflector(task)
        ],
    }
    for key, without in lacking.items():
        if not without:
            continue
        is_all = len(without) == len(tasks)
        where = f"conditions.{key}" if is_all else f"frame[{without[0].id}].conditions.{key}"
        more = f" (nor for {len(without) - 1} more)" if not is_all and len(without) > 1 else ""
        why = next((f": {unlogged[task.id, key]}" for task in without if (task.id, key) in unlogged), "")
        measured = ", or draw a reflector" if key == "reflected_c" else ""
        remedy = f"state it under conditions of the survey, the group or the frame{measured}"
        yield Fault(where, "a value, as it is required", f"nothing{more}{why}", remedy)
