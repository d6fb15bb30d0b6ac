"""A picture that nobody has taken yet, imagined from what a survey file says and measured as a real one is."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import nan

import numpy as np

from irsurvey.analysis.correction import Optics, air_path, correct
from irsurvey.analysis.exchange import Surroundings, flux_of
from irsurvey.analysis.measurand import Twin, names, stacked
from irsurvey.analysis.planning import planned
from irsurvey.analysis.regions import screen
from irsurvey.heat.surface import outward_sign
from irsurvey.model import Component, Estimate, Frame, FrameTask, Polygon, Quantity, Scene, Signal, Surface
from irsurvey.radiometry.measurement import apparent_temperature
from irsurvey.survey.defaults import defaults
from irsurvey.uncertainty import Budget, propagate

TARGET: Optics = ("emissivity", "reflected")
UNKNOWN_NOISE = 0.1
"""Noise at 30 °C [K] of a camera that does not state it: the wide end of 30 to 100 mK (common practice)."""
PANEL = (0.95, 0.02)
"""Emissivity of a matt panel of known temperature, and its standard uncertainty (common practice)."""

MIDDLE, CORNER = "middle", "corner"
_TWIN, _PANEL = "twin", "panel"
_CENTRES = {MIDDLE: (0.5, 0.5), CORNER: (0.95, 0.95), _TWIN: (0.3, 0.5), _PANEL: (0.5, 0.05)}
"""Where the places of a picture lie, as shares of its width and height less their own."""

Box = tuple[slice, slice]
"""Rows and columns."""


@dataclass(frozen=True, slots=True, eq=False)
class Picture:
    """One imagined picture, measured: ΔT of its places, U and flux of what is sound, as numbers of `measurand`."""

    threshold: float  # the smallest ΔT that counts [K]
    scene: Scene
    surroundings: Surroundings
    names: tuple[tuple[str, str], ...]
    budget: Budget

    def __contains__(self, number: tuple[str, str]) -> bool:
        return number in self.names

    def index(self, number: tuple[str, str]) -> int:
        """Place of a number in its budget."""
        return self.names.index(number)

    def estimate(self, number: tuple[str, str]) -> Estimate:
        """One of its numbers [SI]; NaN where it does not exist."""
        return self.budget.estimates()[self.index(number)] or Estimate(nan, None)


def ready(task: FrameTask) -> FrameTask:
    """The task of a frame that does not exist yet: nothing in it has been drawn or measured.

    A reflected temperature that is to be read from foil is taken as that of what the surface faces, with the
    camera's own error."""
    camera, scene = task.camera, task.scene
    if "reflected" not in scene:
        faced = scene["mean_radiant" if "mean_radiant" in scene else "air"].value
        scene = scene.with_(Quantity("reflected", faced, camera.accuracy / 3**0.5, low=0.0))
    signal, noise = Signal("apparent-temperature"), camera.noise or UNKNOWN_NOISE
    camera = replace(camera, signal=signal, range=None, noise=noise)
    return replace(task, camera=camera, scene=scene, inspect=None, known_scale=None, strips=(), pair=None)


