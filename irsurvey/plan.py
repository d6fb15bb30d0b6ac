"""What a survey will be able to show, answered before anybody goes out: from its survey file alone, no frame is read.

A picture is imagined for every camera, group and surface the file names, and measured as a real one would be.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass, replace
from functools import cache
from math import isfinite, sqrt
from statistics import NormalDist

import numpy as np

from irsurvey.analysis.correction import air_path, correct
from irsurvey.analysis.inputs import inputs
from irsurvey.analysis.measurand import Numbers, Twin, flux_of, names, stacked
from irsurvey.analysis.planning import Planned, planned
from irsurvey.analysis.regions import screen
from irsurvey.assess.next_visit import measurements
from irsurvey.geometry.footprint import largest_distance, pixel_area, pixel_side, spot_size
from irsurvey.heat.surface import outward_sign
from irsurvey.model import Component, Estimate, Frame, FrameTask, Input, Quantity, Scene, Signal, Surface, Survey
from irsurvey.radiometry.measurement import apparent_temperature
from irsurvey.survey.defaults import defaults
from irsurvey.uncertainty import Budget, propagate

U_VALUES = (0.3, 0.5, 1.5)
"""Walls [W m⁻² K⁻¹] whose U is asked about: well insulated, insulated once, hardly insulated."""
SURE = 0.95
UNKNOWN_NOISE = 0.1
"""Noise at 30 °C [K] of a camera that does not state it: the wide end of 30 to 100 mK (common practice)."""
PANEL = (0.95, 0.02)
"""Emissivity of a matt panel of known temperature, and its standard uncertainty (common practice)."""
MIDDLE, CORNER, OVER_AMBIENT = "in the middle", "near a corner", "over ambient air"
ASSUMED = (
    "what is sound is as warm as the air it faces; for U, as warm as that U leaves it",
    "a region is three measurement spots across; a reference area as wide and high as half the frame is in its middle",
    f"the panel of known temperature is matt, {PANEL[0]} ± {PANEL[1]} (k = 1), and as warm as the air on its side",
    "uncertainty to first order; a region in a corner is compared with the middle, where shading differs most",
)
"""What every answer rests on beside the survey file."""

_CENTRES = {"middle": (0.5, 0.5), "corner": (1.0, 1.0), "twin": (0.35, 0.5), "panel": (0.5, 0.1)}
"""Where things are in the imagined picture, x and y as shares of what leaves them whole."""
_OF_NOISE, _OF_SHADING = ("noise", "selection", "slope_x", "slope_y"), ("shading", "shading_x", "shading_y")
_ADVICE = {
    "noise": "use a quieter camera, or go closer: more pixels average more",
    "shading": "keep what is compared near the middle, or subtract a frame of a uniform surface",
    "size_of_source": "go closer or take a longer lens",
    "camera_gain": "have the camera calibrated",
    "convection": "choose the correlation that fits the surface; measure the wind, or the flux on one spot",
    "mean_radiant": "read the surfaces opposite and take their mean",
    "atmosphere": "go closer",
    "view_angle": "stand square to the surface",
    "outline": "draw outlines at the steepest edge",
}
"""What to do about an input that no single measurement settles."""


@dataclass(frozen=True, slots=True)
class Gain:
    """An input's share in the variance of a number, u of that number once the input is known twice as well, and how."""

    input: str  # without unit and owner
    share: float
    u_halved: float
    how: str


@dataclass(frozen=True, slots=True)
class Difference:
    """A temperature difference [K] as it will be read at one place of a picture; None: there is none such.

    `u` at the nominal contrast.  `claimed`: the smallest |ΔT| read for which P(|ΔT| > threshold) ≥ 95 %, which is
    threshold + 1.645 u there; `told_apart`: the smallest whose 95 % interval leaves out 0.
    """

    place: str
    u: float | None
    claimed: float | None
    told_apart: float | None
    gains: tuple[Gain, ...]


@dataclass(frozen=True, slots=True)
class WallU:
    """Relative expanded uncertainty (k = 2) of a U-value [W m⁻² K⁻¹], alone and with a panel of known temperature."""

    value: float
    alone: float | None
    with_panel: float | None
    gains: tuple[Gain, ...]


