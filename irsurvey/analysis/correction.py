"""Stored numbers of one frame to object temperatures, surface by surface, by look-up."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis import imperfections
from irsurvey.anomalies.noise import robust_spread
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.errors import Fault, FrameError
from irsurvey.geometry.polygons import mask
from irsurvey.heat.humid_air import vapour_density
from irsurvey.model import Camera, Component, Frame, FrameTask, Quantity, Scene, Surface
from irsurvey.radiometry import measurement
from irsurvey.radiometry.atmosphere import absorptance_u
from irsurvey.radiometry.band import TEMPERATURES
from irsurvey.radiometry.lookup import Codes, encode, look_up, stored_values, temperature_table
from irsurvey.radiometry.measurement import Path, object_temperature
from irsurvey.radiometry.signal import apparent_temperature
from irsurvey.uncertainty import propagate

_RESOLUTION = 1e-3
"""Step [K] to which float frames are quantised: a fiftieth of a good camera's noise."""

FOIL_EMISSIVITY = 0.04
"""Of household aluminium foil, 0.03 to 0.05 (handbook compilations): a reflector shows as much of itself."""

_FAR_OFF = 4
"""Half-widths of the camera's accuracy from which an offset is no offset of that camera [house]: a sound camera keeps
to one, one that has drifted since its calibration may be off by two or three; further off, what is stated is wrong."""

Optics = tuple[str, str]
"""Names of the emissivity and the reflected temperature in the Scene."""


@dataclass(frozen=True, slots=True, eq=False)
class Corrected:
    """One frame in object temperature, and what it was made from.

    `t` (rows, columns) [K], NaN where saturated, without data or without solution; `apparent` [K] by stored
    code, lowest…highest, cut at the camera's range; `optics` (rows, columns) indices into `optics_names`.
    """

    codes: Codes
    apparent: NDArray[np.float64]
    optics: NDArray[np.uint8]
    optics_names: tuple[Optics, ...]
    scene: Scene
    pivot: float
    t: NDArray[np.float32]
    saturated_hot: NDArray[np.bool_]
    saturated_cold: NDArray[np.bool_]
    saturated_pixels: int
    unsolved_pixels: int
    without_data_pixels: int

    @property
    def quantised_to(self) -> float:
        """Step [K] to which a float frame was quantised; 0 for integers, which keep their values."""
        if self.codes.step == 1 or self.apparent.size < 2:
            return 0.0
        return float(np.nanmedian(np.abs(np.diff(self.apparent))))


@dataclass(frozen=True, slots=True)
class _Known:
    """A surface of known temperature as it is read: mean of its pixels [K], that mean's noise, lens shading of it."""

    surface: Surface
    centre: float
    noise: Quantity
    shading: imperfections.Shifts


def air_path(values: Mapping[str, Any]) -> Path:
    """The path between surface and camera for scene values (scalars, or columns of many scenes)."""
    window = {}
    if "window_transmittance" in values:
        window = {
            "window_transmittance": values["window_transmittance"],
            "window_reflectance": values["window_reflectance"],
            "t_window": values["window_temperature"],
            "t_window_ambient": values["window_ambient"],
        }
    return Path(
        t_air=values["air"],
        distance=values["distance"],
        vapour_density=vapour_density(values["air"], values["relative_humidity"]),
        pressure=values["pressure"],
        excess=values["atmosphere"],
        **window,
    )


