"""What changed between two temperature maps of one view: their difference without drift, and where it counts."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.anomalies.noise import robust_spread
from irsurvey.anomalies.patch import Patch
from irsurvey.anomalies.segment import segment, thresholds

_BLOCKS = 4
"""The frame is divided into this many blocks each way to see how even its drift is: a leak fills few of the 16."""
_BLOCK_PIXELS = 25
"""The median of fewer says nothing of a block: its noise is a quarter of that of one pixel."""
_GRADIENT_BLUR = 1.0
"""Standard deviation [px] of the blur against noise before gradients are taken: about that of a lens."""


@dataclass(frozen=True, slots=True, eq=False)
class Changes:
    """Two maps compared.

    `difference` (rows, columns) [K]: the later minus the earlier, `drift` taken out, NaN where either is unknown;
    `drift` [K] over the steady area, with `drift_u` for its noise and how it differs from place to place, and
    `elsewhere` [K] over the whole of what is compared, NaN where nothing is; `slopes`, two maps [K px⁻¹] along x and
    y, of what both maps show; `patches` with the sense in which they changed.
    """

    difference: NDArray[np.float32]
    drift: float
    drift_u: float
    elsewhere: float
    slopes: tuple[NDArray[np.float32], NDArray[np.float32]]
    patches: tuple[tuple[str, Patch], ...]


def changes(
    after: NDArray[np.float32],
    before: NDArray[np.float32],
    noise: NDArray[np.float32] | float,
    *,
    usable: NDArray[np.bool_],
    steady: NDArray[np.bool_],
    least: NDArray[np.float32] | float,
    misregistration: float,
    min_pixels: int | NDArray[np.float32],
) -> Changes:
    """The regions of a view that changed by `least` [K] or more, beyond noise and what a misregistration can feign.

    after, before (rows, columns) [K] on one grid, NaN where unknown; noise [K] of their difference, √2 that of one of
    two alike; usable: pixels a region may have; steady: those whose change is drift (camera, room air), all usable ones
    where none of them is; misregistration [px] that may remain: it feigns a change of that many pixels times the
    gradient, where both show one.  min_pixels as in `segment`.
    """
    known = ~np.isnan(after) & ~np.isnan(before)
    compared = known & usable
    raw = np.where(known, after - before, np.float32(np.nan))
    elsewhere = _median(raw, compared)
    settled = compared & steady if (compared & steady).any() else compared
    drift = _median(raw, settled)
    drift_u = float(np.hypot(_unevenness(raw, compared), _median_u(raw[settled])))
    difference = (raw - np.float32(drift)).astype(np.float32)
    slopes = _shared(_gradient(after), _gradient(before))
    # Between two pixels the gradient may be that of the steeper one.
    steepest = cv2.dilate(np.hypot(*slopes), np.ones((3, 3), np.uint8))
    limits = thresholds(least, noise, np.asarray(np.float32(misregistration) * steepest, np.float32))
    filled = np.where(known, difference, np.float32(0))
    patches = tuple(
        (sense, patch)
        for sense in ("cold", "hot")
        for patch in segment(filled, compared, sense, limits, min_pixels=min_pixels)
    )
    return Changes(difference, drift, drift_u, elsewhere, slopes, patches)


def _median(values: NDArray[np.float32], where: NDArray[np.bool_]) -> float:
    return float(np.median(values[where])) if where.any() else float("nan")


def _median_u(values: NDArray[np.float32]) -> float:
    """Standard error of a median of independent normal values, √(π/2) that of their mean; NaN of none."""
    return float(robust_spread(values) * (np.pi / 2 / max(values.size, 1)) ** 0.5)


def _unevenness(raw: NDArray[np.float32], compared: NDArray[np.bool_]) -> float:
    """How much the difference varies over the frame [K]: robust spread of its medians by blocks; of one, its own."""
    rows, columns = (np.linspace(0, size, _BLOCKS + 1).astype(int) for size in raw.shape)
    medians = []
    for top, bottom in pairwise(rows):
        for left, right in pairwise(columns):
            values = raw[top:bottom, left:right][compared[top:bottom, left:right]]
            if values.size >= _BLOCK_PIXELS:
                medians.append(float(np.median(values)))
    return robust_spread(np.array(medians) if len(medians) > 1 else raw[compared])


def _gradient(t: NDArray[np.float32]) -> tuple[NDArray[Any], NDArray[Any]]:
    """Gradient along x and y [K px⁻¹] of a blurred map; NaN next to what is unknown."""
    known = ~np.isnan(t)
    if not known.any():
        return t, t
    middle = np.float32(np.median(t[known]))
    blurred = cv2.GaussianBlur(np.where(known, t - middle, np.float32(0)), (0, 0), _GRADIENT_BLUR)
    reach = 2 * round(3 * _GRADIENT_BLUR) + 1
    inner = cv2.erode(known.view(np.uint8), np.ones((reach, reach), np.uint8), borderValue=1).view(np.bool_)
    down, right = np.gradient(blurred)
    return np.where(inner, right, np.nan), np.where(inner, down, np.nan)


def _shared(
    one: tuple[NDArray[Any], NDArray[Any]], other: tuple[NDArray[Any], NDArray[Any]]
) -> tuple[NDArray[np.float32], NDArray[np.float32]]:
    """The smaller of two gradients at each pixel, as a leak's own is in one map only; 0 where neither is known."""
    size, size_of_other = np.hypot(*one), np.hypot(*other)
    smaller = (size <= size_of_other) | np.isnan(size_of_other)
    x, y = (np.nan_to_num(np.where(smaller, a, b)).astype(np.float32) for a, b in zip(one, other, strict=True))
    return x, y
