"""Screening of one frame: its reference area, and the regions that deviate from it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.correction import Corrected, air_path
from irsurvey.anomalies import reference as references
from irsurvey.anomalies import segment as segments
from irsurvey.anomalies.noise import pixel_noise
from irsurvey.anomalies.patch import Patch, cropped
from irsurvey.anomalies.reference import Reference
from irsurvey.anomalies.shape import Spot, extreme_spot
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.geometry.footprint import pixel_area
from irsurvey.geometry.polygons import mask
from irsurvey.geometry.rectify import pixel_areas
from irsurvey.model import Component, FrameTask, KnownLength, KnownRectangle
from irsurvey.radiometry.band import band_table
from irsurvey.radiometry.measurement import amplification, object_temperature

_LEAST_DELTA = {"building": 1.0, "electrical": 2.0}
"""Smallest ΔT [K] that counts when the survey states none, or five times the noise where that is more."""
_NETD_AT = 30.0 + ZERO_CELSIUS
SMALL_REFERENCE = "small reference area"
ENOUGH_REFERENCE = 25
"""Pixels a reference area should have [house]: with fewer it is smaller than the least defect that counts, and may
itself be one."""


@dataclass(frozen=True, slots=True, eq=False)
class Anomalous:
    """One region: its pixels, sense, and whether saturated ones are among them."""

    patch: Patch
    sense: str
    is_saturated: bool


@dataclass(frozen=True, slots=True, eq=False)
class Screened:
    """A screened frame.  `t` is the temperature map with saturated pixels at their bound [K].

    Without a reference area `delta` is None, and the regions are those that lie beyond the camera's range.
    """

    t: NDArray[np.float32]
    delta: NDArray[np.float32] | None
    noise: float
    reference: Reference | None
    reference_area: NDArray[np.bool_]
    min_delta: float
    detectable_delta: float
    shading: float
    pixel_area: NDArray[np.float64] | None  # [m²], (rows, columns) or (1, 1)
    regions: tuple[Anomalous, ...]


def screen(corrected: Corrected, task: FrameTask) -> Screened:
    """Find the reference area and everything that deviates from it by more than counts."""
    shape = (corrected.t.shape[0], corrected.t.shape[1])
    t = _bounded(corrected, task)
    open_, blocked = inspectable(corrected, task)
    noise = _noise(corrected, task, open_)
    amplified = _noise_by_optics(corrected, task, noise)
    area = _reference_area(corrected, task, open_ & ~blocked, noise)
    reference = references.fit(corrected.t, area, noise)
    min_delta = task.detection.min_delta or max(_LEAST_DELTA[task.kind], 5 * noise)
    areas = _pixel_area(task, corrected, shape)
    detectable = float(segments.thresholds(min_delta, noise).seed)
    if reference is None:
        beyond = _beside_components(_beyond_range(corrected, t, blocked), t, min_delta, task)
        beyond.sort(key=_rank(np.ones(shape, np.float32), areas))
        return Screened(t, None, noise, None, area, min_delta, detectable, 0.0, areas, tuple(beyond))
    delta = t - reference.plane(shape)
    shading, allowance = segments.shading_allowance(delta, open_)
    candidates = open_ & ~blocked
    min_pixels: int | NDArray[np.float32] = task.detection.min_pixels
    if task.detection.min_area and areas is not None:
        min_pixels = np.broadcast_to((areas / task.detection.min_area).astype(np.float32), shape)
    least = segments.least_delta(min_delta, noise, amplified)
    regions = []
    for sense, sign in (("hot", 1), ("cold", -1)):
        toward = np.maximum(sign * allowance, 0)  # shading that darkens corners excuses cold ones, never hot ones
        limits = segments.thresholds(least, amplified, toward)
        certain = _certain(corrected, t, blocked, sense)
        for region in segments.segment(delta, candidates, sense, limits, min_pixels=min_pixels, certain=certain):
            regions.append(Anomalous(region, sense, certain is not None and bool(region.of(certain).any())))
    regions = _beside_components(regions, t, min_delta, task)
    regions.sort(key=_rank(delta, areas))
    return Screened(t, delta, noise, reference, area, min_delta, detectable, shading, areas, tuple(regions))


def has_small_reference(screened: Screened) -> bool:
    """Whether so few pixels are the reference that a frame should say so."""
    return screened.reference is not None and screened.reference.pixels < ENOUGH_REFERENCE


def nominal_noise(task: FrameTask, t: float) -> float:
    """The camera's stated noise [K] at temperature t [K], scaled from 30 °C by the band radiance's slope; or NaN."""
    if task.camera.noise is None:
        return float("nan")
    table = band_table(task.camera.band)
    return float(task.camera.noise * table.slope(_NETD_AT) / table.slope(t))


def stretch_of(corrected: Corrected, task: FrameTask, index: int) -> float:
    """∂T/∂T_app of one optics at the frame's median: what noise is multiplied by.  NaN without solution there."""
    values = corrected.scene.values()
    emissivity, reflected = corrected.optics_names[index]
    t = np.float64(corrected.pivot)
    return float(amplification(t, values[emissivity], values[reflected], air_path(values), task.camera.band))