def correct(frame: Frame, task: FrameTask) -> Corrected:
    """Object temperatures of a frame.  Raises FrameError where nothing in it can be measured.

    Reflector surfaces measure the reflected temperature first, then surfaces of known temperature fix the
    camera's offset; both replace what the survey stated.
    """
    signal, band = task.camera.signal, task.camera.band
    codes = _encoded(frame, task.camera)
    apparent = apparent_temperature(stored_values(codes), signal, band)
    optics, optics_names = optics_of(task, frame.stored.shape)
    t_apparent = look_up(codes, apparent)
    pivot = float(np.nanmedian(t_apparent[::4, ::4])) if np.isfinite(t_apparent[::4, ::4]).any() else float("nan")
    readable = _readable(codes, apparent, task.camera)
    if np.isnan(pivot):
        raise _meaningless(frame, task)
    scene = _with_camera(task, pivot)
    for _ in range(2):  # foil is read with the offset of a known surface, which itself mirrors what the foil shows
        scene = _with_reflected(task, scene, readable, pivot)
        scene = _with_offset(task, scene, readable, pivot)

    low, high = task.camera.range or (-np.inf, np.inf)
    has_data = _has_data(codes)
    hot, cold = _beyond(codes, apparent >= high), _beyond(codes, apparent <= low)
    values = scene.values()
    path = air_path(values)
    t = np.empty(frame.stored.shape, np.float32)
    for index, (emissivity, reflected) in enumerate(optics_names):
        table = temperature_table(
            codes.key,
            signal,
            band,
            values["camera_offset"],
            values["camera_gain"],
            pivot,
            values[emissivity],
            values[reflected],
            path,
        )
        measurable = np.where((apparent > low) & (apparent < high), table, np.nan)
        if index == 0:
            t = look_up(codes, measurable)
            continue
        rows, columns = _box(optics == index)
        part = optics[rows, columns] == index
        t[rows, columns][part] = measurable[codes.codes[rows, columns][part].astype(np.intp) - codes.lowest]
    unmeasurable, saturated = np.isnan(t), hot | cold
    if (unmeasurable & ~saturated).all():
        raise _meaningless(frame, task)
    unsolved = int(np.count_nonzero(unmeasurable & ~saturated & has_data))
    return Corrected(
        codes,
        np.clip(apparent, low, high),  # beyond the range a number says no more than that it is beyond
        optics,
        optics_names,
        scene,
        pivot,
        t,
        hot,
        cold,
        int(np.count_nonzero(saturated)),
        unsolved,
        int(np.count_nonzero(~has_data)),
    )


def reflected_by_reflector(frame: Frame, task: FrameTask) -> Quantity:
    """Reflected apparent temperature [K] that the reflector in this frame measures for the frames it serves.

    The camera's error is in it whole: from one frame to another it need not be the same.  Raises FrameError where
    there is no readable reflector."""
    signal = task.camera.signal
    codes = _encoded(frame, task.camera)
    apparent = apparent_temperature(stored_values(codes), signal, task.camera.band)
    pivot = float(np.nanmedian(look_up(codes, apparent)))
    scene = _with_reflected(task, _with_camera(task, pivot), _readable(codes, apparent, task.camera), pivot)
    measured = scene["reflected"]
    return replace(measured, u=float(np.hypot(measured.u, scene["camera_offset"].u)), follows=None)


def reflected_by(
    surface: Surface, task: FrameTask, scene: Scene, t_apparent: NDArray[np.float32], pivot: float
) -> Quantity:
    """Reflected apparent temperature measured on a crumpled reflector (ASTM E1862, reflector method).

    The reflector is read as a black body through the air path.  In the uncertainty stay its spread, as what it shows
    is not the same in all directions, what it sends out itself, and the camera's gain.  Read by the same camera in the
    same frame, it moves with its offset.
    """
    values, band = scene.values(), task.camera.band
    seen = t_apparent[_inner(surface, t_apparent.shape)].astype(np.float64) + values["camera_offset"]
    t = object_temperature(seen, 1.0, values["air"], air_path(values), band)
    centre = float(np.nanmedian(t)) if np.isfinite(t).any() else float("nan")
    if np.isnan(centre):
        raise _unreadable(task, surface, "a readable reflector")
    spread = 1.4826 * float(np.nanmedian(np.abs(t - centre)))
    mirrored = object_temperature(np.nanmedian(seen), 1 - FOIL_EMISSIVITY, values["air"], air_path(values), band)
    emitted = abs(float(mirrored) - centre)  # were it as warm as the air
    gain = scene["camera_gain"].u * (centre - pivot)
    u = float(np.sqrt(spread**2 + np.nan_to_num(emitted) ** 2 + gain**2))
    measured = Quantity("reflected", centre, u, "measured in frame", u_source="measured in frame")
    return replace(measured, low=0, follows="camera_offset")


def _readable(codes: Codes, apparent: NDArray[np.float64], camera: Camera) -> NDArray[np.float32]:
    """Apparent temperatures (rows, columns) [K], NaN where saturated: a bound is no reading."""
    low, high = camera.range or (-np.inf, np.inf)
    return look_up(codes, np.where((apparent > low) & (apparent < high), apparent, np.nan))


def _meaningless(frame: Frame, task: FrameTask) -> FrameError:
    numbers = f"numbers from {np.nanmin(frame.stored)} to {np.nanmax(frame.stored)}, none of which does"
    remedy = "check quantity, unit, scale and offset under camera.signal, and emissivity and reflected temperature"
    return FrameError(Fault(task.file, "stored numbers that give object temperatures", numbers, remedy))


