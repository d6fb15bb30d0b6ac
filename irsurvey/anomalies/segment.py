"""Hot and cold regions of a temperature difference map."""

from __future__ import annotations

from dataclasses import dataclass
from math import log
from typing import Any

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.anomalies.patch import Patch, cropped

_SPLIT_RADIUS = 4.0
"""Half-width [px] each part must have before a neck between two is looked for: ragged rims are not necks."""
_AMPLIFIED = 1.05
"""Noise over that of the frame's main surface from which it counts as amplified."""
_SOLID = 0.9
"""Solidity from which a region is too nearly convex to have a neck of half its width."""
_SEED_SIGMAS = 3.0
"""A region is kept where a 3 × 3 mean exceeds its threshold by this many standard deviations of that mean."""

EDGE_BAND = 2
"""Pixels on each side of a border between optics that blur reaches: three σ of a lens of 0.7 px."""


@dataclass(frozen=True, slots=True)
class Thresholds:
    """When a deviation counts: `extent` bounds a region, `seed` [K] must be exceeded somewhere in it."""

    extent: NDArray[np.float32]
    seed: NDArray[np.float32]


def thresholds(
    least: NDArray[np.float32] | float,
    noise: NDArray[np.float32] | float,
    allowance: NDArray[np.float32] | float = 0.0,
) -> Thresholds:
    """Extent and seed thresholds [K], broadcast from the smallest ΔT that counts, noise and shading allowance."""
    extent = np.asarray(least, np.float32) + np.asarray(allowance, np.float32)
    return Thresholds(extent, extent + np.float32(_SEED_SIGMAS / 3) * np.asarray(noise, np.float32))


def least_delta(
    min_delta: float, noise: float, amplified: NDArray[np.float32] | float
) -> NDArray[np.float32] | float:
    """Smallest ΔT that counts [K]: as stated, and five times the noise where a low emissivity amplifies it."""
    if not isinstance(amplified, np.ndarray):
        return min_delta
    raised = np.maximum(np.float32(min_delta), 5 * amplified)
    return np.where(amplified > _AMPLIFIED * noise, raised, np.float32(min_delta))