def _rank(
    delta: NDArray[np.float32], areas: NDArray[np.float64] | None
) -> Callable[[Anomalous], tuple[bool, float, int]]:
    """Sort key: saturated hot first, then |mean ΔT| × area, largest first; position decides between equals."""
    has_scale = areas is not None and np.nanmax(areas) > 0
    per_pixel = np.broadcast_to(areas if areas is not None and has_scale else 1.0, delta.shape)

    def key(region: Anomalous) -> tuple[bool, float, int]:
        area = float(np.nansum(region.patch.of(per_pixel)))
        weight = abs(float(np.sum(region.patch.of(delta)))) / region.patch.pixels * area
        leads = region.is_saturated and region.sense == "hot"
        return (not leads, -weight, region.patch.top * delta.shape[1] + region.patch.left)

    return key


def _bounded(corrected: Corrected, task: FrameTask) -> NDArray[np.float32]:
    """The temperature map, saturated pixels at the temperature of the end of the range that they lie beyond."""
    if not corrected.saturated_pixels or task.camera.range is None:
        return corrected.t
    values = corrected.scene.values()
    t = corrected.t.copy()
    for end, beyond in zip(task.camera.range, (corrected.saturated_cold, corrected.saturated_hot), strict=True):
        for index, (emissivity, reflected) in enumerate(corrected.optics_names):
            bound = object_temperature(
                np.float64(end + values["camera_offset"]),
                values[emissivity],
                values[reflected],
                air_path(values),
                task.camera.band,
            )
            t[beyond & (corrected.optics == index)] = bound
    return t


def _certain(
    corrected: Corrected, t: NDArray[np.float32], blocked: NDArray[np.bool_], sense: str
) -> NDArray[np.bool_] | None:
    """Pixels beyond the range, which need no contrast to count; not where their bound has no solution.  None: none."""
    saturated = corrected.saturated_hot if sense == "hot" else corrected.saturated_cold
    return saturated & ~blocked & ~np.isnan(t) if saturated.any() else None


def _beyond_range(corrected: Corrected, t: NDArray[np.float32], blocked: NDArray[np.bool_]) -> list[Anomalous]:
    """The regions beyond the range of a frame in which nothing can be compared: a bound needs no reference."""
    unused, never = np.zeros(t.shape, np.bool_), segments.thresholds(np.inf, 0.0)
    regions = []
    for sense, sign in (("hot", 1), ("cold", -1)):
        certain = _certain(corrected, t, blocked, sense)
        if certain is not None:
            alike = np.full(t.shape, sign, np.float32)  # no contrast within a region, so that none splits it
            found = segments.segment(alike, unused, sense, never, min_pixels=1, certain=certain)
            regions += [Anomalous(region, sense, is_saturated=True) for region in found]
    return regions


def inspectable(corrected: Corrected, task: FrameTask) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """Pixels that are measured and inside what is inspected; and those no region may use.

    Blocked are ignored surfaces, reflectors and surfaces of known temperature, and a band of two pixels around
    them and around every border between different optics.
    """
    shape = (corrected.t.shape[0], corrected.t.shape[1])
    open_ = ~np.isnan(corrected.t)
    blocked = segments.edge_band(corrected.optics)
    for surface in task.surfaces:
        if surface.role != "inspect":
            drawn = mask(surface.polygon, shape).view(np.uint8)
            blocked |= cv2.dilate(drawn, np.ones((5, 5), np.uint8)).view(np.bool_)
    if task.inspect:
        blocked |= ~mask(task.inspect, shape)
    return open_, blocked