def _with_camera(task: FrameTask, pivot: float) -> Scene:
    """The scene with the camera's own errors: an offset common to the frame, a gain about its median."""
    # Accuracies are half-widths, rectangular.
    u = _accuracy(task.camera, pivot) / 3**0.5
    offset = Quantity("camera_offset", 0.0, u, "survey", distribution="rectangular", u_source="survey")
    gain = replace(offset, name="camera_gain", u=task.camera.accuracy_fraction / 3**0.5)
    scene = task.scene.with_(offset, gain)
    atmosphere = scene["atmosphere"]
    if atmosphere.u < absorptance_u(task.camera.band):  # a band without a fit of its own is less well known
        scene = scene.with_(replace(atmosphere, u=absorptance_u(task.camera.band)))
    if task.kind == "building" and task.viewed_from == "outside" and "wind" not in scene:
        # Not recorded is not calm.  A light breeze, wide enough to cover still air; only heat flux uses it.
        scene = scene.with_(Quantity("wind", 2.0, 1.0, "default", low=0.0))
    return scene


def _accuracy(camera: Camera, pivot: float) -> float:
    """Half-width of the camera's stated accuracy [K] at its median reading."""
    return max(camera.accuracy, camera.accuracy_fraction * abs(pivot - ZERO_CELSIUS))


def _with_reflected(task: FrameTask, scene: Scene, t_apparent: NDArray[np.float32], pivot: float) -> Scene:
    for surface in task.surfaces:
        if surface.role == "reflector":
            scene = scene.with_(reflected_by(surface, task, scene, t_apparent, pivot))
    if "reflected" not in scene:
        served_by = f"frame {task.reflected_from}" if task.reflected_from else "this frame"
        fault = Fault(
            f"{task.id}: reflected_c",
            "a reflected apparent temperature",
            f"none stated and no reflector read in {served_by}",
            'state conditions.reflected_c or draw a surface with role = "reflector"',
        )
        raise FrameError(fault)
    return scene


def _with_offset(task: FrameTask, scene: Scene, t_apparent: NDArray[np.float32], pivot: float) -> Scene:
    """Fix the camera's offset on surfaces of known temperature: the shift of apparent temperature that meets them.

    It is then as uncertain as everything it was found by, and moves with that: its correlations with the other
    inputs say how far, so that what a known surface and another one share cancels between them.  Raises FrameError
    where a surface asks for an offset that, its own U aside, lies `_FAR_OFF` half-widths of the camera's accuracy off.
    """
    stated = [surface for surface in task.surfaces if surface.role == "known-temperature" and surface.temperature]
    known = [_known(surface, t_apparent) for surface in stated]
    if not known:
        return scene

    def offsets(values: Mapping[str, Any]) -> NDArray[np.float64]:
        return np.concatenate([_offset(one, values, pivot, task.camera.band) for one in known], axis=1)

    exact = Quantity("camera_offset", 0.0)  # it is what is looked for
    budget = propagate(offsets, scene.with_(exact, *(one.noise for one in known)))
    most = _FAR_OFF * _accuracy(task.camera, pivot)
    for one, value, u_value in zip(known, budget.values, budget.u, strict=True):
        if not np.isfinite(value):
            raise _unreadable(task, one.surface, "a surface of known temperature that can be read")
        if abs(value) > most + 2 * u_value:
            raise _far_off(task, scene, one.surface, float(value), most)
    weights = 1 / np.maximum(budget.u**2, 1e-6)
    weights /= weights.sum()
    swings = budget.half_swings @ weights
    covariances = budget.correlation @ swings
    u = float(np.sqrt(np.maximum(swings @ covariances, 0.0)))
    others = tuple(pair for pair in scene.correlations if "camera_offset" not in pair)
    found = tuple(
        ("camera_offset", name, float(covariance / u))
        for name, covariance in zip(budget.names, covariances, strict=True)
        if u > 0 and covariance != 0 and name in scene
    )
    offset = Quantity("camera_offset", float(budget.values @ weights), u, "measured in frame")
    return replace(scene.with_(replace(offset, u_source="measured in frame")), correlations=(*others, *found))


def _known(surface: Surface, t_apparent: NDArray[np.float32]) -> _Known:
    rows, columns = np.nonzero(_inner(surface, t_apparent.shape) & np.isfinite(t_apparent))
    seen = t_apparent[rows, columns].astype(np.float64)
    if seen.size == 0:
        return _Known(surface, np.nan, Quantity(f"noise:{surface.name}", 0.0), ())
    noise = Quantity(f"noise:{surface.name}", 0.0, robust_spread(seen) / seen.size**0.5)
    return _Known(surface, float(seen.mean()), noise, imperfections.shading(rows, columns, t_apparent.shape))


