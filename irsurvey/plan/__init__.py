"""What a survey will be able to show, told before anybody goes out: from its survey file alone, no frame is read."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from math import isfinite, nan
from statistics import NormalDist

from irsurvey.analysis.correction import Optics
from irsurvey.analysis.inputs import inputs
from irsurvey.assess.severity import LEAST_EMISSIVITY
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.errors import Fault, UsageError
from irsurvey.geometry.footprint import largest_distance, pixel_area, pixel_side, spot_size
from irsurvey.model import FrameTask, Input, Scene, Survey
from irsurvey.plan.gains import Gain, gains
from irsurvey.plan.picture import CORNER, MIDDLE, PANEL, TARGET, Picture, imagined, ready, t_wall

__all__ = ["ASSUMED", "OVER_AMBIENT", "U_VALUES", "Difference", "Gain", "Prospect", "Sizes", "WallU", "plan"]

U_VALUES = (0.3, 0.5, 1.5)
"""Walls [W m⁻² K⁻¹] whose U is asked about: well insulated, insulated once, hardly insulated."""
SURE = 0.95
"""Probability from which a difference can be claimed."""
OVER_AMBIENT = "over ambient air"
ASSUMED = (
    "what is sound is as warm as the air it faces; a wall of known U as warm as that leaves it",
    "a region is three measurement spots across, its reference area in the middle of the picture and half as high",
    f"a panel of known temperature is matt (emissivity {PANEL[0]} ± {2 * PANEL[1]}) and as warm as the air it is in",
    "uncertainties are propagated to first order; those not stated are the defaults",
)
"""What every answer rests on beside the survey file."""

_FARTHEST = 100.0
"""Differences [K] beyond it are not looked for."""
_IDLE = ("known", "hours", "outdoor_24h", "sky", "ground", "irradiance", "pressure_difference")
"""Beginnings of the names of quantities that no answer depends on."""


@dataclass(frozen=True, slots=True)
class Difference:
    """A temperature difference [K] as it will be read at one place of a picture; None: there is none such.

    `u` at the nominal contrast.  `claimed`: the smallest |ΔT| read for which P(|ΔT| > threshold) ≥ 95 %, which is
    threshold + 1.645 u; None as well where the surface is too reflective for a claim.  `told_apart`: the smallest
    whose 95 % interval leaves out 0.  Both with the u they have themselves.
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
    gains: tuple[Gain, ...]  # alone


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
    """What frames alike in all that matters will show; temperature differences [K], `threshold` the least that counts.

    `seen` names surfaces or components; none stands for the target.  `against` is "reference area" or "twin".
    """

    group: str | None
    frames: tuple[str, ...]
    camera: str
    kind: str
    seen: tuple[str, ...]
    against: str
    through_window: bool
    emissivity: float
    distance: float  # [m]
    threshold: float
    contrast: float
    differences: tuple[Difference, ...]
    air_c: tuple[float, float] | None  # indoors and outdoors, where both are stated
    walls: tuple[WallU, ...]  # of the target, seen from inside
    sizes: Sizes | None  # None: the camera's IFOV is not stated
    assumed: dict[str, Input]


@dataclass(frozen=True, slots=True)
class _Case:
    """Frames alike in all that matters: the first of them, made ready, and the optics of what is seen."""

    task: FrameTask
    against: str
    optics: Optics
    frames: tuple[str, ...] = ()
    seen: tuple[str, ...] = ()


def plan(survey: Survey, *, contrast: float | None = None, size: float = 0.02) -> tuple[Prospect, ...]:
    """What the frames of a survey will show, one answer for all that are alike; no frame needs to exist.

    `contrast` [K] is the difference to be read, by default the smallest that counts; `size` [m] a part to be read.
    """
    return tuple(_prospect(case, contrast, size) for case in _cases(survey))


def _prospect(case: _Case, contrast: float | None, size: float) -> Prospect:
    threshold = imagined(case.task, case.optics).threshold
    asked = threshold if contrast is None else contrast
    picture = imagined(case.task, case.optics, contrast=asked)
    number = "delta_similar" if case.against == "twin" else "delta"
    if (MIDDLE, number) not in picture:
        expected = "a difference that what is seen can have"
        raise UsageError(Fault("--contrast-k", expected, f"{asked:g}", "ask for a smaller one"))
    numbers = {"in the middle": (MIDDLE, number), "near a corner": (CORNER, number)}
    if case.task.kind == "electrical":
        numbers[OVER_AMBIENT] = (MIDDLE, "delta_ambient")
    return Prospect(
        group=case.task.group,
        frames=case.frames,
        camera=case.task.camera.name,
        kind=case.task.kind,
        seen=case.seen,
        against=case.against,
        through_window=case.task.has_window,
        emissivity=picture.scene[case.optics[0]].value,
        distance=picture.scene["distance"].value,
        threshold=threshold,
        contrast=asked,
        differences=tuple(_difference(case, place, number, picture) for place, number in numbers.items()),
        air_c=_air_c(picture.scene),
        walls=tuple(_walls(case, picture)),
        sizes=_sizes(case.task, size),
        assumed={key: entry for key, entry in inputs(picture.scene).items() if entry.from_ == "default"},
    )