def _noise(corrected: Corrected, task: FrameTask, open_: NDArray[np.bool_]) -> float:
    """Noise [K] in object temperature: the frame's own or the camera's stated one, whichever is more."""
    values = corrected.scene.values()
    stretch = stretch_of(corrected, task, 0)
    steps = np.abs(np.diff(corrected.apparent))
    resolution = float(np.nanmedian(steps)) * stretch if steps.size else 0.0
    main = open_ & (corrected.optics == 0) if (corrected.optics == 0).any() else open_
    seen = pixel_noise(corrected.t, main, resolution)
    stated = nominal_noise(task, corrected.pivot + values["camera_offset"]) * stretch
    return float(np.nanmax([seen, stated, 1e-4]))


def _noise_by_optics(corrected: Corrected, task: FrameTask, noise: float) -> NDArray[np.float32] | float:
    """Noise map [K]: amplified where the emissivity is low."""
    if len(corrected.optics_names) == 1:
        return noise
    stretches = np.array([stretch_of(corrected, task, index) for index in range(len(corrected.optics_names))])
    return np.asarray(noise * np.nan_to_num(stretches / stretches[0], nan=1e3), np.float32)[corrected.optics]


def _reference_area(
    corrected: Corrected, task: FrameTask, usable: NDArray[np.bool_], noise: float
) -> NDArray[np.bool_]:
    shape = (corrected.t.shape[0], corrected.t.shape[1])
    if task.reference is not None:
        drawn = mask(task.reference, shape) & ~np.isnan(corrected.t)
        for surface in task.surfaces:
            if surface.role == "ignore":
                drawn &= ~mask(surface.polygon, shape)
        return drawn
    for component in task.components:
        usable = usable & ~mask(component.polygon, shape)
    return references.automatic(corrected.t, usable, noise)


def _pixel_area(task: FrameTask, corrected: Corrected, shape: tuple[int, int]) -> NDArray[np.float64] | None:
    """Area of each pixel [m²], or one for all (1, 1); None without a scale."""
    values = corrected.scene.values()
    if isinstance(task.known_scale, KnownRectangle):
        return pixel_areas(shape, task.known_scale.corners, values["known_width"], values["known_height"])
    if isinstance(task.known_scale, KnownLength):
        pixels = np.hypot(*np.subtract(task.known_scale.end, task.known_scale.start))
        return np.full((1, 1), (values["known_length"] / pixels) ** 2)
    if "ifov" in values and values["distance"] > 0:
        return np.full((1, 1), pixel_area(values["distance"], values["ifov"], values.get("view_angle", 0.0)))
    return None


def near(component: Component, shape: tuple[int, int]) -> NDArray[np.bool_]:
    """Pixels of a component and next to it: across the band around borders of optics, where no region can be."""
    reach = 2 * (segments.EDGE_BAND + 1) + 1
    drawn = mask(component.polygon, shape).view(np.uint8)
    return cv2.dilate(drawn, np.ones((reach, reach), np.uint8)).view(np.bool_)


def _beside_components(
    regions: list[Anomalous], t: NDArray[np.float32], min_delta: float, task: FrameTask
) -> list[Anomalous]:
    """Without those that are a component's own warmth or its rim, as the component itself tells of them.

    It does not where a region that touches it is hotter, by what counts, than the hottest spot inside its outline:
    that is something else, or a part of which too little was drawn.
    """
    shape = (t.shape[0], t.shape[1])
    around = [(near(component, shape), _hottest(t, component, task)) for component in task.components]
    kept = []
    for region in regions:
        told = [hottest for place, hottest in around if region.patch.of(place).any()]
        spot = extreme_spot(t, region.patch, "hot", task.camera.spot_pixels) if told and region.sense == "hot" else None
        if not told or (spot and _mean(t, spot) > max(told) + min_delta):
            kept.append(region)
    return kept


def _hottest(t: NDArray[np.float32], component: Component, task: FrameTask) -> float:
    """Temperature of a component's hottest spot [K]; −∞ where nothing of it can be measured."""
    patch = cropped(mask(component.polygon, (t.shape[0], t.shape[1])))
    spot = extreme_spot(t, patch, "hot", task.camera.spot_pixels) if patch else None
    return _mean(t, spot) if spot else -np.inf


def _mean(t: NDArray[np.float32], spot: Spot) -> float:
    return float(t[spot.rows, spot.columns].mean())