def imagined(
    task: FrameTask,
    optics: Optics,
    *,
    contrast: float = 0.0,
    t_sound: float | None = None,
    with_panel: bool = False,
) -> Picture:
    """A picture of what is sound, at `t_sound` [K] (default: the air it faces), and of places that deviate from it.

    `task` is a `ready` one.  Places three measurement spots across, of these `optics`, deviate by `contrast` [K]
    as heat loss does: one in the middle, one near a corner.  The reference area, half the picture high, is in the
    middle, a sound twin beside it.  Nothing is left to chance: the picture has no noise, its uncertainty has.
    """
    spot = task.camera.spot_pixels
    shape = (max(120, 24 * spot), max(160, 32 * spot))
    boxes = {name: _box(centre, 3 * spot, shape) for name, centre in _CENTRES.items()}
    t = _air_faced(task) if t_sound is None else t_sound
    airs = (task.scene.value(name) or nan for name in ("indoor_air", "outdoor_air"))
    deviating = t + float(outward_sign(task.viewed_from, *airs)) * contrast

    places = {MIDDLE: deviating, CORNER: deviating, _TWIN: t}
    stored = np.full(shape, _apparent(t, TARGET, task))
    for name, t_object in places.items():
        stored[boxes[name]] = _apparent(t_object, optics, task)
    for name in (MIDDLE, CORNER):  # warmer by a thousandth, so that the spot in its middle is the one that is read
        rows, columns = boxes[name]
        stored[rows.start + spot : rows.stop - spot, columns.start + spot : columns.stop - spot] += 1e-3
    task = replace(
        task,
        surfaces=(),
        components=tuple(Component(name, _corners(boxes[name]), None, None, None, None, *optics) for name in places),
        reference=_corners(_box((0.5, 0.5), shape[0] // 2, shape)),
    )
    if with_panel:
        task, panel = _with_panel(task, boxes[_PANEL])
        stored[boxes[_PANEL]] = panel
    return _measured(Frame(stored, ""), task)


def t_wall(u_value: float, picture: Picture) -> float:
    """Inner surface temperature [K] of a wall of this U [W m⁻² K⁻¹], at the flux a picture would tell it by."""
    scene, around = picture.scene, picture.surroundings
    columns = {name: np.full((1, 1), value) for name, value in scene.values().items()}
    t = scene[around.air].value + around.sign * np.linspace(-60, 60, 6001)  # the flux grows along it
    across = abs(scene["indoor_air"].value - scene["outdoor_air"].value)
    return float(np.interp(u_value * across, flux_of(t[None, :], TARGET[0], around, columns)[0], t))


def _measured(frame: Frame, task: FrameTask) -> Picture:
    corrected = correct(frame, task)
    screened = screen(corrected, task)
    measured = planned(corrected, screened, task)
    parts = measured.plan.components
    plan = replace(
        measured.plan,
        regions=parts[:2],  # the deviating ones, as findings are
        components=parts if task.kind == "electrical" else (),
        twins=dict.fromkeys((MIDDLE, CORNER), Twin(_TWIN, 1.0)),
    )
    budget = propagate(lambda columns: stacked(plan, columns), measured.scene)
    return Picture(screened.min_delta, measured.scene, plan.surroundings, names(plan, measured.scene), budget)


def _with_panel(task: FrameTask, box: Box) -> tuple[FrameTask, float]:
    """The task with a panel as warm as the air, known by a contact thermometer, and what it looks like [K]."""
    known = Quantity("temperature:panel", _air_faced(task), defaults("stated")["known_temperature_k"].u)
    optics = ("emissivity:panel", "reflected")
    scene = task.scene.with_(known, Quantity(optics[0], *PANEL, low=0.0, high=1.0))
    surface = Surface(_PANEL, _corners(box), "known-temperature", *optics, known.name)
    task = replace(task, scene=scene, surfaces=(surface,))
    return task, _apparent(known.value, optics, task)


def _air_faced(task: FrameTask) -> float:
    """Temperature [K] of the air on the side that is seen."""
    side = {"inside": "indoor_air", "outside": "outdoor_air"}.get(task.viewed_from or "", "ambient")
    return task.scene[side if side in task.scene else "air"].value


def _apparent(t_object: float, optics: Optics, task: FrameTask) -> float:
    values = task.scene.values()
    emissivity, t_reflected = (values[name] for name in optics)
    return float(apparent_temperature(t_object, emissivity, t_reflected, air_path(values), task.camera.band))


def _box(centre: tuple[float, float], side: int, shape: tuple[int, int]) -> Box:
    left, top = (round(share * (length - side)) for share, length in zip(centre, shape[::-1], strict=True))
    return slice(top, top + side), slice(left, left + side)


def _corners(box: Box) -> Polygon:
    top, bottom, left, right = box[0].start, box[0].stop - 1, box[1].start, box[1].stop - 1
    return (left, top), (right, top), (right, bottom), (left, bottom)
