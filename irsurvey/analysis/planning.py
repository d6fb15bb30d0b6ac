"""From a screened frame to the plan of what is measured in it, and the scene with the noise of each area."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import cv2
import numpy as np

from irsurvey.analysis import imperfections
from irsurvey.analysis.correction import Corrected
from irsurvey.analysis.electrical import LEAST_WIND, PartFacts
from irsurvey.analysis.measurand import Area, Plan, Region, Twin, area
from irsurvey.analysis.regions import Screened, stretch_of
from irsurvey.analysis.strips import Drawn, drawn_strips
from irsurvey.analysis.surroundings import air_of, humidity_of, surroundings
from irsurvey.anomalies.patch import Patch, cropped
from irsurvey.anomalies.shape import Spot, extreme_spot
from irsurvey.assess.limits import lowest
from irsurvey.assess.pv import LEAST_NEIGHBOURS, neighbours, sound
from irsurvey.assess.twins import LOAD_EXPONENT, LOAD_EXPONENT_U, TwinPlan
from irsurvey.geometry.polygons import mask
from irsurvey.geometry.rectify import pixel_areas
from irsurvey.heat.wind import WIND_FACTOR_U
from irsurvey.model import Component, FrameTask, KnownLength, KnownRectangle, Quantity, Scene


@dataclass(frozen=True, slots=True, eq=False)
class Measured:
    """One region of interest: its pixels, its measurement spot, and what the plan holds of it."""

    patch: Patch
    sense: str
    spot: Spot
    centre: tuple[float, float]
    t_spot: float  # nominal mean over the spot [K]
    region: Region
    own: tuple[Quantity, ...]  # what the scene holds for it alone
    has_narrow_core: bool  # what is hottest or coldest in it is smaller than a measurement spot


@dataclass(frozen=True, slots=True, eq=False)
class Planned:
    """What is measured; a component without a measurable pixel is not among `components`."""

    plan: Plan
    scene: Scene
    anomalies: tuple[Measured, ...]
    components: dict[str, Measured]
    strips: tuple[Drawn, ...] = ()


def planned(corrected: Corrected, screened: Screened, task: FrameTask) -> Planned:
    """Fix masks, spots and weights of everything that is reported, and add to the scene what is each area's own."""
    anomalies = [
        measured
        for number, found in enumerate(screened.regions, start=1)
        if (measured := _measured(f"{task.id}-{number}", found.patch, found.sense, corrected, screened, task))
    ]
    shape = (screened.t.shape[0], screened.t.shape[1])
    components = {
        component.name: measured
        for component in task.components
        if (patch := cropped(mask(component.polygon, shape)))
        and (measured := _measured(component.name, patch, "hot", corrected, screened, task))
    }
    reference, tilts, own = _reference(corrected, screened, task)
    own = (*own, *(quantity for measured in (*anomalies, *components.values()) for quantity in measured.own))
    air = air_of(task, corrected.scene)
    strips = tuple(drawn_strips(corrected, screened, task)) if air else ()
    own = (*own, *(quantity for strip in strips for quantity in strip.own))
    scene = corrected.scene.with_(imperfections.SELECTION, *own)
    is_windy = task.kind == "electrical" and (scene.value("wind") or 0.0) > LEAST_WIND
    if is_windy:
        scene = scene.with_(Quantity("wind_factor", 1.0, WIND_FACTOR_U, "default", low=0.0))
    facts = {component.name: _facts(component, task) for component in task.components}
    if any(one.limit is not None and one.load_ratio is not None for one in facts.values()):
        scene = scene.with_(Quantity("load_exponent", LOAD_EXPONENT, LOAD_EXPONENT_U, "default"))
    plan = Plan(
        band=task.camera.band,
        pivot=corrected.pivot,
        surroundings=surroundings(task, scene),
        scale=_scale(task, scene),
        length_pixels=_length_pixels(task),
        reference=reference,
        tilts=tilts,
        regions=tuple(measured.region for measured in anomalies),
        components=tuple(measured.region for measured in components.values()),
        ambient=_ambient(scene),
        facts={name: _measurable(one, components) for name, one in facts.items()},
        is_windy=is_windy,
        bridges=tuple(strip.bridge for strip in strips),
        air=air,
        humidity=humidity_of(task, scene),
    )
    return Planned(plan, scene, tuple(anomalies), components, strips)


def with_twins(planned: Planned, plans: Mapping[str, TwinPlan]) -> Planned:
    """The same with each component's twin, and the load exponent among the inputs where loads differ."""
    twins = {name: Twin(plan.name, plan.load_ratio) for name, plan in plans.items() if plan.name is not None}
    scene = planned.scene
    if any(twin.load_ratio != 1 for twin in twins.values()):
        scene = scene.with_(Quantity("load_exponent", LOAD_EXPONENT, LOAD_EXPONENT_U, "default"))
    return replace(planned, plan=replace(planned.plan, twins=twins), scene=scene)


def _facts(component: Component, task: FrameTask) -> PartFacts:
    """What is known of a component besides its pixels."""
    return PartFacts(
        limit=lowest(component.limits) if component.limits else None,
        load=component.load,
        load_ratio=component.load / component.rated if component.load is not None and component.rated else None,
        shape=component.shape,
        neighbours=_neighbours(component, task),
    )


def _neighbours(component: Component, task: FrameTask) -> tuple[str, ...]:
    """PV: the modules of its group that a module is held against."""
    if task.method != "pv" or component.group is None:
        return ()
    group = [one for one in task.components if one.group == component.group]
    centres = [np.mean(one.polygon, axis=0) for one in group]
    return tuple(group[index].name for index in neighbours(group.index(component), centres))


