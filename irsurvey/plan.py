"""What a survey will be able to show, answered before anybody goes out: from its survey file alone, no frame is read.

A picture is imagined for every camera, group and surface the file names, and measured as a real one is.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from math import isfinite, nan
from statistics import NormalDist

import numpy as np

from irsurvey.analysis.correction import air_path, correct
from irsurvey.analysis.inputs import inputs
from irsurvey.analysis.measurand import Optics, Surroundings, Twin, flux_of, names, stacked
from irsurvey.analysis.planning import planned
from irsurvey.analysis.regions import screen
from irsurvey.assess.next_visit import measurements
from irsurvey.geometry.footprint import largest_distance, pixel_area, pixel_side, spot_size
from irsurvey.heat.surface import outward_sign
from irsurvey.model import (
    Component,
    Estimate,
    Frame,
    FrameTask,
    Input,
    Polygon,
    Quantity,
    Scene,
    Signal,
    Surface,
    Survey,
)
from irsurvey.radiometry.measurement import apparent_temperature
from irsurvey.survey.defaults import defaults
from irsurvey.uncertainty import Budget, propagate

U_VALUES = (0.3, 0.5, 1.5)
"""Walls [W m⁻² K⁻¹] whose U is asked about: well insulated, insulated once, hardly insulated."""
SURE = 0.95
"""Probability from which a difference can be claimed."""
UNKNOWN_NOISE = 0.1
"""Noise at 30 °C [K] of a camera that does not state it: the wide end of 30 to 100 mK (common practice)."""
PANEL = (0.95, 0.02)
"""Emissivity of a matt panel of known temperature, and its standard uncertainty (common practice)."""
MIDDLE, CORNER, OVER_AMBIENT = "in the middle", "near a corner", "over ambient air"
ASSUMED = (
    "what is sound is as warm as the air it faces; for U, as warm as a wall of that U",
    "a region is three measurement spots across; its reference area, half the picture wide and high, is in the middle",
    f"the panel of known temperature is matt, emissivity {PANEL[0]} ± {2 * PANEL[1]}, and as warm as the air it is in",
    "uncertainties are propagated to first order",
)
"""What every answer rests on beside the survey file."""

_FARTHEST = 100.0
"""Differences [K] beyond it are not looked for."""
_CENTRES = {"middle": (0.5, 0.5), "corner": (0.95, 0.95), "twin": (0.3, 0.5), "panel": (0.5, 0.05)}
"""Where the places of an imagined picture lie, as shares of its width and height less their own."""
_CAUSES = {"selection": "noise", "slope_x": "noise", "slope_y": "noise", "shading_x": "shading", "shading_y": "shading"}
"""Inputs that go back to another one: who improves that improves them."""
_ADVICE = {
    "noise": "Use a quieter camera, or go closer: more pixels average more",
    "shading": "Keep what is compared near the middle, or subtract a frame of a uniform surface",
    "size_of_source": "Go closer or take a longer lens",
    "camera_gain": "Have the camera calibrated",
    "convection": "Choose the correlation that fits the surface; outside, measure the wind",
    "mean_radiant": "Read the surfaces opposite and take their mean",
    "atmosphere": "Go closer",
    "view_angle": "Stand square to the surface",
    "outline": "Draw outlines along the steepest edge",
}
"""What to do about an input that no single measurement settles."""
_IDLE = ("known", "hours", "outdoor_24h", "sky", "ground", "irradiance", "pressure_difference")
"""Beginnings of the names of quantities that no number of a plan depends on."""


@dataclass(frozen=True, slots=True)
class Gain:
    """An input's share in the variance of a number, what u of that number is once it is known twice as well, and how.

    `input` is a name in the Scene, without its owner."""

    input: str
    share: float
    u_halved: float
    how: str


@dataclass(frozen=True, slots=True)
class Difference:
    """A temperature difference [K] as it will be read at one place of a picture; None: there is none such.

    `u` at the nominal contrast.  `claimed`: the smallest |ΔT| read for which P(|ΔT| > threshold) ≥ 95 %, which is
    threshold + 1.645 u; `told_apart`: the smallest whose 95 % interval leaves out 0.  Both with u where they lie.
    """

    place: str
    u: float | None
    claimed: float | None
    told_apart: float | None
    gains: tuple[Gain, ...]


@dataclass(frozen=True, slots=True)
class WallU:
    """Relative expanded uncertainty (k = 2) of a U-value [W m⁻² K⁻¹], alone and with a panel of known temperature."""

    u_value: float
    alone: float | None
    with_panel: float | None
    gains: tuple[Gain, ...]  # alone; `u_halved` [W m⁻² K⁻¹]


@dataclass(frozen=True, slots=True)
class Sizes:
    """What is resolved: side of a pixel and of a measurement spot, which is the smallest part that can be read [m];
    the smallest region that counts [m²]; and from how far a part of the size asked about can be read [m]."""

    pixel: float
    spot: float
    least_area: float
    farthest: float


@dataclass(frozen=True, slots=True)
class Prospect:
    """What frames alike in all that matters will show; temperatures differences [K], `threshold` the least that counts.

    `against` is "reference area" or "twin"; `seen` names surfaces or components, none stands for the target.
    """

    where: str  # group, or the first frames
    camera: str
    kind: str
    seen: tuple[str, ...]
    against: str
    emissivity: float
    distance: float  # [m]
    threshold: float
    contrast: float
    differences: tuple[Difference, ...]
    walls: tuple[WallU, ...]  # seen from inside with both air temperatures stated
    sizes: Sizes | None  # None: the camera's IFOV is not stated
    assumed: dict[str, Input]


@dataclass(frozen=True, slots=True)
class _Case:
    """Frames alike in all that matters: the first of them, ready to be imagined, and the optics of what is seen."""

    task: FrameTask
    frames: tuple[str, ...]
    seen: tuple[str, ...]
    against: str
    optics: Optics


@dataclass(frozen=True, slots=True, eq=False)
class _Picture:
    """One imagined picture, measured."""

    threshold: float
    scene: Scene
    surroundings: Surroundings
    names: tuple[tuple[str, str], ...]
    budget: Budget

    def of(self, number: tuple[str, str]) -> Estimate:
        """One of its numbers [SI]; NaN where it does not exist."""
        return self.budget.estimates()[self.names.index(number)] or Estimate(nan, None)

    def gains(self, number: tuple[str, str]) -> tuple[Gain, ...]:
        """The three causes that most is gained from, the best first; none where no uncertainty exists."""
        index = self.names.index(number)
        shares: dict[str, float] = {}
        for term in self.budget.terms(index):
            shares[_cause(term.name)] = shares.get(_cause(term.name), 0.0) + term.share
        known = {left.term: measurement.how for measurement in measurements() for left in measurement.leaves}
        found = []
        for cause, share in shares.items():
            halves = np.array([[0.5 if _cause(name) == cause else 1.0] for name in self.budget.names])
            u = float(replace(self.budget, half_swings=self.budget.half_swings * halves).u[index])
            found.append(Gain(cause, share, u, _ADVICE.get(cause) or known.get(cause, "")))
        found.sort(key=lambda gain: gain.u_halved)
        return tuple(found[:3]) if isfinite(self.budget.u[index]) else ()


def plan(survey: Survey, *, contrast: float | None = None, size: float = 0.02) -> tuple[Prospect, ...]:
    """What the frames of a survey will show, one answer for all that are alike; no frame needs to exist.

    `contrast` [K] is the difference to be read, by default the smallest that counts; `size` [m] a part to be read.
    """
    return tuple(_prospect(case, contrast, size) for case in _cases(survey))


def _prospect(case: _Case, contrast: float | None, size: float) -> Prospect:
    threshold = _imagined(case).threshold
    nominal = _imagined(case, contrast=threshold if contrast is None else contrast)
    shown = "delta_similar" if case.against == "twin" else "delta"
    numbers = {MIDDLE: ("middle", shown), CORNER: ("corner", shown)}
    if case.task.kind == "electrical":
        numbers[OVER_AMBIENT] = ("middle", "delta_ambient")
    more = " …" if len(case.frames) > 3 else ""
    return Prospect(
        where=case.task.group or ", ".join(case.frames[:3]) + more,
        camera=case.task.camera.name,
        kind=case.task.kind,
        seen=case.seen,
        against=case.against,
        emissivity=nominal.scene[case.optics[0]].value,
        distance=nominal.scene["distance"].value,
        threshold=threshold,
        contrast=threshold if contrast is None else contrast,
        differences=tuple(_difference(case, place, number, nominal) for place, number in numbers.items()),
        walls=tuple(_walls(case, nominal)),
        sizes=_sizes(case.task, size),
        assumed={key: entry for key, entry in inputs(nominal.scene).items() if entry.from_ == "default"},
    )


def _difference(case: _Case, place: str, number: tuple[str, str], nominal: _Picture) -> Difference:
    margin = NormalDist().inv_cdf(SURE)

    def claimed(delta: float) -> float:
        return nominal.threshold + margin * _or_nan(_imagined(case, contrast=delta).of(number).u)

    def half_width(delta: float) -> float:
        read = _imagined(case, contrast=delta).of(number)
        return 1.96 * _or_nan(read.u) if read.interval_95 is None else (read.interval_95[1] - read.interval_95[0]) / 2

    fixed = (_fixed_point(least, nominal.threshold) for least in (claimed, half_width))
    return Difference(place, nominal.of(number).u, *fixed, nominal.gains(number))


def _walls(case: _Case, nominal: _Picture) -> Iterator[WallU]:
    """U-values, where they can be told: on the target, from inside, with a difference of air temperatures."""
    number, scene = ("", "u_value"), nominal.scene
    if case.seen or number not in nominal.names or scene["indoor_air"].value == scene["outdoor_air"].value:
        return
    for u_value in U_VALUES:
        t_sound = _t_wall(u_value, nominal, case.optics)
        alone, helped = (_imagined(case, t_sound=t_sound, with_panel=with_panel) for with_panel in (False, True))
        relative = (_or_none(2 * _or_nan(picture.of(number).u) / u_value) for picture in (alone, helped))
        yield WallU(u_value, *relative, alone.gains(number))


def _t_wall(u_value: float, nominal: _Picture, optics: Optics) -> float:
    """Surface temperature [K] that a wall of this U has inside."""
    scene, around = nominal.scene, nominal.surroundings
    columns = {name: np.full((1, 1), value) for name, value in scene.values().items()}
    t = scene[around.air].value + around.sign * np.linspace(-60, 60, 6001)  # flux grows along it
    flux = flux_of(t[None, :], optics, around, columns)[0]
    return float(np.interp(u_value * abs(scene["indoor_air"].value - scene["outdoor_air"].value), flux, t))


def _sizes(task: FrameTask, size: float) -> Sizes | None:
    camera, values = task.camera, task.scene.values()
    if camera.ifov is None:
        return None
    one_pixel = float(pixel_area(values["distance"], camera.ifov, values["view_angle"]))
    return Sizes(
        pixel=float(pixel_side(values["distance"], camera.ifov)),
        spot=float(spot_size(values["distance"], camera.ifov, camera.spot_pixels)),
        least_area=task.detection.min_area or task.detection.min_pixels * one_pixel,
        farthest=float(largest_distance(size, camera.ifov, camera.spot_pixels)),
    )


def _cases(survey: Survey) -> list[_Case]:
    """All that is to be seen, what is alike together; values of a log, which nobody chose, make no difference."""
    found: dict[tuple[object, ...], _Case] = {}
    for task in survey.tasks:
        ready = _ready(task)
        at_hand = ((q.name, q.source == "log" or (q.value, q.u)) for q in ready.scene.quantities)
        conditions = tuple(entry for entry in at_hand if ":" not in entry[0] and not entry[0].startswith(_IDLE))
        for seen, against, optics in _seen(task):
            own = tuple((ready.scene[name].value, ready.scene[name].u) for name in optics)
            key = (task.group, task.camera.name, task.kind, task.viewed_from, task.convection, task.surface_height)
            key = (*key, task.detection, against, bool(seen), own, conditions)
            case = found.setdefault(key, _Case(ready, (), (), against, optics))
            found[key] = replace(
                case,
                frames=tuple(dict.fromkeys((*case.frames, task.id))),
                seen=tuple(dict.fromkeys((*case.seen, *seen))),
            )
    return list(found.values())


def _seen(task: FrameTask) -> Iterator[tuple[tuple[str, ...], str, Optics]]:
    """The target, surfaces with optics of their own, components: name, what it is compared with, optics."""
    target = ("emissivity", "reflected")
    yield (), "reference area", target
    for surface in task.surfaces:
        if surface.role == "inspect" and (surface.emissivity, surface.reflected) != target:
            yield (surface.name,), "reference area", (surface.emissivity, surface.reflected)
    for component in task.components:
        yield (component.name,), "twin", (component.emissivity, component.reflected)


def _ready(task: FrameTask) -> FrameTask:
    """The task of a frame that does not exist yet: nothing of it has been drawn or measured."""
    camera, scene = task.camera, task.scene
    if "reflected" not in scene:  # to be read from foil: about what the surface faces, with the camera's own error
        seen = scene["mean_radiant"].value if "mean_radiant" in scene else scene["air"].value
        scene = scene.with_(Quantity("reflected", seen, camera.accuracy / 3**0.5, low=0.0))
    camera = replace(
        camera, signal=Signal("apparent-temperature"), range=None, noise=camera.noise or UNKNOWN_NOISE
    )
    return replace(task, camera=camera, scene=scene, inspect=None, known_scale=None)


def _imagined(
    case: _Case, *, contrast: float = 0.0, t_sound: float | None = None, with_panel: bool = False
) -> _Picture:
    """A picture of what is sound, at `t_sound` [K], and of two places that deviate by `contrast` [K], as heat loss does.

    It is taken without noise, so that nothing is left to chance; the noise is in its uncertainty.
    """
    task, scene = case.task, case.task.scene
    spot = task.camera.spot_pixels
    shape = (max(120, 24 * spot), max(160, 32 * spot))
    boxes = {name: _box(centre, 3 * spot, shape) for name, centre in _CENTRES.items()}
    side = {"inside": "indoor_air", "outside": "outdoor_air"}.get(task.viewed_from or "", "ambient")
    t_air = scene[side if side in scene else "air"].value
    t = t_air if t_sound is None else t_sound
    sign = outward_sign(task.viewed_from, *(scene.value(name) or nan for name in ("indoor_air", "outdoor_air")))

    surfaces: tuple[Surface, ...] = ()
    shown = {"middle": t + sign * contrast, "corner": t + sign * contrast, "twin": t}
    optics = dict.fromkeys(shown, case.optics)
    if with_panel:
        known = Quantity("temperature:panel", t_air, defaults("stated")["known_temperature_k"].u)
        scene = scene.with_(known, Quantity("emissivity:panel", *PANEL, low=0.0, high=1.0))
        shown["panel"], optics["panel"] = t_air, ("emissivity:panel", "reflected")
        surfaces = (Surface("panel", _corners(boxes["panel"]), "known-temperature", *optics["panel"], known.name),)

    def apparent(t_object: float, of: Optics) -> float:
        values = scene.values()
        return float(apparent_temperature(t_object, values[of[0]], values[of[1]], air_path(values), task.camera.band))

    stored = np.full(shape, apparent(t, ("emissivity", "reflected")))
    for name, t_object in shown.items():
        stored[boxes[name]] = apparent(t_object, optics[name])
    for name in ("middle", "corner"):  # warmer by a thousandth, so that the spot in its middle is the one that is read
        rows, columns = boxes[name]
        stored[rows.start + spot : rows.stop - spot, columns.start + spot : columns.stop - spot] += 1e-3

    parts = tuple(
        Component(name, _corners(boxes[name]), emissivity=case.optics[0], reflected=case.optics[1])
        for name in ("middle", "corner", "twin")
    )
    reference = _corners(_box((0.5, 0.5), shape[0] // 2, shape))
    drawn = replace(task, scene=scene, surfaces=surfaces, components=parts, reference=reference)
    corrected = correct(Frame(stored, ""), drawn)
    screened = screen(corrected, drawn)
    measured = planned(corrected, screened, drawn)
    regions = measured.plan.components
    whole = replace(
        measured.plan,
        regions=regions[:2],
        components=regions if task.kind == "electrical" else (),
        twins=dict.fromkeys(("middle", "corner"), Twin("twin", 1.0)),
    )
    budget = propagate(lambda columns: stacked(whole, columns), measured.scene)
    numbers = names(whole, measured.scene)
    return _Picture(screened.min_delta, measured.scene, whole.surroundings, numbers, budget)


def _box(centre: tuple[float, float], side: int, shape: tuple[int, int]) -> tuple[slice, slice]:
    """Rows and columns of a square in a picture."""
    left, top = (round(share * (length - side)) for share, length in zip(centre, shape[::-1], strict=True))
    return slice(top, top + side), slice(left, left + side)


def _corners(box: tuple[slice, slice]) -> Polygon:
    top, bottom, left, right = box[0].start, box[0].stop - 1, box[1].start, box[1].stop - 1
    return (left, top), (right, top), (right, bottom), (left, bottom)


def _fixed_point(least: Callable[[float], float], start: float) -> float | None:
    """Where a difference is as large as it must be by its own uncertainty [K]; None where it nowhere is."""
    delta = start
    for _ in range(50):
        before, delta = delta, least(delta)
        if not delta < _FARTHEST:
            return None
        if abs(delta - before) < 1e-4:
            return delta
    return None


def _cause(name: str) -> str:
    base = name.partition(":")[0]
    return _CAUSES.get(base, base)


def _or_nan(number: float | None) -> float:
    return nan if number is None else number


def _or_none(number: float) -> float | None:
    return number if isfinite(number) else None
