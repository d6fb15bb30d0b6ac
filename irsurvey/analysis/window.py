"""The transmittance of an infrared window, measured by one warm or cold reference seen without and through it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import NoReturn

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.anomalies.noise import robust_spread
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.errors import Fault, FrameError
from irsurvey.geometry.polygons import mask
from irsurvey.model import Camera, Frame, FrameTask, Polygon, Quantity, Scene
from irsurvey.radiometry.band import band_table
from irsurvey.radiometry.signal import apparent_temperature
from irsurvey.uncertainty import propagate

MOST_U = 0.1
"""Standard uncertainty from which a transmittance is no measurement [house]: with one of 0.5 it is a fifth of every
difference seen through the window.  It is reached with a reference some 5 K from the window."""
DRIFT_U = 0.2
"""Standard uncertainty [K] of what camera and reference drift between the two frames [house]: uncooled cameras drift by
some tenths from one frame to the next."""
LEAST_TRANSMITTANCE = 0.001
"""Least a scene may hold."""

_WINDOW = ("window_temperature", "window_ambient", "window_reflectance")
_OFFSET, _GAIN, _DRIFT = "camera_offset", "camera_gain", "drift"
_NOISE_WITHOUT, _NOISE_THROUGH = "noise:without", "noise:through"

Columns = Mapping[str, NDArray[np.float64]]


@dataclass(frozen=True, slots=True, eq=False)
class _Seen:
    """Apparent temperatures (1, pixels) [K] of the reference in both frames, pixel by pixel the same places."""

    without: NDArray[np.float64]
    through: NDArray[np.float64]
    pivot: float  # the frame's median, about which the camera's gain turns


def window_by_frames(task: FrameTask, without: Frame, through: Frame) -> Quantity:
    """Transmittance of the window of `task`, from the two frames of `task.window_frames`.

    Without the window the camera sees the band radiance S of the reference, through it τ S + (1 − τ − ρ) L(T_w) +
    ρ L(T_front) (ASTM E1897), so that, with nothing of the reference or the air left in it,

        τ = [S_through − (1 − ρ) L(T_w) − ρ L(T_front)] / [S − L(T_w)].

    Camera, place, reference and what the reference mirrors are to be the same in both.  T_w, T_front and ρ are those of
    the frame taken through the window where it states them, else those of `task`.  An error of the camera is the same
    function of temperature in both frames, so that only 1 − τ of its offset counts; noise and drift are each frame's
    own.  Raises FrameError where the frames do not fit each other, where the reference is so near to the window's own
    temperature that u(τ) > 0.1, and where no window could do that.
    """
    frames = task.window_frames
    if frames is None:
        raise FrameError(Fault(f"{task.id}: window_from", "two frames of a reference", "none", "name them"))
    if frames.without.camera != frames.through.camera or frames.through.camera.band != task.camera.band:
        _refuse(task, "one camera for both frames, its band that of this frame", "different cameras", "use one camera")
    seen = _seen(task, without, through, frames.polygon)
    scene = _scene(task, seen)
    table = band_table(task.camera.band)

    def model(values: Columns) -> NDArray[np.float64]:
        def radiance(t: NDArray[np.float64], *own: str) -> NDArray[np.float64]:
            read = t + values[_OFFSET] + values[_GAIN] * (t - seen.pivot) + sum(values[name] for name in own)
            return np.asarray(table.radiance(read).mean(axis=1, keepdims=True))

        of_window, of_front = table.radiance(values["window_temperature"]), table.radiance(values["window_ambient"])
        rho = values["window_reflectance"]
        passed = radiance(seen.through, _NOISE_THROUGH, _DRIFT) - (1 - rho) * of_window - rho * of_front
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.asarray(passed / (radiance(seen.without, _NOISE_WITHOUT) - of_window))

    budget = propagate(model, scene)
    value, u = float(budget.values[0]), float(budget.u[0])
    if not u <= MOST_U:
        t_window = scene["window_temperature"].value
        got = f"{_celsius(float(seen.without.mean()))} and {_celsius(t_window)}, which leaves u(τ) = {u:.2g}"
        remedy = "use a reference 20 K or more warmer or colder than the window, and measure the window's temperature"
        _refuse(task, f"a reference so far from the temperature of the window that u(τ) ≤ {MOST_U}", got, remedy)
    most = 1 - scene["window_reflectance"].value
    if not -2 * u <= value - LEAST_TRANSMITTANCE or not value <= most + 2 * u:
        remedy = "check which frame is which, and the temperature and reflectance of the window"
        _refuse(task, f"a transmittance between 0 and {most:g}", f"{value:.3f} ± {2 * u:.3f}", remedy)
    return Quantity(
        "window_transmittance",
        min(max(value, LEAST_TRANSMITTANCE), most),
        u,
        "measured in frame",
        LEAST_TRANSMITTANCE,
        most,
        u_source="measured in frame",
    )


def _scene(task: FrameTask, seen: _Seen) -> Scene:
    """What the window gives off and mirrors, and the errors of the camera that read both frames."""
    assert task.window_frames is not None
    stated = next((one for one in (task.window_frames.through.scene, task.scene) if _WINDOW[0] in one), None)
    if stated is None or any(name not in stated for name in _WINDOW):
        remedy = "state window.temperature_c, ambient_c and reflectance"
        _refuse(task, "a window with a temperature of its own", "none", remedy)
    camera, apart = task.window_frames.through.camera, 1 / 3**0.5  # accuracies are half-widths, rectangular
    half_width = max(camera.accuracy, camera.accuracy_fraction * abs(seen.pivot - ZERO_CELSIUS))
    offset = Quantity(_OFFSET, 0.0, half_width * apart, "survey", distribution="rectangular", u_source="survey")
    return stated.with_(
        offset,
        replace(offset, name=_GAIN, u=camera.accuracy_fraction * apart),
        Quantity(_DRIFT, 0.0, DRIFT_U),
        Quantity(_NOISE_WITHOUT, 0.0, _noise(seen.without, camera)),
        Quantity(_NOISE_THROUGH, 0.0, _noise(seen.through, camera)),
    )


def _seen(task: FrameTask, without: Frame, through: Frame, polygon: Polygon) -> _Seen:
    """The pixels of the reference that can be read in both frames: what one of them lacks must not move the other."""
    assert task.window_frames is not None
    shape = without.stored.shape
    if shape != through.stored.shape:
        _refuse(task, "two frames of one size", f"{shape} and {through.stored.shape}", "take both with one camera")
    camera = task.window_frames.through.camera
    maps = [_apparent(frame, camera) for frame in (without, through)]
    inside = _inner(polygon, (shape[0], shape[1]))
    usable = inside & np.isfinite(maps[0]) & np.isfinite(maps[1])
    if 2 * np.count_nonzero(usable) < np.count_nonzero(inside) or not usable.any():
        remedy = "draw the polygon on the reference, where it lies in both, and use a temperature range that holds it"
        _refuse(task, "a reference that can be read in both frames", "fewer than half of its pixels", remedy)
    return _Seen(maps[0][usable][np.newaxis], maps[1][usable][np.newaxis], float(np.nanmedian(maps[0])))


def _apparent(frame: Frame, camera: Camera) -> NDArray[np.float64]:
    """Apparent temperatures (rows, columns) [K], NaN where there is no reading."""
    t = apparent_temperature(frame.stored, camera.signal, camera.band)
    low, high = camera.range or (-np.inf, np.inf)
    unread = ~((t > low) & (t < high))
    return np.where(unread if frame.missing is None else unread | frame.missing, np.nan, t)


def _inner(polygon: Polygon, shape: tuple[int, int]) -> NDArray[np.bool_]:
    """The reference without its outermost two pixels, which blur and the window mix with its surroundings."""
    whole = mask(polygon, shape)
    inner = cv2.erode(whole.view(np.uint8), np.ones((5, 5), np.uint8), borderValue=1).view(np.bool_)
    return inner if inner.any() else whole


def _noise(t: NDArray[np.float64], camera: Camera) -> float:
    """Standard uncertainty [K] of the mean over the reference from pixel noise; what varies over it is in that too."""
    return float(max(robust_spread(t), camera.noise or 0.0) / t.size**0.5)


def _celsius(kelvin: float) -> str:
    return f"{kelvin - ZERO_CELSIUS:.1f} °C"


def _refuse(task: FrameTask, expected: str, got: str, remedy: str) -> NoReturn:
    raise FrameError(Fault(f"{task.id}: window_from", expected, got, remedy))