def _offset(known: _Known, values: Mapping[str, Any], pivot: float, band: tuple[float, float]) -> NDArray[np.float64]:
    """Offset (n, 1) [K] at which the mean of a known surface reads its temperature, in n scenes."""
    surface = known.surface
    t, optics = values[str(surface.temperature)], (values[surface.emissivity], values[surface.reflected])
    expected = measurement.apparent_temperature(t, *optics, air_path(values), band)
    shifts = values[known.noise.name] + values["camera_gain"] * (known.centre - pivot)
    for name, factor in known.shading:
        shifts = shifts + values.get(name, 0.0) * factor
    return np.asarray(expected - known.centre - shifts)


def _unreadable(task: FrameTask, surface: Surface, expected: str) -> FrameError:
    remedy = "draw it on the surface, clear of its edge, and check its temperature and emissivity"
    return FrameError(Fault(f"{task.id}: surface {surface.name}", expected, "no measurable pixel in it", remedy))


def _far_off(task: FrameTask, scene: Scene, surface: Surface, offset: float, most: float) -> FrameError:
    stated = scene[str(surface.temperature)].value - ZERO_CELSIUS
    expected = f"a temperature for which the camera is off by no more than {most:.1f} K, {_FAR_OFF} times its accuracy"
    got = f"{stated:.1f} °C, for which it would be off by {-offset:+.1f} K"
    remedy = "check temperature_c and that it is drawn on that surface, then its emissivity and reflected temperature"
    return FrameError(Fault(f"{task.id}: surface {surface.name}: temperature_c", expected, got, remedy))


def optics_of(task: FrameTask, shape: tuple[int, ...]) -> tuple[NDArray[np.uint8], tuple[Optics, ...]]:
    """Index of the optics of every pixel; drawn surfaces, then components, the later over the earlier."""
    index = np.zeros(shape, np.uint8)
    names: list[Optics] = [("emissivity", "reflected")]
    areas: tuple[Surface | Component, ...] = (*task.surfaces, *task.components)
    for area in areas:
        pair = (area.emissivity, area.reflected)
        if isinstance(area, Surface) and area.role == "reflector":
            continue
        if pair == names[0] and not isinstance(area, Surface):
            continue  # a component without optics of its own keeps those of the surface it lies on
        if pair not in names:
            names.append(pair)
        index[mask(area.polygon, (shape[0], shape[1]))] = names.index(pair)
    return index, tuple(names)


def _encoded(frame: Frame, camera: Camera) -> Codes:
    """The frame as codes; what lies beyond the band's table or the camera's range is no reading, wherever it lies."""
    signal, (lowest, highest) = camera.signal, TEMPERATURES
    reach = (-np.inf, np.inf)
    if signal.quantity != "counts":
        if signal.quantity == "apparent-temperature" and camera.range is not None:
            lowest, highest = camera.range
        ends = ((end - signal.offset) / signal.scale for end in (lowest - 1.0, highest + 1.0))
        reach = (next(ends), next(ends))
    return encode(frame.stored, frame.missing, resolution=_resolution(frame, camera), reach=reach)


def _resolution(frame: Frame, camera: Camera) -> float:
    """`_RESOLUTION` in stored units; counts are given 65 534 steps over their range instead."""
    if camera.signal.quantity == "counts":
        finite = frame.stored[np.isfinite(frame.stored)]
        return max(float(np.ptp(finite)) / 65_534, 1e-12) if finite.size else 1.0
    return _RESOLUTION / abs(camera.signal.scale)


def _beyond(codes: Codes, by_code: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """Pixels whose code is marked; no pass over the frame where no code is."""
    if not by_code.any():
        return np.zeros(codes.codes.shape, np.bool_)
    return np.asarray(look_up(codes, by_code.astype(np.float64)) > 0, np.bool_)


def _has_data(codes: Codes) -> NDArray[np.bool_]:
    if codes.no_data is None:
        return np.ones(codes.codes.shape, np.bool_)
    return np.asarray(codes.codes != codes.no_data, np.bool_)


def _box(part: NDArray[np.bool_]) -> tuple[slice, slice]:
    rows, columns = np.flatnonzero(part.any(axis=1)), np.flatnonzero(part.any(axis=0))
    if rows.size == 0:
        return slice(0, 0), slice(0, 0)
    return slice(int(rows[0]), int(rows[-1]) + 1), slice(int(columns[0]), int(columns[-1]) + 1)


def _inner(surface: Surface, shape: tuple[int, ...]) -> NDArray[np.bool_]:
    """The surface without its outermost two pixels, which blur mixes with its surroundings; all of it where tiny."""
    import cv2

    whole = mask(surface.polygon, (shape[0], shape[1]))
    inner = cv2.erode(whole.view(np.uint8), np.ones((5, 5), np.uint8), borderValue=1).view(np.bool_)
    return inner if inner.any() else whole