def _measurable(facts: PartFacts, components: Mapping[str, Measured]) -> PartFacts:
    """With those of its neighbours that can be measured and are sound; without any where these are too few."""
    near = [name for name in facts.neighbours if name in components]
    kept = tuple(
        name for name, is_sound in zip(near, sound([components[name].t_spot for name in near]), strict=True) if is_sound
    )
    return replace(facts, neighbours=kept if len(kept) >= LEAST_NEIGHBOURS else ())


def _measured(
    name: str,
    patch: Patch,
    sense: str,
    corrected: Corrected,
    screened: Screened,
    task: FrameTask,
) -> Measured | None:
    """One region ready to be measured, or None where no pixel of it is measurable."""
    spot = extreme_spot(screened.t, patch, sense, task.camera.spot_pixels)
    if spot is None:
        return None
    rows, columns = patch.positions()
    measurable = ~np.isnan(screened.t[rows, columns])
    rows, columns = rows[measurable], columns[measurable]
    centre = (float(columns.mean()), float(rows.mean()))
    t_spot = float(screened.t[spot.rows, spot.columns].mean())
    scene, stretch = corrected.scene, _stretch(corrected, task, spot.rows[0], spot.columns[0])
    around = scene[_ambient(scene)].value if screened.reference is None else screened.reference.at(*spot.centre)
    noise = screened.noise / stretch_of(corrected, task, 0)  # that of a pixel, whatever it looks at
    known = {"noise": noise, "contrast": (t_spot - around) / stretch}
    label = name if name.startswith(f"{task.id}-") else f"component {name}"  # no component may pass for the reference
    spot_shifts, spot_own = imperfections.of_spot(
        label, spot, patch, sense, **known, scene=scene, shape=screened.t.shape
    )
    whole_shifts, whole_own = imperfections.of_whole(label, patch, screened.t, stretch, **known, scene=scene)
    extent = _extent(patch, task, screened.t.shape)
    region = Region(
        name,
        replace(area(corrected, spot.rows, spot.columns), shifts=spot_shifts),
        replace(area(corrected, rows, columns), shifts=whole_shifts),
        _lever(spot.centre, screened),
        _lever(centre, screened),
        extent,
        rim=imperfections.perimeter(patch) * extent / patch.pixels,
        outline=next((q.name for q in whole_own if q.name.startswith(imperfections.OUTLINE)), None),
    )
    narrow = _has_narrow_core(patch, sense, screened, spot, noise * stretch)
    return Measured(patch, sense, spot, centre, t_spot, region, (*spot_own, *whole_own), narrow)


def _has_narrow_core(patch: Patch, sense: str, screened: Screened, spot: Spot, noise: float) -> bool:
    """Whether the pixels above half the contrast within an area hold no measurement spot: then none reads them.

    Contrast of the extreme pixel against the median of the area.  Where the best spot reads within five times the noise
    [K] of that pixel there is no such core: the hottest of many noisy pixels is hotter than any mean.
    """
    sign = 1.0 if sense == "hot" else -1.0
    t = np.where(patch.mask, screened.t[patch.box], np.nan) * sign
    extreme, middle = float(np.nanmax(t)), float(np.nanmedian(t))
    if extreme - sign * float(screened.t[spot.rows, spot.columns].mean()) < 5 * noise:
        return False
    core = (t >= (extreme + middle) / 2).astype(np.uint8)
    side = max(round(spot.rows.size**0.5), 1)
    return not cv2.erode(core, np.ones((side, side), np.uint8), borderValue=0).any()


def _stretch(corrected: Corrected, task: FrameTask, row: int, column: int) -> float:
    """∂T/∂T_app where an area lies: on a shiny part a large deviation is a small one in the picture."""
    stretch = stretch_of(corrected, task, int(corrected.optics[row, column]))
    return stretch if stretch > 0 else stretch_of(corrected, task, 0)


def _reference(
    corrected: Corrected, screened: Screened, task: FrameTask
) -> tuple[Area | None, imperfections.Tilts, tuple[Quantity, ...]]:
    """The reference as an area of the plan, what tilts its plane, and what is its own."""
    reference = screened.reference
    if reference is None:
        return None, (), ()
    scene, stretch = corrected.scene, _stretch(corrected, task, reference.rows[0], reference.columns[0])
    shifts, tilts, own = imperfections.of_reference(reference, screened.reference_area, screened.t, stretch, scene)
    own = (*own, *imperfections.bounded_tilts(reference, screened.reference_area, stretch, scene))
    drawn = area(corrected, reference.rows, reference.columns, reference.weights)
    return replace(drawn, shifts=shifts), tilts, own


def _ambient(scene: Scene) -> str:
    return "ambient" if "ambient" in scene else "air"


def _lever(place: tuple[float, float], screened: Screened) -> tuple[float, float]:
    if screened.reference is None:
        return 0.0, 0.0
    dx, dy = screened.reference.lever(*place)
    return float(dx), float(dy)


def _extent(patch: Patch, task: FrameTask, shape: tuple[int, ...]) -> float:
    """Number of pixels or, with a known rectangle, the share of the rectangle's area that they cover."""
    if isinstance(task.known_scale, KnownRectangle):
        shares = pixel_areas((shape[0], shape[1]), task.known_scale.corners, 1.0, 1.0)
        return float(patch.of(shares).sum())
    return float(patch.pixels)


def _scale(task: FrameTask, scene: Scene) -> str:
    if isinstance(task.known_scale, KnownRectangle):
        return "known_rectangle"
    if isinstance(task.known_scale, KnownLength):
        return "known_length"
    return "ifov" if "ifov" in scene and scene["distance"].value > 0 else "none"


def _length_pixels(task: FrameTask) -> float:
    if not isinstance(task.known_scale, KnownLength):
        return 1.0
    return float(np.hypot(*np.subtract(task.known_scale.end, task.known_scale.start)))