@dataclass(frozen=True, slots=True)
class Sizes:
    """What the camera resolves there: side of a pixel and of a measurement spot, which is the smallest part that can
    be read [m], the smallest region that counts [m²], and from how far a part of the size asked about can be read [m].
    """

    pixel: float
    spot: float
    least_area: float
    farthest: float


@dataclass(frozen=True, slots=True)
class Prospect:
    """What one kind of picture will show; distance [m], threshold (the smallest ΔT that counts) and contrast [K]."""

    where: str  # group, or the first frames
    camera: str
    kind: str
    seen: tuple[str, ...]  # surfaces or components; none: the target
    against: str  # "reference area" | "twin"
    emissivity: float
    distance: float
    threshold: float
    contrast: float
    differences: tuple[Difference, ...]
    walls: tuple[WallU, ...]
    sizes: Sizes | None  # None: ifov_mrad not stated
    assumed: dict[str, Input]


@dataclass(frozen=True, slots=True)
class _Case:
    """Frames alike in what matters: the first one, made ready; optics of what is seen are names in its scene."""

    task: FrameTask
    frames: tuple[str, ...]
    seen: tuple[str, ...]
    against: str
    optics: tuple[str, str]


def plan(survey: Survey, *, contrast: float | None = None, size: float = 0.02) -> tuple[Prospect, ...]:
    """What the frames of a survey will show, one answer for all that are alike; no frame needs to exist.

    `contrast` [K] is the difference to be read, by default the smallest that counts; `size` [m] a part to be read.
    """
    return tuple(_prospect(case, contrast, size) for case in _cases(survey))


def _prospect(case: _Case, contrast: float | None, size: float) -> Prospect:
    task, scene = case.task, case.task.scene
    threshold = _imagined(case).min_delta
    nominal = threshold if contrast is None else contrast
    wanted = {MIDDLE: ("middle", "delta"), CORNER: ("corner", "delta")}
    if case.against == "twin":
        wanted = {place: (region, "delta_similar") for place, (region, _) in wanted.items()}
    if task.kind == "electrical":
        wanted[OVER_AMBIENT] = ("middle", "delta_ambient")
    at_nominal = _imagined(case, contrast=nominal)
    differences = tuple(_difference(case, place, number, at_nominal, threshold) for place, number in wanted.items())
    walls = tuple(_wall(case, value) for value in U_VALUES) if _shows_u(case) else ()
    camera = task.camera
    sizes = None
    if camera.ifov is not None:
        distance, pixels = scene["distance"].value, camera.spot_pixels
        area = task.detection.min_area or task.detection.min_pixels * float(
            pixel_area(distance, camera.ifov, scene["view_angle"].value)
        )
        sides = pixel_side(distance, camera.ifov), spot_size(distance, camera.ifov, pixels)
        sizes = Sizes(*map(float, sides), area, float(largest_distance(size, camera.ifov, pixels)))
    return Prospect(
        where=task.group or ", ".join(case.frames[:3]) + (" …" if len(case.frames) > 3 else ""),
        camera=camera.name,
        kind=task.kind,
        seen=case.seen,
        against=case.against,
        emissivity=scene[case.optics[0]].value,
        distance=scene["distance"].value,
        threshold=threshold,
        contrast=nominal,
        differences=differences,
        walls=walls,
        sizes=sizes,
        assumed={key: entry for key, entry in inputs(at_nominal.planned.scene).items() if entry.from_ == "default"},
    )


def _difference(
    case: _Case, place: str, number: tuple[str, str], at_nominal: _Imagined, threshold: float
) -> Difference:
    margin = NormalDist().inv_cdf(SURE)

    def of(delta: float) -> Estimate:
        return _imagined(case, contrast=delta).estimate(number)

    return Difference(
        place,
        _known(at_nominal.estimate(number).u),
        _least(lambda delta: threshold + margin * (of(delta).u or np.nan), threshold),
        _least(lambda delta: _half_width(of(delta)), threshold),
        at_nominal.gains(number),
    )


def _wall(case: _Case, value: float) -> WallU:
    sound = _surface_at(case, value)
    alone, helped = (_imagined(case, t_sound=sound, with_panel=panel) for panel in (False, True))
    relative = [_known(2 * (one.estimate(("", "u_value")).u or np.nan) / value) for one in (alone, helped)]
    return WallU(value, relative[0], relative[1], alone.gains(("", "u_value")))