def _difference(case: _Case, place: str, number: tuple[str, str], picture: Picture) -> Difference:
    margin = NormalDist().inv_cdf(SURE)

    def u(delta: float) -> float:
        return _or_nan(imagined(case.task, case.optics, contrast=delta).estimate(number).u)

    def half_width(delta: float) -> float:
        read = imagined(case.task, case.optics, contrast=delta).estimate(number)
        return 1.96 * _or_nan(read.u) if read.interval_95 is None else (read.interval_95[1] - read.interval_95[0]) / 2

    can_claim = picture.scene[case.optics[0]].value >= LEAST_EMISSIVITY
    return Difference(
        place,
        u=picture.estimate(number).u,
        claimed=_least(lambda delta: picture.threshold + margin * u(delta), picture.threshold) if can_claim else None,
        told_apart=_least(half_width, picture.threshold),
        gains=gains(picture.budget, picture.index(number)),
    )


def _least(required: Callable[[float], float], start: float) -> float | None:
    """The difference that is as large as it is itself required to be [K]; None where there is none."""
    delta = start
    for _ in range(50):
        before, delta = delta, required(delta)
        if not delta < _FARTHEST:
            return None
        if abs(delta - before) < 1e-4:
            return delta
    return None


def _walls(case: _Case, picture: Picture) -> Iterator[WallU]:
    """U-values, where they can be told: of the target, from inside, with a difference of air temperatures."""
    number, values = ("", "u_value"), picture.scene.values()
    if case.task.viewed_from != "inside" or case.optics != TARGET or number not in picture:
        return
    if values["indoor_air"] == values["outdoor_air"]:
        return
    for u_value in U_VALUES:
        t = t_wall(u_value, picture)
        alone, helped = (imagined(case.task, TARGET, t_sound=t, with_panel=panel) for panel in (False, True))
        yield WallU(
            u_value,
            alone=_relative(alone, number, u_value),
            with_panel=_relative(helped, number, u_value),
            gains=gains(alone.budget, alone.index(number)),
        )


def _relative(picture: Picture, number: tuple[str, str], value: float) -> float | None:
    u = _or_nan(picture.estimate(number).u)
    return 2 * u / value if isfinite(u) else None


def _air_c(scene: Scene) -> tuple[float, float] | None:
    if "indoor_air" not in scene or "outdoor_air" not in scene:
        return None
    return scene["indoor_air"].value - ZERO_CELSIUS, scene["outdoor_air"].value - ZERO_CELSIUS


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
    for task in map(ready, survey.tasks):
        scene = task.scene
        conditions = tuple(
            (quantity.name, quantity.source == "log" or (quantity.value, quantity.u))
            for quantity in scene.quantities
            if ":" not in quantity.name and not quantity.name.startswith(_IDLE)
        )
        who = (task.group, task.camera.name, task.kind, task.viewed_from, task.has_window)
        how = (task.detection, task.convection, task.surface_height, conditions)
        for name, against, optics in _seen(task):
            own = tuple((scene[part].value, scene[part].u) for part in optics)
            key = (who, how, against, name is None, own)
            case = found.get(key) or _Case(task, against, optics)
            names = case.seen if name is None else tuple(dict.fromkeys((*case.seen, name)))
            found[key] = replace(case, frames=tuple(dict.fromkeys((*case.frames, task.id))), seen=names)
    return list(found.values())


def _seen(task: FrameTask) -> Iterator[tuple[str | None, str, Optics]]:
    """Name, what it is compared with, and optics of the target, of surfaces with optics of their own, of components."""
    yield None, "reference area", TARGET
    for surface in task.surfaces:
        if surface.role == "inspect" and (surface.emissivity, surface.reflected) != TARGET:
            yield surface.name, "reference area", (surface.emissivity, surface.reflected)
    for component in task.components:
        yield component.name, "twin", (component.emissivity, component.reflected)


def _or_nan(number: float | None) -> float:
    return nan if number is None else number
