"""Strips drawn across thermal bridges: which pixels they read, and how undisturbed their ends are."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis import imperfections
from irsurvey.analysis.correction import Corrected
from irsurvey.analysis.measurand import Area, Bridge, area
from irsurvey.analysis.regions import Screened, stretch_of
from irsurvey.geometry.rectify import homography
from irsurvey.model import Estimate, FrameTask, KnownRectangle, Quantity, Strip

END_SHARE = 0.15
"""Share of a strip that each of its ends is: a wall is taken for undisturbed there."""
_LEAST_END = 5
"""Samples an end has at least."""
_GRADIENT_SHARE = 0.005
"""Of the deepest contrast: an end that changes by more over its own length is not undisturbed.  For a contrast that
decays exponentially, 0.5 % of it over ends of 15 % take 1.7 % from Ψ: 0.005/(2 · 0.15) (computed)."""


@dataclass(frozen=True, slots=True, eq=False)
class Drawn:
    """One strip ready to be measured: its part of the plan, its profile, and the gradient left at its ends."""

    strip: Strip
    bridge: Bridge
    own: tuple[Quantity, ...]
    profile: NDArray[np.float64]  # temperature along it [K], one sample a pixel
    gradient: float  # the steeper of its ends [K px⁻¹]
    gradient_u: float
    is_disturbed: bool  # where it should be undisturbed it still has a gradient


def drawn_strips(corrected: Corrected, screened: Screened, task: FrameTask) -> Iterator[Drawn]:
    """The strips of a frame that can be read all along."""
    for strip in task.strips:
        rows, columns = _samples(strip)
        t = screened.t[rows, columns].astype(np.float64)
        if np.isnan(t).any():
            continue
        yield _drawn(strip, rows, columns, t, corrected, screened, task)


def _samples(strip: Strip) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Rows and columns (n, width) of the pixels read: n along, one pixel apart, `width` across at each."""
    start, end = np.array(strip.start), np.array(strip.end)
    length = float(np.hypot(*(end - start)))
    along = (end - start) / length
    across = np.array([-along[1], along[0]])
    steps = np.arange(round(length) + 1)[:, None, None] * length / max(round(length), 1)
    offsets = (np.arange(strip.width) - (strip.width - 1) / 2)[None, :, None]
    points = np.rint(start + steps * along + offsets * across).astype(np.intp)
    return points[..., 1], points[..., 0]


def _drawn(
    strip: Strip,
    rows: NDArray[np.intp],
    columns: NDArray[np.intp],
    t: NDArray[np.float64],
    corrected: Corrected,
    screened: Screened,
    task: FrameTask,
) -> Drawn:
    profile = t.mean(axis=1)
    ends = _ends(strip, profile.size)
    quiet = np.concatenate(ends)
    level = profile[quiet].mean()
    deepest = int(np.argmax(np.abs(profile - level)))
    reach = task.camera.spot_pixels // 2
    around = slice(max(deepest - reach, 0), deepest + reach + 1)
    noise = screened.noise / stretch_of(corrected, task, 0)
    own: list[Quantity] = []
    members = {}
    for part, chosen in (("whole", slice(None)), ("spot", around), ("undisturbed", quiet)):
        members[part], noisy = _area(f"strip {strip.name} {part}", rows[chosen], columns[chosen], noise, corrected)
        own.append(noisy)
    fits = [_slope(profile[end], end, screened.noise / strip.width**0.5) for end in ends]
    gradient, gradient_u = max(fits, key=lambda fit: abs(fit[0]))
    change = abs(gradient) * min(end.size for end in ends)
    allowed = max(_GRADIENT_SHARE * abs(profile[deepest] - level), 2 * gradient_u * min(end.size for end in ends))
    stretched = profile.size / (profile.size - 1)  # each sample stands for one step: half of one beyond either end
    across, down = _span(strip, task)
    span = (across * stretched, down * stretched)
    bridge = Bridge(strip.name, members["whole"], members["spot"], members["undisturbed"], span)
    return Drawn(strip, bridge, tuple(own), profile, gradient, gradient_u, bool(change > allowed))


def gradient_per_metre(drawn: Drawn, length: Estimate | None) -> Estimate | None:
    """How steep the ends still are [K m⁻¹]; None without a scale."""
    if length is None or not length.value > 0:
        return None
    pixels = drawn.profile.size / length.value
    return Estimate(drawn.gradient * pixels, drawn.gradient_u * pixels)


def _ends(strip: Strip, samples: int) -> list[NDArray[np.intp]]:
    """Samples of the ends at which the wall is undisturbed."""
    size = min(max(round(END_SHARE * samples), _LEAST_END), samples // 2)
    both = {"from": np.arange(size), "to": np.arange(samples - size, samples)}
    return list(both.values()) if strip.undisturbed == "both" else [both[strip.undisturbed]]


def _area(
    name: str, rows: NDArray[np.intp], columns: NDArray[np.intp], noise: float, corrected: Corrected
) -> tuple[Area, Quantity]:
    rows, columns = rows.ravel(), columns.ravel()
    noisy = Quantity(f"noise:{name}", 0.0, noise / rows.size**0.5)
    lens = tuple(
        (shift, factor)
        for shift, factor in imperfections.shading(rows, columns, corrected.t.shape)
        if shift in corrected.scene
    )
    measured = area(corrected, rows, columns)
    return Area(measured.parts, ((noisy.name, 1.0), *lens)), noisy


def _slope(profile: NDArray[np.float64], at: NDArray[np.intp], noise: float) -> tuple[float, float]:
    """Gradient of an end [K px⁻¹] by least squares, and its standard uncertainty from noise alone."""
    x = at - at.mean()
    spread = float((x**2).sum())
    return (float((x * profile).sum() / spread), noise / spread**0.5) if spread > 0 else (0.0, 0.0)


def _span(strip: Strip, task: FrameTask) -> tuple[float, float]:
    """Length in pixels, or by the sides of a known rectangle."""
    start, end = np.array(strip.start), np.array(strip.end)
    if not isinstance(task.known_scale, KnownRectangle):
        return float(np.hypot(*(end - start))), 0.0
    matrix = homography(task.known_scale.corners, 1.0, 1.0)
    points = matrix @ np.stack([(*start, 1.0), (*end, 1.0)], axis=1)
    across, down = np.diff(points[:2] / points[2], axis=1)[:, 0]
    return float(abs(across)), float(abs(down))