@dataclass(frozen=True, slots=True, eq=False)
class _Imagined:
    """One imagined picture, measured."""

    min_delta: float
    planned: Planned
    budget: Budget
    names: tuple[tuple[str, str], ...]

    def estimate(self, number: tuple[str, str]) -> Estimate:
        """One of its numbers [SI]; NaN where it does not exist."""
        return self.budget.estimates()[self.names.index(number)] or Estimate(np.nan, None)

    def gains(self, number: tuple[str, str], count: int = 3) -> tuple[Gain, ...]:
        """The inputs that make a number most uncertain; those of one cause, such as noise, together."""
        index, budget = self.names.index(number), self.budget
        if not isfinite(budget.u[index]):
            return ()
        causes: dict[str, list[str]] = {}
        for name in budget.names:
            causes.setdefault(_cause(name), []).append(name)
        shares = {term.name: term.share for term in budget.terms(index)}
        found = []
        for cause, members in causes.items():
            halves = np.array([[0.5 if name in members else 1.0] for name in budget.names])
            u = float(replace(budget, half_swings=budget.half_swings * halves).u[index])
            found.append(Gain(cause, sum(shares[name] for name in members), u, _advice(cause)))
        return tuple(sorted(found, key=lambda gain: gain.u_halved)[:count])


def _imagined(
    case: _Case, *, contrast: float = 0.0, t_sound: float | None = None, with_panel: bool = False
) -> _Imagined:
    """A picture of something sound at `t_sound` [K] with two places that deviate by `contrast` [K], as heat loss does.

    Taken without noise, so that nothing is left to chance; its noise is in the uncertainty.
    """
    task, values = case.task, case.task.scene.values()
    side = max(3 * task.camera.spot_pixels, 9)
    rows = max(120, 12 * side)
    shape = (rows, rows * 4 // 3)
    boxes = {name: _box(centre, side, shape) for name, centre in _CENTRES.items()}
    sign = float(outward_sign(task.viewed_from, *(values.get(name, np.nan) for name in ("indoor_air", "outdoor_air"))))
    t = values[_air_of(task)] if t_sound is None else t_sound
    stored = np.full(shape, _seen_as(task, t, ("emissivity", "reflected")))
    for name in ("middle", "corner", "twin"):
        at = t if name == "twin" else t + sign * contrast
        stored[_pixels(boxes[name])] = _seen_as(task, at, case.optics)
    for name in ("middle", "corner"):  # a thousandth warmer, so that the spot that is read is the one in its middle
        stored[_pixels(_shrunk(boxes[name], task.camera.spot_pixels))] += 1e-3
    surfaces: tuple[Surface, ...] = ()
    if with_panel:
        panel = Quantity("temperature:panel", values[_air_of(task)], defaults("stated")["known_temperature_k"].u)
        optics = ("emissivity:panel", "reflected")
        scene = task.scene.with_(panel, Quantity(optics[0], *PANEL, low=0.0, high=1.0))
        task = replace(task, scene=scene)
        surfaces = (Surface("panel", _corners(boxes["panel"]), "known-temperature", *optics, panel.name),)
        stored[_pixels(boxes["panel"])] = _seen_as(task, panel.value, optics)
    drawn = tuple(
        Component(name, _corners(boxes[name]), emissivity=case.optics[0], reflected=case.optics[1])
        for name in ("middle", "corner", "twin")
    )
    half = (shape[1] / 4, shape[0] / 4, 3 * shape[1] / 4, 3 * shape[0] / 4)
    task = replace(task, surfaces=surfaces, components=drawn, reference=_corners(half))
    corrected = correct(Frame(stored, ""), task)
    screened = screen(corrected, task)
    measured = planned(corrected, screened, task)
    parts = measured.plan.components
    like_parts = parts if task.kind == "electrical" else ()
    twins = dict.fromkeys(("middle", "corner"), Twin("twin", 1.0)) if like_parts else {}
    measured = replace(measured, plan=replace(measured.plan, regions=parts[:2], components=like_parts, twins=twins))
    budget = propagate(lambda columns: stacked(measured.plan, columns), measured.scene)
    return _Imagined(screened.min_delta, measured, budget, names(measured.plan, measured.scene))
