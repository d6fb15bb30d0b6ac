"""Separate warm parts before a cooler background, and which of them are alike and stand in one row."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from math import log
from typing import Final

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.anomalies.patch import Patch, cropped
from irsurvey.anomalies.segment import EDGE_BAND, Thresholds, thresholds

_SADDLE: Final = log(1.25)
_CLUTTER: Final = 2.0
"""Two maxima are two parts where the lower one is 1.25 times the saddle between them, each with so many times the least
rise that counts added [house]: hot parts by their contrast, lukewarm ones not by the unevenness of a plate."""
_LEVEL: Final = 1e-6
"""Difference of logarithms below which two pixels are equally high: rounding of single precision."""
_NECK: Final = log(1.5)
"""Two widths are two parts where the neck between them is below two thirds of the narrower one [house]."""
_WIDE: Final = 3.0
"""Half-width [px] each side of a neck must have: of narrower ones a ragged rim may feign a neck."""
_SOLID: Final = 0.85
"""Solidity of what is left beside a hotter part, from which it is a part and not its halo [house]; a half ring has
0.75 where its hole is half as wide as it is, and less where it is thinner; a rectangle has 1."""
_SPOT: Final = 9
"""Pixels of the hottest spot, 3 × 3, whose least one stands for the highest rise of a part."""
_LEAST_SHARE: Final = 0.15
"""Share of the highest rise of a part below which a pixel is none of it [house]."""
_MOST: Final = 0.25
"""Share of the frame above which a warm region is no part but a background [house]."""

_ALONG, _ACROSS = 1.5, 2.0
"""Most that extents of like parts differ, along their row and across it [house]: a hot joint shows more of its cable,
which changes what is seen across a row of phases but hardly along it."""
_BESIDE: Final = 0.6
"""Of the smaller extent across the row, how much two neighbours must overlap [house]."""
_REGULAR: Final = 0.25
"""Most that two steps of one row differ, over the smaller of them [house]."""
_PAIR_STEP: Final = 3.0
"""Steps up to so many extents make two alone a pair [house]: of only two there is no regularity that could tell."""


@dataclass(frozen=True, slots=True, eq=False)
class Part:
    """One warm part without holes, and the number of the group it belongs to; None: nothing is like it."""

    patch: Patch
    group: int | None


def parts(
    delta: NDArray[np.float32],
    noise: NDArray[np.float32] | float,
    *,
    usable: NDArray[np.bool_],
    least: NDArray[np.float32] | float,
    min_pixels: int,
    certain: NDArray[np.bool_] | None = None,
) -> tuple[Part, ...]:
    """The warm parts of a frame, none overlapping; groups first, in reading order, then those that stand alone.

    delta (rows, columns) [K] above the background; noise [K] and least [K], the rise from which a part counts, numbers
    or maps; usable: pixels that may belong to one; certain: pixels that are warm whatever `delta` says (saturated).
    What touches is split at a neck or at a saddle between two maxima; each piece ends at half of its own median, so
    that the blur of a hot part does not make it larger than its twins.  Groups are parts alike in size that stand in
    a row or column, two of them close together or more at regular steps: no temperature is looked at, so that a
    balanced row is one as well.
    """
    height = np.where(usable, delta, np.float32(0))
    if certain is not None:
        height[certain] = np.maximum(height[certain], np.float32(np.max(height, initial=1.0)))
    regions = _regions(height, thresholds(least, noise), min_pixels)
    found: list[Patch] = []
    taken = np.zeros(delta.shape, np.bool_)
    clutter = _CLUTTER * float(np.min(least))
    pieces = [
        piece for region in regions for piece in _pieces(_mended(region, height, usable), height, clutter, min_pixels)
    ]
    for piece in sorted(pieces, key=lambda one: -one.pixels):
        if piece.pixels > _MOST * delta.size or piece.of(taken).any():  # a background, or enclosed by another part
            continue
        taken[piece.box] |= piece.mask
        found.append(piece)
    return _in_order(found)


def _regions(height: NDArray[np.float32], limits: Thresholds, min_pixels: int) -> list[Patch]:
    """Connected regions of a size that counts and warm enough to be no noise, none cut."""
    inside = height >= 0.75 * limits.extent  # what just counts is not to be frayed by noise
    cleaned = cv2.medianBlur(inside.view(np.uint8), 3).view(np.bool_)  # without single pixels and ragged rims
    seeds = cleaned & (cv2.blur(height, (3, 3)) >= limits.seed)
    _, labels, stats, _ = cv2.connectedComponentsWithStats(cleaned.view(np.uint8), connectivity=8)
    regions = []
    for label in np.unique(labels[seeds]):
        left, top, width, rows, pixels = stats[label].tolist()
        # cleaning takes its four corners from a square that is just large enough
        if pixels + 4 >= min_pixels:
            regions.append(Patch(top, left, labels[top : top + rows, left : left + width] == label))
    return regions


def _mended(region: Patch, height: NDArray[np.float32], usable: NDArray[np.bool_]) -> Patch:
    """A region with what it encloses and cannot be read, there as warm as its median: no gap between two parts."""
    from scipy.ndimage import binary_fill_holes

    gaps = binary_fill_holes(region.mask) & ~region.mask & ~usable[region.box]
    height[region.box][gaps] = np.median(height[region.box][region.mask])
    return Patch(region.top, region.left, region.mask | gaps)


def _pieces(region: Patch, height: NDArray[np.float32], clutter: float, min_pixels: int) -> Iterator[Patch]:
    """The parts one connected region consists of; what is left beside a hotter one may be a part as well."""
    left, seen = region.mask.copy(), height[region.box]
    while True:
        cores = [_core(piece, seen) for piece in _split(left, seen, clutter)]
        if not cores:
            return
        for core in cores:
            yield _placed(core, region)
        # A hotter part's blur covers the band around it; beyond it may lie a cooler part that touches it.
        reach = np.ones((2 * EDGE_BAND + 1, 2 * EDGE_BAND + 1), np.uint8)
        blurred = cv2.dilate(np.logical_or.reduce(cores).view(np.uint8), reach).view(np.bool_)
        rest = cv2.morphologyEx((left & ~blurred).view(np.uint8), cv2.MORPH_OPEN, np.ones((3, 3), np.uint8))
        left = np.zeros_like(left)
        for one in _connected(rest.view(np.bool_)):
            if one.sum() >= min_pixels and _solidity(one) >= _SOLID:
                left |= one


def _split(part: NDArray[np.bool_], height: NDArray[np.float32], clutter: float) -> list[NDArray[np.bool_]]:
    """Every connected piece of a region, cut at its necks and between its maxima."""
    pieces = _connected(part)
    smooth = cv2.GaussianBlur(np.where(part, height, 0).astype(np.float32), (0, 0), 1.5)
    weight = cv2.GaussianBlur(part.astype(np.float32), (0, 0), 1.5)
    contrast = np.where(part, smooth / np.maximum(weight, 1e-6), 0).astype(np.float32)
    pieces = [cut for piece in pieces for cut in _watershed(piece, contrast + clutter, _SADDLE, 1.5)]
    return [cut for piece in pieces for cut in _watershed(piece, _depth(piece), _NECK, _WIDE)]


def _watershed(
    part: NDArray[np.bool_], relief: NDArray[np.float32], drop: float, narrowest: float
) -> list[NDArray[np.bool_]]:
    """Pieces around maxima of log(relief) that stand `drop` above the saddle between them, with this half-width."""
    from skimage.morphology import reconstruction
    from skimage.segmentation import watershed

    scale = np.log(np.maximum(relief, 1e-3))
    scale[~part] = scale[part].min()
    dome = np.where(part, scale - reconstruction(scale - drop, scale), 0)
    markers = cv2.connectedComponents((dome > _LEVEL).view(np.uint8), connectivity=8)[1]
    # a dome is one whatever the number of its tops: along a ridge many pixels are equally high
    markers[~np.isin(markers, markers[dome >= drop - _LEVEL])] = 0
    if len(np.unique(markers)) <= 2:
        return [part]
    basins = watershed(-relief, markers, mask=part)
    wide = [name for name in np.unique(basins[part]) if _depth(basins == name).max() >= narrowest]
    if len(wide) < 2:
        return [part]
    basins = watershed(-relief, np.where(np.isin(markers, wide), markers, 0), mask=part)
    return [basins == name for name in wide]


def _depth(part: NDArray[np.bool_]) -> NDArray[np.float32]:
    """How far each pixel lies from the rim [px]."""
    return np.asarray(cv2.distanceTransform(np.pad(part, 1).view(np.uint8), cv2.DIST_L2, 5)[1:-1, 1:-1], np.float32)


def _core(piece: NDArray[np.bool_], height: NDArray[np.float32]) -> NDArray[np.bool_]:
    """A piece down to half of its median, where a blurred edge has its middle; its largest connected part, filled.

    What has less than a seventh of its highest rise is another part, or its halo, and does not count in the median.
    """
    from scipy.ndimage import binary_fill_holes

    highest = float(np.partition(height[piece], -min(_SPOT, piece.sum()))[-min(_SPOT, piece.sum())])
    level = np.median(height[piece & (height >= _LEAST_SHARE * highest)]) / 2
    return np.asarray(binary_fill_holes(max(_connected(piece & (height >= level)), key=np.count_nonzero)), np.bool_)


def _connected(part: NDArray[np.bool_]) -> list[NDArray[np.bool_]]:
    count, labels = cv2.connectedComponents(part.view(np.uint8), connectivity=8)
    return [labels == name for name in range(1, count)]


def _solidity(part: NDArray[np.bool_]) -> float:
    """Pixels of a region over those of its convex hull."""
    hull = np.zeros(part.shape, np.uint8)
    cv2.fillConvexPoly(hull, cv2.convexHull(cv2.findNonZero(part.view(np.uint8))), 1)
    return float(np.count_nonzero(part) / np.count_nonzero(hull))


def _placed(piece: NDArray[np.bool_], region: Patch) -> Patch:
    patch = cropped(piece)
    assert patch is not None  # a piece is never empty
    return Patch(patch.top + region.top, patch.left + region.left, patch.mask)


def _in_order(found: list[Patch]) -> tuple[Part, ...]:
    """All parts with their groups, both in reading order."""
    groups = sorted(
        (sorted(group, key=lambda k: _corner(found[k])) for group in _rows(found)),
        key=lambda group: _corner(found[group[0]]),
    )
    grouped = [Part(found[k], number) for number, group in enumerate(groups) for k in group]
    alone = set(range(len(found))).difference(*groups)
    return (*grouped, *(Part(found[k], None) for k in sorted(alone, key=lambda k: _corner(found[k]))))


def _corner(patch: Patch) -> tuple[int, int]:
    return patch.top, patch.left


def _rows(found: list[Patch]) -> list[list[int]]:
    """Rows and columns of like parts, by index: three or more before two, narrow steps before wide ones."""
    sizes = np.array([one.mask.shape for one in found], dtype=float).reshape(-1, 2)[:, ::-1]  # along x, along y
    centres = np.array([(one.left, one.top) for one in found], dtype=float).reshape(-1, 2) + (sizes - 1) / 2
    like = [_alike(sizes, centres, axis) for axis in (0, 1)]
    free = np.ones(len(found), np.bool_)
    rows: list[list[int]] = []
    while True:
        runs = [
            (len(run) < 3, step, axis, run)
            for axis in (0, 1)
            for run, step in _runs(centres[:, axis], like[axis] & free[:, None] & free[None, :])
            if len(run) > 2 or step <= _PAIR_STEP * sizes[run, axis].min()
        ]
        if not runs:
            return rows
        row = min(runs)[-1]
        rows.append(row)
        free[row] = False


def _alike(sizes: NDArray[np.float64], centres: NDArray[np.float64], axis: int) -> NDArray[np.bool_]:
    """Which pairs (n, n) are alike in size and lie beside each other in a row along this axis."""
    ratio = np.maximum(sizes[:, None] / sizes[None], sizes[None] / sizes[:, None])
    across = 1 - axis
    low, high = centres[:, across] - sizes[:, across] / 2, centres[:, across] + sizes[:, across] / 2
    shared = np.minimum(high[:, None], high[None]) - np.maximum(low[:, None], low[None])
    smaller = np.minimum(sizes[:, None, across], sizes[None, :, across])
    return np.asarray((ratio[..., axis] <= _ALONG) & (ratio[..., across] <= _ACROSS) & (shared >= _BESIDE * smaller))


def _runs(place: NDArray[np.float64], like: NDArray[np.bool_]) -> Iterator[tuple[list[int], float]]:
    """Runs of two or more like parts at regular steps, none within another, with their mean step [px]."""
    ahead = np.where(like & (place[None] > place[:, None]), place[None] - place[:, None], np.inf)
    longest: list[set[int]] = []
    for start in np.argsort(place, kind="stable").tolist():
        run = [start]
        steps: list[float] = []
        while True:
            following = int(np.argmin(ahead[run[-1]]))
            step = float(ahead[run[-1], following])
            if not np.isfinite(step) or (steps and abs(step - steps[-1]) > _REGULAR * min(step, steps[-1])):
                break
            run.append(following)
            steps.append(step)
        if steps and not any(one.issuperset(run) for one in longest):
            longest.append(set(run))
            yield run, float(np.mean(steps))