def shading_allowance(delta: NDArray[np.float32], usable: NDArray[np.bool_]) -> tuple[float, NDArray[np.float32]]:
    """What lens shading may account for [K, signed], and a map of it that grows to the corners.

    Lenses darken towards the corners, and shutters leave an offset there: both show in at least three corners
    alike.  The third largest corner deviation of one sign is therefore allowed for, with the fourth power of the
    distance from the centre, half as much again for its asymmetry; one corner alone (a real corner of a room)
    gets no allowance.  Common practice: corners are read with caution.
    """
    rows, columns = delta.shape
    size = max(4, min(rows, columns) // 12)
    corners = [
        delta[sy, sx][usable[sy, sx]]
        for sy in (slice(None, size), slice(-size, None))
        for sx in (slice(None, size), slice(-size, None))
    ]
    levels = sorted(float(np.median(corner)) for corner in corners if corner.size)
    if len(levels) < 3:
        return 0.0, np.zeros((1, 1), np.float32)
    amount = min(levels[2], 0.0) or max(levels[-3], 0.0)
    amount = float(np.clip(1.5 * amount, -1.5, 1.5))
    x = (np.arange(columns, dtype=np.float32) - (columns - 1) / 2)[None, :]
    y = (np.arange(rows, dtype=np.float32) - (rows - 1) / 2)[:, None]
    radius = (x**2 + y**2) / np.float32(((columns - 1) ** 2 + (rows - 1) ** 2) / 4)
    return amount, (np.float32(amount) * radius**2).astype(np.float32)


def segment(
    delta: NDArray[np.float32],
    usable: NDArray[np.bool_],
    sense: str,
    limits: Thresholds,
    *,
    min_pixels: int | NDArray[np.float32],
    certain: NDArray[np.bool_] | None = None,
) -> list[Patch]:
    """The regions that deviate in one sense ("hot" or "cold"), none overlapping.

    delta (rows, columns) [K]; usable: pixels that may belong to a region; min_pixels: a count, or a map of pixel
    areas divided by the smallest area that counts.  `certain` pixels (saturated hot) are part of a region whatever
    their number, and keep it.  Hysteresis: connected pixels at or above `extent` that somewhere pass `seed`.
    """
    height = delta if sense == "hot" else -delta
    inside = usable & (height >= limits.extent)
    if certain is not None:
        inside |= certain
    if not inside.any():
        return []
    # The majority of 3 × 3 removes single noisy pixels from rims, fills pinholes and leaves straight edges alone.
    cleaned = cv2.medianBlur(inside.view(np.uint8), 3).view(np.bool_) & (usable | inside)
    mean = cv2.blur(np.where(usable, height, np.float32(0)), (3, 3))
    seeds = cleaned & (mean >= limits.seed)
    if certain is not None:
        cleaned |= certain
        seeds |= certain
    _, labels, stats, _ = cv2.connectedComponentsWithStats(cleaned.view(np.uint8), connectivity=8)
    regions: list[Patch] = []
    for label in np.unique(labels[seeds]):
        if label == 0:
            continue
        x, y, width, height_px = (int(value) for value in stats[label, :4])
        box = (slice(y, y + height_px), slice(x, x + width))
        part = labels[box] == label
        least = min_pixels if isinstance(min_pixels, int) else 1.0
        kept = certain is not None and bool(certain[box][part].any())
        around = (slice(max(y - 1, 0), y + height_px + 1), slice(max(x - 1, 0), x + width + 1))
        reached = _with_corners(labels[around], int(label), inside[around])
        weight = reached if isinstance(min_pixels, int) else reached * min_pixels[around]
        if weight.sum() < least and not kept:
            continue
        for piece in _split(part, height[box], int(least) if isinstance(min_pixels, int) else 25):
            patch = cropped(piece)
            if patch is not None:
                regions.append(Patch(patch.top + y, patch.left + x, patch.mask))
    return regions


def _with_corners(labels: NDArray[Any], label: int, inside: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """One region with what cleaning took from its corners: a square of just the size that counts does count."""
    grown = cv2.dilate((labels == label).view(np.uint8), np.ones((3, 3), np.uint8)).view(np.bool_)
    return np.asarray((labels == label) | (grown & inside & (labels == 0)))


def edge_band(optics: NDArray[np.uint8], width: int = EDGE_BAND) -> NDArray[np.bool_]:
    """Pixels within `width` of a border between different optics: blur mixes both there, no correction fits."""
    if optics.min() == optics.max():
        return np.zeros(optics.shape, np.bool_)
    kernel = np.ones((2 * width + 1, 2 * width + 1), np.uint8)
    return np.asarray(cv2.dilate(optics, kernel) != cv2.erode(optics, kernel), dtype=np.bool_)


def _split(part: NDArray[np.bool_], height: NDArray[np.float32], min_pixels: int) -> list[NDArray[np.bool_]]:
    """Cut a region that is clearly two: a neck under half the width, or a saddle under half the smaller peak's ΔT."""
    padded = np.pad(part, 1).view(np.uint8)
    distance = np.asarray(cv2.distanceTransform(padded, cv2.DIST_L2, 5)[1:-1, 1:-1], np.float32)
    if distance.max() < _SPLIT_RADIUS:
        return [part]
    smooth = cv2.GaussianBlur(np.where(part, height, 0).astype(np.float32), (0, 0), 1.5)
    weight = cv2.GaussianBlur(part.astype(np.float32), (0, 0), 1.5)
    contrast = np.where(part, smooth / np.maximum(weight, 1e-6), 0).astype(np.float32)
    core = contrast[distance >= _SPLIT_RADIUS]
    may_split = (
        (distance, _solidity(part) < _SOLID),
        (contrast, core.min() <= core.max() / 2),  # else no saddle is low enough
    )
    for relief, possible in may_split:
        pieces = _watershed(part, relief, distance, min_pixels) if possible else [part]
        if len(pieces) > 1:
            return pieces
    return [part]


def _solidity(part: NDArray[np.bool_]) -> float:
    """Pixels of a region over those of its convex hull, about 1 for a convex one: it has no neck."""
    points = cv2.findNonZero(part.view(np.uint8))
    hull = np.zeros(part.shape, np.uint8)
    cv2.fillConvexPoly(hull, cv2.convexHull(points), 1)
    return float(np.count_nonzero(part) / np.count_nonzero(hull))


def _watershed(
    part: NDArray[np.bool_], relief: NDArray[np.float32], distance: NDArray[np.float32], min_pixels: int
) -> list[NDArray[np.bool_]]:
    """Pieces around maxima of `relief` that stand twice above the saddle between them, each of a size that counts."""
    from skimage.morphology import reconstruction
    from skimage.segmentation import watershed

    # On a logarithmic scale "twice as high as the saddle" is one constant height, whatever the peak.
    scale = np.log(np.maximum(relief, 1e-3))
    scale[~part] = scale[part].min()
    capped = reconstruction(scale - log(2), scale)
    tops = part & (scale - capped >= log(2) - 1e-6)
    markers = cv2.connectedComponents(tops.view(np.uint8), connectivity=8)[1]
    basins = watershed(-relief, markers, mask=part)
    wide = [name for name in range(1, markers.max() + 1) if distance[basins == name].max() >= _SPLIT_RADIUS]
    if len(wide) < 2:
        return [part]
    basins = watershed(-relief, np.where(np.isin(markers, wide), markers, 0), mask=part)
    pieces = [basins == name for name in wide]
    return pieces if all(np.count_nonzero(piece) >= min_pixels for piece in pieces) else [part]
