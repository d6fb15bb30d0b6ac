"""Which items of a complete report a survey and its analysed frames state."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping

from irsurvey.model import FrameReport, FrameTask, Survey
from irsurvey.texts import state

_ABOUT = {
    "test": "test_description",
    "standard": "standard",
    "client": "client",
    "construction": "construction",
    "supplementary": "supplementary",
    "influences": "influences",
    "signature": "signed_by",
}
"""Item → the free text of [survey] that states it."""

_CONDITIONS: Mapping[str, Collection[str]] = {
    "indoor air": ("indoor_air",),
    "air difference": ("indoor_air", "outdoor_air"),
    "outdoor air": ("outdoor_air",),
    "outdoor air before": ("outdoor_24h_low", "outdoor_24h_high"),
    "sun before": ("hours_since_sun",),
    "precipitation": ("hours_since_rain",),
    "wind": ("wind",),
    "surfaces": ("emissivity",),
}
"""Item → the quantities of the Scene that state it; each must be recorded for every frame, not assumed."""


def present_in(survey: Survey, frames: Iterable[FrameReport]) -> Mapping[str, str]:
    """Where the report of a survey states each item of assess/checklist.toml; what it does not state is left out.

    Only building frames that were analysed count, and what each frame must state must stand in every one of them.  The
    pressure difference is stated where at least one frame tells it.
    """
    analysed = {frame.id: frame for frame in frames if frame.status == "analysed" and frame.kind == "building"}
    tasks = [task for task in survey.tasks if task.id in analysed]
    about = dict(survey.about)
    said = {item: f"survey.{key}" for item, key in _ABOUT.items() if about.get(key)}
    if not tasks:
        return said
    recorded = [{quantity.name for quantity in task.scene.quantities if quantity.source != "default"} for task in tasks]
    inputs, sheets = state("in_inputs"), state("in_sheets")
    of_frames = {
        "when": (sheets, all(task.taken for task in tasks)),
        "pressure": (inputs, any(_has_pressure(task) for task in tasks)),
        "parts": (sheets, all(task.label or task.asset for task in tasks)),
        "defects": (state("in_findings"), all(one.indication for frame in analysed.values() for one in frame.findings)),
        "orientation": (sheets, all(task.orientation for task in tasks)),
        "equipment": (state("in_cameras"), all(task.camera.serial for task in tasks)),
        "sun": (inputs, all({"hours_since_sun", "irradiance"} & names for names in recorded)),
        "views": (sheets, all(task.photo for task in tasks)),
        "thermograms": (sheets, True),
    }
    return {
        **said,
        **{item: where for item, (where, is_there) in of_frames.items() if is_there},
        **{item: inputs for item, names in _CONDITIONS.items() if all(of.issuperset(names) for of in recorded)},
    }


def _has_pressure(task: FrameTask) -> bool:
    stated = any(one.name == "pressure_difference" and one.source != "default" for one in task.scene.quantities)
    return stated or task.pair is not None
