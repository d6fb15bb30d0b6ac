"""The data of one frame as the page carries it: its temperatures, and what they were corrected with."""

from __future__ import annotations

import zlib
from base64 import b64encode
from math import ceil, floor, isfinite
from pathlib import Path
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from irsurvey import numbers, texts
from irsurvey.analysis.correction import optics_of
from irsurvey.analysis.exchange import TOTAL, Surroundings, film_of, radiant_of
from irsurvey.analysis.inputs import domain, in_si, in_unit, named, shown
from irsurvey.analysis.surroundings import surroundings
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.model import Estimate, FrameReport, FrameTask, Quantity, Scene
from irsurvey.numbers import SI, Style
from irsurvey.report import picture, scale
from irsurvey.report.live.areas import Pixels, reference
from irsurvey.report.live.items import components, findings, sureness
from irsurvey.report.live.tables import band_key

STEP_K: Final = 0.01
"""Step [K] of the temperatures in a page; wider only where a frame spans more than 655 K."""

_CODES: Final = 65_534
_FILM_NODES: Final = 33
_ASSUMED: Final = ("emissivity", "reflected", "air", "relative_humidity", "distance")
"""Inputs a reader may change, by the name before the colon, in the order they are shown."""
_ELSEWHERE: Final = ("window_temperature", "window_ambient", "indoor_air", "outdoor_air", "ambient", "mean_radiant")
_PATH: Final = ("pressure", "atmosphere", "window_transmittance", "window_reflectance")
_NEEDED: Final = {*_ASSUMED, *_PATH[:2], "convection", "camera_offset", "camera_gain"}
"""Inputs without which nothing could be worked out again."""
_FACED: Final = "faced"  # what a surface faces, where that is not one value of the scene

_NO_FILM: Final = {"low": 0.0, "high": 1.0, "values": []}

Json = dict[str, Any]


def payload(frame: FrameReport, task: FrameTask, out: Path, *, style: Style = SI) -> Json | None:
    """Everything the page needs of one frame, ready for JSON; None where there is nothing to read.

    Read from OUT/frames/<id>; temperatures are exact to half of `STEP_K`."""
    folder = out / "frames" / frame.id
    if frame.status == "failed" or not (folder / "temperature.tif").is_file():
        return None
    t = _read(folder / "temperature.tif").astype(np.float32)
    if not np.isfinite(t).any():
        return None
    labels = _read(folder / "findings.tif").astype(np.uint16)
    optics, optics_names = optics_of(task, t.shape)
    pixels = Pixels(t + np.float32(ZERO_CELSIUS), labels, optics)
    scene = scene_of(frame)
    if not set(scene.values()) >= _NEEDED:
        return None
    follows = _follows(task, scene)
    around = surroundings(task, scene)
    values = {name: np.float64(value) for name, value in scene.values().items()}
    low, high = picture.display_range(t, labels)
    factor = picture.enlargement(t.shape)
    return {
        "id": frame.id,
        "kind": frame.kind,
        "rows": t.shape[0],
        "columns": t.shape[1],
        "map": _packed(t),
        "optics": b64encode(zlib.compress(optics.tobytes(), 9)).decode() if optics.any() else None,
        "optics_names": [
            {"emissivity": emissivity, "reflected": reflected, "total": _total(emissivity, scene)}
            for emissivity, reflected in optics_names
        ],
        "band": band_key(task.camera.band),
        "scene": _scene(scene, task, around, values, optics_names),
        "follows": follows,
        "assumptions": _assumptions(frame, scene, optics_names, follows, style),
        "around": {
            "air": around.air,
            "radiant": around.radiant[0] if len(around.radiant) == 1 else _FACED,
            "sign": around.sign,
            "film": _film(pixels.t, around, values) if _tells_heat(frame) else _NO_FILM,
        },
        "reference": _reference(pixels, frame, task, style),
        "findings": findings(frame, task, pixels, style=style),
        "components": components(frame, task, pixels, style=style),
        "picture": {
            "factor": factor,
            "width": t.shape[1] * factor + scale.strip(scale.LEAST_HEIGHT, low, high, (False, False)).shape[1],
            "height": max(t.shape[0] * factor, scale.LEAST_HEIGHT),
            "low": low + ZERO_CELSIUS,
            "high": high + ZERO_CELSIUS,
        },
    }


def scene_of(frame: FrameReport) -> Scene:
    """The scene behind a frame report: its inputs in SI units, as far as they are numbers of a scene."""
    return Scene(
        tuple(
            Quantity(named(key), in_si(named(key), entry.value), source=entry.from_)
            for key, entry in frame.inputs.items()
        )
    )


def _reference(pixels: Pixels, frame: FrameReport, task: FrameTask, style: Style) -> Json | None:
    """The reference area, with how uncertain its level is."""
    found = reference(pixels, frame, task)
    if found is None or frame.reference is None:
        return None
    return found | sureness(Estimate(frame.reference.median_c, frame.reference.u_c), frame, style)


def _read(path: Path) -> NDArray[Any]:
    import tifffile

    return np.asarray(tifffile.imread(path))


