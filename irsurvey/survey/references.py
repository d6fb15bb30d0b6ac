"""References of the survey file, level by level: every name that is used must be the name of something."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping

from irsurvey.errors import Fault
from irsurvey.survey import schema
from irsurvey.survey.entries import frame_name
from irsurvey.survey.faults import nearest
from irsurvey.survey.known import Known
from irsurvey.survey.loads import by_circuit, phases
from irsurvey.survey.log import Log
from irsurvey.survey.own_criteria import is_file


def every_level(document: schema.Document) -> Iterator[tuple[str, schema.Document | schema.Group | schema.Frame]]:
    """(prefix of key paths, table) of the survey, its groups and its listed frames."""
    yield "", document
    for group in document.group:
        yield f"group[{group.id}].", group
    for number, frame in enumerate(document.frame, 1):
        yield f"frame[{frame_name(frame, number)}].", frame


def reference_faults(
    document: schema.Document,
    named: Mapping[str, Collection[str]],
    without_reflector: Collection[str],
    loads: Mapping[str, Log | None],
    known: Known,
) -> Iterator[Fault]:
    """Names that are the name of nothing, or of two things.

    `named`: names of groups, cameras, circuits, assets and frames; `without_reflector`: frames that draw none;
    `loads`: load logs by circuit.
    """
    for kind, tables in (
        ("group", document.group),
        ("circuit", document.circuit),
        ("asset", document.asset),
        ("element", document.element),
    ):
        ids = [table.id for table in tables]
        for name in sorted({name for name in ids if ids.count(name) > 1}):
            yield Fault(f"{kind}[{name}].id", "each id once", f"{ids.count(name)} of it", "rename one")
    if document.camera is not None and "camera" in document.cameras:
        yield Fault("cameras.camera", "another name", "camera", "that is the name of the one under [camera]")
    for number, name in enumerate(document.survey.criteria, 1):
        if not is_file(name):
            yield from _unknown(name, known.criteria, f"survey.criteria[#{number}]", "irsurvey criteria lists")
    for number, name in enumerate(document.survey.standards, 1):
        yield from _unknown(name, known.standards, f"survey.standards[#{number}]", "irsurvey holds requirements of")
    yield from _unknown(document.survey.camera, named["camera"], "survey.camera", "[cameras] holds")
    known_phases = {
        name: phases(one, loads.get(name))
        for name, one in by_circuit(document).items()
        if name not in loads or loads[name] is not None  # one whose log is at fault may have any phase
    }
    for where, level in every_level(document):
        conditions = level.conditions
        if "convection" in conditions.model_fields_set:
            place = f"{where}conditions.convection"
            yield from _unknown(conditions.convection, known.convections, place, "irsurvey knows")
        if "sky_model" in conditions.model_fields_set:
            place = f"{where}conditions.sky_model"
            yield from _unknown(conditions.sky_model, known.sky_models, place, "irsurvey has a sky model of")
        yield from _unknown(
            level.target.material, known.materials, f"{where}target.material", "irsurvey materials lists"
        )
        place = f"{where}conditions.reflected_from"
        yield from _unknown(conditions.reflected_from, named["frame"], place, "is the id of a frame")
        if conditions.reflected_from in without_reflector:
            remedy = 'draw a surface with role = "reflector" on it: the foil, or all of a picture of the sky'
            yield Fault(place, "a frame with a reflector", f"{conditions.reflected_from}, which draws none", remedy)
        if not isinstance(level, schema.Document):
            yield from _unknown(level.camera, named["camera"], f"{where}camera", "[cameras] holds")
            yield from _unknown(level.element, named["element"], f"{where}element", "is the id of an [[element]]")
            yield from _mark_faults(level, where, known_phases, named["circuit"], known)
            for key in ("without", "through") if level.window_from else ():
                place = f"{where}window_from.{key}"
                yield from _unknown(getattr(level.window_from, key), named["frame"], place, "is the id of a frame")
        if isinstance(level, schema.Frame):
            yield from _unknown(level.group, named["group"], f"{where}group", "is the id of a [[group]]")
            if level.pair is not None:
                yield from _unknown(level.pair.frame, named["frame"], f"{where}pair.with", "is the id of a frame")
            if named["asset"]:  # without a list of assets, a frame's asset is a label of its own
                yield from _unknown(level.asset, named["asset"], f"{where}asset", "is the id of an [[asset]]")


def _mark_faults(
    level: schema.Group | schema.Frame,
    where: str,
    known_phases: Mapping[str, Collection[str] | None],
    named: Collection[str],
    known: Known,
) -> Iterator[Fault]:
    strips = level.strip if isinstance(level, schema.Frame) else []
    for kind, drawn in (("surface", level.surface), ("component", level.component), ("strip", strips)):
        names = [one.name for one in drawn if one.name]
        for name in sorted({name for name in names if names.count(name) > 1}):
            yield Fault(f"{where}{kind}[{name}].name", "each name once", f"{names.count(name)} of it", "rename one")
    for kind, areas in (("surface", level.surface), ("component", level.component)):
        for number, area in enumerate(areas, 1):
            place = f"{where}{kind}[{area.name or f'#{number}'}].material"
            yield from _unknown(area.material, known.materials, place, "irsurvey materials lists")
    for number, part in enumerate(level.component, 1):
        place = f"{where}component[{part.name or f'#{number}'}]"
        yield from _unknown(part.circuit, named, f"{place}.circuit", "is the id of a [[circuit]]")
        of_circuit = known_phases.get(part.circuit or "")
        if of_circuit is not None:
            yield from _unknown(part.phase, of_circuit, f"{place}.phase", f"circuit {part.circuit} has")
        for one, name in enumerate(part.limits, 1):
            yield from _unknown(name, known.limits, f"{place}.limits[#{one}]", "irsurvey has a limit of")


def _unknown(name: str | None, names: Collection[str], where: str, such: str) -> Iterator[Fault]:
    if name is not None and name not in names:
        yield Fault(where, f"a name that {such}", repr(name), nearest(name, names))
