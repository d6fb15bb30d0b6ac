"""Correlations of inputs: the survey file names two inputs as report.json does, the scene by its own names."""

from __future__ import annotations

from collections.abc import Iterator

from irsurvey.errors import Fault
from irsurvey.model import Component, FrameTask, Surface
from irsurvey.survey.faults import nearest
from irsurvey.survey.levels import Levels
from irsurvey.survey.references import every_level
from irsurvey.survey.scene import CONDITIONS
from irsurvey.survey.schema import Document

INPUTS = {
    "emissivity": "emissivity",
    "total_emissivity": "total_emissivity",
    **{key: scalar.name for key, scalar in CONDITIONS.items()},
    "cloud": "cloud",
    "indoor_humidity_percent": "indoor_humidity",
    "outdoor_humidity_percent": "outdoor_humidity",
    "sky_model_k": "sky_model",
    "u_value_w_m2k": "u_value",
    "pressure_difference_pa": "pressure_difference",
    "outdoor_24h_low_c": "outdoor_24h_low",
    "outdoor_24h_high_c": "outdoor_24h_high",
    "window_transmittance": "window_transmittance",
    "window_reflectance": "window_reflectance",
    "window_temperature_c": "window_temperature",
    "window_ambient_c": "window_ambient",
    "atmosphere_relative": "atmosphere",
    "convection_factor": "convection",
    "camera_offset_k": "camera_offset",
    "camera_gain": "camera_gain",
    "ifov_mrad": "ifov",
    "known_length_m": "known_length",
    "known_width_m": "known_width",
    "known_height_m": "known_height",
    "load_exponent": "load_exponent",
    "shading_k": "shading",
    "shading_x_k": "shading_x",
    "shading_y_k": "shading_y",
    "size_of_source": "size_of_source",
}
"""Key in report.json, or among [conditions] → name in the scene, of the inputs that any frame may have.

Not `outline`: every outline lies where it lies, independent of any other input.
"""
_OF_AREAS = {
    "emissivity": "emissivity",
    "total_emissivity": "total_emissivity",
    "reflected": "reflected_c",
    "temperature": "temperature_c",
}
"""Name in the scene of what an area has of its own → its key, before the colon and the area's name."""


def correlations(task: FrameTask, levels: Levels, faults: list[Fault]) -> tuple[tuple[str, str, float], ...]:
    """Pairs of names in the scene with their coefficient, the lowest level's of each pair; adds to `faults`.

    Passes over pairs whose names are unknown here: they may be those of another frame's areas.
    """
    inputs = _inputs(task)
    result: dict[frozenset[str], tuple[str, str, float]] = {}
    for source, table in levels.tables():
        own: dict[frozenset[str], tuple[str, str, float]] = {}
        for number, stated in enumerate(table.uncertainty.correlations, 1):
            one, other = (inputs.get(key) for key in stated.between)
            if one is None or other is None:
                continue
            where = levels.where(source, f"uncertainty.correlations[#{number}].between")
            pair, got = frozenset((one, other)), " and ".join(stated.between)
            if one == other:
                faults.append(Fault(where, "two inputs", f"{got}, which are one", "it always moves with itself"))
            elif pair in own:
                faults.append(Fault(where, "each pair of inputs once", f"{got} again", "drop one"))
            own[pair] = (one, other, stated.coefficient)
        result |= own
    return tuple(result.values())


def unknown_inputs(document: Document, tasks: list[FrameTask], *, with_areas: bool) -> Iterator[Fault]:
    """Names in correlations that no frame below their level has an input of; those of areas only `with_areas`."""
    for where, level in every_level(document):
        if not level.uncertainty.correlations:
            continue
        below = [task for task in tasks if where in ("", f"group[{task.group}].", f"frame[{task.id}].")]
        known = {key: None for inputs in (INPUTS, *map(_inputs, below)) for key in inputs}
        for number, stated in enumerate(level.uncertainty.correlations, 1):
            for key in stated.between:
                if key not in known and (with_areas or ":" not in key):
                    place = f"{where}uncertainty.correlations[#{number}].between"
                    yield Fault(place, "an input by its key in report.json", repr(key), nearest(key, known))


def _inputs(task: FrameTask) -> dict[str, str]:
    """Names in the scene by all keys one may call them: what an area shares with others also by the area's name."""
    areas: tuple[Surface | Component, ...] = (*task.surfaces, *task.components)
    own = [area for area in areas if area.emissivity != "emissivity"]
    of_areas = {f"{total}emissivity:{area.name}": total + area.emissivity for area in own for total in ("", "total_")}
    for quantity in task.scene.quantities:
        base, _, owner = quantity.name.partition(":")
        if owner:
            of_areas[f"{_OF_AREAS[base]}:{owner}"] = quantity.name
    return INPUTS | of_areas