def _packed(t: NDArray[np.float32]) -> Json:
    """A temperature map [°C] packed: its distinct values, and an index to them for each pixel (0: not measurable).

    A value is (low + step·level) °C, its level a whole number.  `data` is the base64 of a deflated stream: the `count`
    levels as uint16, then the low and the high bytes of the differences of the index along each row, modulo 2¹⁶ and
    folded (0, −1, 1, −2, … → 0, 1, 2, 3, …).  That is a fifth smaller than the plain map.
    """
    measured = np.isfinite(t)
    values = t[measured].astype(np.float64)
    low = floor(float(values.min()) / STEP_K) * STEP_K
    step = max(STEP_K, ceil((float(values.max()) - low) / _CODES / STEP_K) * STEP_K)
    levels, index = np.unique(np.rint((values - low) / step).astype(np.uint16), return_inverse=True)
    indices = np.zeros(t.shape, np.uint16)
    indices[measured] = index + 1
    differences = np.diff(indices, axis=1, prepend=np.zeros((t.shape[0], 1), np.uint16)).view(np.int16)
    folded = ((differences << 1) ^ (differences >> 15)).view(np.uint16)
    planes = (folded & 0xFF).astype(np.uint8), (folded >> 8).astype(np.uint8)
    stream = b"".join((levels.astype("<u2").tobytes(), *(plane.tobytes() for plane in planes)))
    return {
        "low": round(low, 6),
        "step": round(step, 6),
        "count": int(levels.size),
        "data": b64encode(zlib.compress(stream, 9)).decode(),
    }


def _total(emissivity: str, scene: Scene) -> str:
    return TOTAL + emissivity if TOTAL + emissivity in scene else emissivity


def _scene(
    scene: Scene,
    task: FrameTask,
    around: Surroundings,
    values: dict[str, np.float64],
    optics_names: tuple[tuple[str, str], ...],
) -> dict[str, float]:
    """The values [SI] that a number of the page may depend on."""
    of_optics = {name for pair in optics_names for name in (*pair, TOTAL + pair[0])}
    wanted = {*_ASSUMED, *_ELSEWHERE, *_PATH, *of_optics, *(surface.emissivity for surface in task.surfaces)}
    found = {quantity.name: quantity.value for quantity in scene.quantities if quantity.name in wanted}
    if len(around.radiant) > 1:
        found[_FACED] = float(radiant_of(around, values))
    return found


def _follows(task: FrameTask, scene: Scene) -> dict[str, str]:
    """Which values were taken from another one and move with it: name → the other's."""
    return {
        quantity.name: quantity.follows
        for quantity in task.scene.quantities
        if quantity.follows and quantity.name in scene and quantity.follows in scene
    }


def _assumptions(
    frame: FrameReport,
    scene: Scene,
    optics_names: tuple[tuple[str, str], ...],
    follows: dict[str, str],
    style: Style,
) -> list[Json]:
    """The inputs a reader may change, as they are shown: words, unit, limits in that unit, value as reported."""
    used = {name for pair in optics_names for name in pair} | set(_ASSUMED)
    names = [
        quantity.name
        for base in _ASSUMED
        for quantity in scene.quantities
        if quantity.name.partition(":")[0] == base and quantity.name in used
    ]
    own = {base for name in names if (base := name.partition(":")[0]) != name and follows.get(name) != base}
    return [_assumption(name, frame, scene, style, is_of_rest=name in own) for name in names]


def _assumption(name: str, frame: FrameReport, scene: Scene, style: Style, *, is_of_rest: bool) -> Json:
    """One input; `is_of_rest`: some parts of the frame have a value of their own, which it does not change."""
    key, factor = shown(name)
    stem = key.partition(":")[0]
    to = numbers.scale(stem, style)
    factor, shift = to.factor * factor, to.factor * in_unit(name, 0.0) + to.shift
    least, most = domain(name)
    return {
        "name": name,
        "label": texts.tools()["of_the_rest"].format(name=texts.name(key)) if is_of_rest else texts.name(key),
        "unit": to.symbol,
        "factor": factor,
        "shift": shift,
        "low": least * factor + shift if isfinite(least) else None,
        "high": most * factor + shift if isfinite(most) else None,
        "reported": numbers.with_symbol(numbers.stated(frame.inputs[key], stem, style=style), to.symbol),
        "value": scene[name].value * factor + shift,
    }


def _tells_heat(frame: FrameReport) -> bool:
    """Whether the report gives heat fluxes of this frame: none of a building where nothing may be concluded."""
    return frame.kind != "building" or frame.claim != "not valid"


def _film(t: NDArray[np.float32], around: Surroundings, values: dict[str, np.float64]) -> Json:
    """The film coefficient [W m⁻² K⁻¹] over the temperatures of the frame: one number where it is the same for all."""
    low, high = float(np.nanmin(t)), float(np.nanmax(t))
    nodes = np.linspace(low, max(high, low + 1e-3), _FILM_NODES)
    films = np.broadcast_to(film_of(nodes, around, values), nodes.shape)
    if not np.isfinite(films).all():
        return _NO_FILM
    if np.ptp(films) < 1e-9:
        films = films[:1]
    return {"low": low, "high": float(nodes[-1]), "values": [float(f"{film:.7g}") for film in films]}
