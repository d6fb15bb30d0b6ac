"""What a survey assumes rather than measures, in short sentences with the frames they concern."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from pathlib import Path

from irsurvey.model import FrameTask
from irsurvey.survey.references import every_level
from irsurvey.survey.schema import Document

_ASSUMED = {
    "emissivity": "emissivity not stated: {:.2f} assumed",
    "relative_humidity": "relative humidity not recorded: {:.0%} assumed",
    "pressure": "air pressure not recorded: {:.0f} Pa assumed",
    "view_angle": "view angle not stated: square to the surface assumed",
    "ambient": "ambient_c not stated: the air on the path assumed where the parts sit",
    "mean_radiant": "mean radiant temperature not stated: that of the air assumed",
    "ground": "ground not recorded: the temperature of the outdoor air assumed",
    "cloud": "cloud cover not recorded: {:.0%} assumed",
    "window_transmittance": "transmittance of the window not measured yet: {:.2f} assumed",
    "window_temperature": (
        "warning: temperature of the window not stated: that of the air assumed, and what it is off by goes into "
        "every part behind it"
    ),
    "window_ambient": "what the window mirrors not stated: the air temperature assumed",
}

_HUMIDITIES = {"relative_humidity": "", "indoor_humidity": "indoor ", "outdoor_humidity": "outdoor "}
_DRIEST = 0.03
"""Relative humidity below which air is drier than in a desert: rather a fraction than percent (common practice)."""

_WITHOUT_LOAD = ("voltage-driven", "pv")
"""Methods for what is warm by its voltage or by the sun: no load law holds, and a load clears nothing."""


def notices(document: Document, tasks: list[FrameTask], noted: Iterable[tuple[str, str]]) -> tuple[str, ...]:
    """Notices of a survey, each once, with the frames it holds for; `noted` are (frame, notice) from elsewhere.

    One of no frame, "", is of the survey."""
    by_text: dict[str, list[str]] = {}
    bands = {task.id: task.camera.band for task in tasks}
    for frame, text in [*noted, *((task.id, text) for task in tasks for text in _of(task, bands))]:
        by_text.setdefault(text, []).append(frame)
    concerning = tuple(f"{text} ({_frames(ids, tasks)})" if any(ids) else text for text, ids in by_text.items())
    stated = sorted({key for _, level in every_level(document) for key in level.uncertainty.model_fields_set})
    stated = [key for key in stated if key != "correlations"]
    besides = f" besides {', '.join(stated)}" if stated else ""
    return (*concerning, f"uncertainties not stated: common practice or judgement assumed for all inputs{besides}")


def _of(task: FrameTask, bands: Mapping[str, tuple[float, float]]) -> Iterator[str]:
    assumed = {quantity.name: quantity.value for quantity in task.scene.quantities if quantity.source == "default"}
    if task.viewed_from == "outside" and "mean_radiant" in assumed:
        if "sky" not in task.scene:
            yield f"sky not recorded: its temperature is to be modelled by {task.sky_model}"
        del assumed["mean_radiant"]  # what the face sees is told apart
    for name, text in _ASSUMED.items():
        if name in assumed:
            yield text.format(assumed[name])
    for name, whose in _HUMIDITIES.items():
        if name in task.scene and task.scene[name].value < _DRIEST:
            percent = 100 * task.scene[name].value
            yield f"{whose}relative humidity of {percent:.2g} %: was a fraction stated? the key wants percent"
    if task.kind == "building":
        if "total_emissivity" in assumed:
            yield "total emissivity, for the exchange of heat, not stated: that in the camera's band assumed"
        if task.humidity_class is not None and "indoor_humidity" not in task.scene:
            needed = "" if "outdoor_humidity" in task.scene else ", once outdoor_relative_humidity_percent is recorded"
            yield f"humidity of the room air not recorded: humidity class {task.humidity_class} assumed{needed}"
        missing = [name for name in ("indoor_air", "outdoor_air") if name not in task.scene]
        if task.method == "envelope" and missing:
            yield f"{' and '.join(f'{name}_c' for name in missing)} not recorded: no envelope claim"
        if task.viewed_from == "outside" and "wind" not in task.scene:
            yield "wind not recorded"
        if task.reference is None:
            yield "no reference area drawn: an automatic one is a suggestion, without severity until confirmed"
    else:
        yield from _of_electrical(task, assumed)
    if task.reflected_from is not None and bands[task.reflected_from] != task.camera.band:
        yield f"reflected_from {task.reflected_from}, which was taken in another band"
    if task.camera.ifov is None:
        yield f"ifov_mrad of {task.camera.name} not stated: no spot size" + ("" if task.known_scale else ", no area")
    if task.camera.noise is None:
        yield f"noise_k of {task.camera.name} not stated: estimated from the frame"
    unknown = ", ".join(component.name for component in task.components if component.load is None)
    if unknown and task.method not in _WITHOUT_LOAD:
        yield f"load not recorded: nothing can be cleared for {unknown}"
    if task.taken is None:
        yield "time not stated"
    if not _exists(task.path):
        yield "raw file missing: the frame will fail"
    if task.photo_path is not None and not _exists(task.photo_path):
        yield "photograph missing"


def _of_electrical(task: FrameTask, assumed: Mapping[str, float]) -> Iterator[str]:
    if task.find_components and task.method not in _WITHOUT_LOAD:
        yield "find_components: of parts that are found no load is known: nothing can be cleared for them"
    if task.find_components:
        if "ambient" in assumed:
            yield "find_components without ambient_c: parts that are found are held against the air on the path"
        if task.reference is None:
            yield "find_components without a reference area: parts are looked for against an automatic one"
    if task.method == "pv" and "irradiance" not in task.scene:
        yield "irradiance_w_m2 not recorded: differences of modules cannot be brought to 1000 W/m²"
    unsettled = [part.name for part in task.components if part.steady is not None and part.time_constant is None]
    if unsettled:
        names = ", ".join(unsettled)
        yield f"time_constant_min not stated: whether the logged load was steady for long enough stays open for {names}"


def _exists(path: str) -> bool:
    try:
        return Path(path).is_file()
    except OSError:
        return False


def _frames(ids: list[str], tasks: list[FrameTask]) -> str:
    """The frames in a few words: all, those of one group, or the first few."""
    found = set(ids)
    if len(found) == len(tasks):
        return "all frames"
    groups = {task.group for task in tasks if task.id in found}
    group = next(iter(groups))
    if len(groups) == 1 and group and found == {task.id for task in tasks if task.group == group}:
        return f"group {group}"
    first = list(dict.fromkeys(ids))
    return ", ".join(first[:4]) + (f" and {len(first) - 4} more" if len(first) > 4 else "")
