"""Cues of one region: what its outline, its edges and its profiles look like, each as one number."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import combinations
from typing import Any, Final

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.anomalies.patch import Patch
from irsurvey.anomalies.segment import EDGE_BAND
from irsurvey.anomalies.shape import edge_sharpness, elongation

_MARGIN: Final = 12
"""Pixels around a region that its profiles may run into: six times a soft edge of 2 px."""
_TOP: Final = 0.9
"""Quantile of the deviation that stands for its contrast: neither a noisy pixel nor the median of a bell."""
_GROWTH: Final = 0.5
"""How far beyond its outline a weak region may reach, in parts of the side of a square of its area."""
_LEAST_PIXELS: Final = 20
"""Below this no shape can be told: a square of less than five pixels is all rim."""
_CLEAR: Final = 10.0
"""Contrast over noise from which an outline is drawn by the scene: noise moves it by about a tenth of a pixel then."""
_SAMPLE: Final = 0.5
"""Distance of samples along a profile [px]."""
_LINES: Final = (-0.3, -0.2, -0.1, 0.0, 0.1, 0.2, 0.3)
"""Where profiles are laid, in parts of the region's extent beside the profile."""
_SHARPEST: Final = 1.5
"""Shortest fall [px] that counts: a lens and the smoothing here make any edge at least as soft."""
_MOST_SIDES: Final = 24
"""Sides of a hull among which the four of its smallest quadrilateral are looked for: every 15° of a round one."""
_HULL_STEP: Final = 0.2
"""How far a hull of more sides may be simplified at first [px]."""

_Map = NDArray[np.float32]
_Mask = NDArray[np.bool_]
_Line = NDArray[np.float32]


@dataclass(frozen=True, slots=True)
class Cues:
    """What one region looks like.  NaN where it cannot be told: too small or faint, cut off, or nothing drawn.

    All but `elongation` and `edge_sharpness_per_pixel` describe the pixels with at least half of its contrast.
    """

    elongation: float  # long over short axis, ≥ 1
    edge_sharpness_per_pixel: float  # steepest gradient at its outline, per mean contrast
    four_sidedness: float  # its area over that of the smallest four-sided outline around it, ≤ 1
    solidity: float  # its area over that of its convex hull, ≤ 1
    raggedness: float  # length of its outline over that of its convex hull, less one
    plateau_share: float  # of its area, with at least four fifths of its contrast
    flat_top: float  # across it: width with four fifths of the contrast over width with half of it
    feathering: float  # along or across it: how much more slowly it fades at one end than at the other, ≥ 1
    frame_ends: float  # how many of its two ends lie at the frame's edge: 0, 1 or 2
    gap_to_opening_px: float  # 3 beside an opening: nearer no region can be, for blur


def cues(delta: _Map, patch: Patch, *, openings: _Mask | None, noise: float) -> Cues:
    """Cues of the region `patch` in a temperature difference map.

    delta (rows, columns) [K], of either sense, NaN where not measurable; openings (rows, columns): pixels of drawn
    windows, doors and joints, None where there are none; noise of a pixel [K].  Cues of shape are NaN where fewer than
    20 pixels have half of the contrast, or where the contrast is less than ten times the noise.
    """
    sharpness = edge_sharpness(delta, patch)
    part = _part(delta, patch, openings)
    shape = dict.fromkeys(_OF_SHAPE, np.nan)
    if part is not None and part.contrast >= _CLEAR * noise:
        shape |= _outline_cues(part) | _profile_cues(part)
    return Cues(
        elongation=elongation(patch),
        edge_sharpness_per_pixel=np.nan if sharpness is None else sharpness,
        gap_to_opening_px=_gap(patch, openings),
        **shape,
    )


_OF_SHAPE: Final = (
    "four_sidedness",
    "solidity",
    "raggedness",
    "plateau_share",
    "flat_top",
    "feathering",
    "frame_ends",
)


@dataclass(frozen=True, slots=True, eq=False)
class _Part:
    """A region and its surroundings, cut out of the frame.

    `height` is its deviation made positive and smoothed [K], NaN where nothing is measured; in openings and on their
    edges it is 0, so that whatever comes out of one has a sharp end there.  `body`: the pixels of the region with half
    of its `contrast` [K] or more.  `frame`: left, top, right, bottom edge of the frame in pixels of this part.
    """

    height: _Map
    body: _Mask
    contrast: float
    frame: tuple[int, int, int, int]


def _part(delta: _Map, patch: Patch, openings: _Mask | None) -> _Part | None:
    """None where too little of the region is left to have a shape."""
    rows, columns = patch.box
    reach = _MARGIN + int(_GROWTH * patch.pixels**0.5)
    top, left = max(rows.start - reach, 0), max(columns.start - reach, 0)
    window = (slice(top, rows.stop + reach), slice(left, columns.stop + reach))
    values = delta[window]
    open_ = _grown(openings[window], EDGE_BAND) if openings is not None else np.zeros(values.shape, np.bool_)
    seen = np.isfinite(values) & ~open_
    inside = np.zeros(values.shape, np.bool_)
    inside[rows.start - top : rows.stop - top, columns.start - left : columns.stop - left] = patch.mask
    inside &= seen
    if np.count_nonzero(inside) < _LEAST_PIXELS:
        return None
    height = _smoothed(values if float(np.mean(values[inside])) > 0 else -values, seen)
    height[open_] = 0
    contrast = float(np.quantile(height[inside], _TOP))
    body = _body(height, inside, contrast / 2)
    if np.count_nonzero(body) < _LEAST_PIXELS:
        return None
    return _Part(height, body, contrast, (-left, -top, delta.shape[1] - 1 - left, delta.shape[0] - 1 - top))


def _grown(mask: _Mask, reach: int) -> _Mask:
    kernel = cv2.getStructuringElement(cv2.MORPH_ELLIPSE, (2 * reach + 1, 2 * reach + 1))
    return np.asarray(cv2.dilate(mask.view(np.uint8), kernel), np.uint8).view(np.bool_)


def _smoothed(values: _Map, seen: _Mask) -> _Map:
    """A Gaussian mean of 1 px over the pixels that are seen, NaN elsewhere."""
    weight = cv2.GaussianBlur(seen.astype(np.float32), (0, 0), 1.0)
    mean = cv2.GaussianBlur(np.where(seen, values, np.float32(0)), (0, 0), 1.0)
    return np.where(seen, mean / np.maximum(weight, np.float32(1e-6)), np.float32(np.nan))


def _body(height: _Map, inside: _Mask, level: float) -> _Mask:
    """The largest connected piece of the region at or above `level`.

    A region of little contrast ends where less no longer counts, above half of it.  Only such a one may grow, so that
    a neighbour that was cut away from a strong one stays away.
    """
    rim = inside & _grown(~inside, 1)
    room = inside
    if rim.any() and float(np.median(height[rim])) > level:
        room = _grown(inside, max(3, int(_GROWTH * np.count_nonzero(inside) ** 0.5)))
    above = room & (height >= level)  # NaN is not
    _, labels, stats, _ = cv2.connectedComponentsWithStats(above.view(np.uint8), connectivity=4)
    if len(stats) < 2:
        return above
    return np.asarray(labels == 1 + int(np.argmax(stats[1:, cv2.CC_STAT_AREA])))


def _outline_cues(part: _Part) -> dict[str, float]:
    """How the contour at half of the contrast compares with its convex hull and with four straight sides."""
    contour = _contour(part)
    hull = np.asarray(cv2.convexHull(contour), np.float32)
    area = cv2.contourArea(contour)
    return {
        "four_sidedness": area / _four_sided_area(hull),
        "solidity": area / cv2.contourArea(hull),
        "raggedness": max(cv2.arcLength(contour, True) / cv2.arcLength(hull, True) - 1, 0.0),
        "plateau_share": float(np.mean(part.height[part.body] >= 0.8 * part.contrast)),
    }


def _contour(part: _Part) -> NDArray[np.float32]:
    """Outer contour (n, 1, 2) in fractions of a pixel, x and y, closed along whatever cuts the region off."""
    from skimage.measure import find_contours

    height = np.where(np.isfinite(part.height) & _grown(part.body, 1), part.height, np.float32(0))
    # Beside the body, what lies above half of the contrast belongs to a neighbour that was cut away.
    height = np.where(part.body, height, np.minimum(height, np.float32(0.499 * part.contrast)))
    longest = max(find_contours(np.pad(height, 1), part.contrast / 2), key=len)
    return np.ascontiguousarray(longest[:-1, None, ::-1], dtype=np.float32)


def _four_sided_area(hull: NDArray[np.float32]) -> float:
    """Area of the smallest quadrilateral around a hull with the directions of four of its sides, or of a rectangle.

    Every four sides are tried; those that turn by half a turn or more at a corner enclose nothing.
    """
    sides = cv2.minAreaRect(hull)[1]
    corners, step = hull, _HULL_STEP
    while len(corners) > _MOST_SIDES:
        corners, step = np.asarray(cv2.approxPolyDP(hull, step, True), np.float32), 1.5 * step
    points = corners[:, 0].astype(np.float64)
    along = np.roll(points, -1, axis=0) - points
    sense = np.sign(cv2.contourArea(corners, True))
    outward = sense * along[:, ::-1] * (1, -1)
    reach = (hull[:, 0].astype(np.float64) @ outward.T).max(axis=0)  # where each side, moved outward, meets the hull
    turn = sense * (along[:, None, 0] * along[None, :, 1] - along[:, None, 1] * along[None, :, 0])
    with np.errstate(divide="ignore", invalid="ignore"):
        meets = sense * (reach[:, None, None] * along[None] - reach[None, :, None] * along[:, None]) / turn[..., None]
    four = np.array(list(combinations(range(len(points)), 4)), np.intp).reshape(-1, 4)
    following = np.roll(four, -1, axis=1)
    encloses = (turn[four, following] > 0).all(axis=1)
    x, y = np.moveaxis(meets[four[encloses], following[encloses]], -1, 0)
    areas = np.abs(np.sum(x * np.roll(y, -1, axis=1) - np.roll(x, -1, axis=1) * y, axis=1)) / 2
    return float(min(areas.min(initial=np.inf), sides[0] * sides[1]))


def _profile_cues(part: _Part) -> dict[str, float]:
    """What profiles along both sides of the smallest rectangle around the body show."""
    rows, columns = np.nonzero(part.body)
    centre, sides, degrees = cv2.minAreaRect(np.stack([columns, rows], axis=1).astype(np.float32))
    short, long = min(sides), max(sides)
    turn = np.radians(degrees + (0 if sides[0] < sides[1] else 90))
    across, along = np.array([np.cos(turn), np.sin(turn)]), np.array([-np.sin(turn), np.cos(turn)])
    crossing = [_profile(part, centre + at * long * along, across, short) for at in _LINES]
    lengthwise = [_profile(part, centre + at * short * across, along, long) for at in _LINES]
    fades = np.array([_median([_fading(line, part.contrast) for line in one]) for one in (crossing, lengthwise)])
    ends = [centre + side * long / 2 * along for side in (-1, 1)]
    return {
        "flat_top": _median([_flatness(line) for line in crossing]),
        "feathering": float(np.fmax.reduce(fades)),
        "frame_ends": float(sum(_is_at_frame_edge(end, part.frame) for end in ends)),
    }


def _profile(part: _Part, through: NDArray[Any], direction: NDArray[Any], extent: float) -> _Line:
    """Heights along a line, as far as _MARGIN beyond the body at either end; NaN where nothing is measured."""
    run = np.arange(-extent / 2 - _MARGIN, extent / 2 + _MARGIN + _SAMPLE, _SAMPLE)
    x, y = (through[:, None] + run * direction[:, None]).astype(np.float32)
    nothing = float("nan")
    line = cv2.remap(part.height, x, y, cv2.INTER_LINEAR, borderMode=cv2.BORDER_CONSTANT, borderValue=nothing)
    return np.asarray(line, np.float32).ravel()


def _flatness(line: _Line) -> float:
    """Share of the stretch with half of the line's height or more that has four fifths of it; NaN where cut off."""
    stretch = _stretch(line, 0.5)
    if stretch is None or np.isnan(line[[stretch.start - 1, stretch.stop]]).all():
        return np.nan
    return float(np.mean(line[stretch] >= 0.8 * np.nanmax(line)))


def _fading(line: _Line, contrast: float) -> float:
    """Longer over shorter of the two distances in which a line falls from four fifths to two fifths of its height.

    Counted from the outermost sample at four fifths, so that a stud between two bays is no end of them.  A fall that
    the frame cuts off is at least as long as what is seen of it: it counts where it is the longer one.  NaN elsewhere,
    and where the line does not reach half of the region's contrast.
    """
    stretch = _stretch(line, 0.4)
    if stretch is None or np.nanmax(line) < contrast / 2:
        return np.nan
    high = np.flatnonzero(line[stretch] >= 0.8 * np.nanmax(line))
    falls = (high[0] + 1) * _SAMPLE, (stretch.stop - stretch.start - high[-1]) * _SAMPLE
    are_cut = np.isnan(line[[stretch.start - 1, stretch.stop]])
    (short, is_cut), (long, _) = sorted(zip(np.maximum(falls, _SHARPEST), are_cut, strict=True))
    return np.nan if is_cut else float(long / short)


def _stretch(line: _Line, share: float) -> slice | None:
    """The samples around the highest one that have at least a share of its height; None without both of its ends."""
    if np.isnan(line).all():
        return None
    at = int(np.nanargmax(line))
    below = np.flatnonzero(~(line >= share * line[at]))  # NaN is below
    before, after = below[below < at], below[below > at]
    return slice(int(before[-1]) + 1, int(after[0])) if before.size and after.size else None


def _is_at_frame_edge(point: NDArray[Any], frame: tuple[int, int, int, int]) -> bool:
    """Whether a point lies within 2 px of the frame's edge, beyond it included."""
    left, top, right, bottom = frame
    return bool(min(point[0] - left, point[1] - top, right - point[0], bottom - point[1]) <= 2)


def _gap(patch: Patch, openings: _Mask | None) -> float:
    """Distance [px] to the nearest opening, NaN without one."""
    if openings is None or not openings.any():
        return np.nan
    away = cv2.distanceTransform((~openings).view(np.uint8), cv2.DIST_L2, 5)
    return float(patch.of(np.asarray(away)).min())


def _median(values: list[float]) -> float:
    """Of those that could be measured, if they are half of them at least."""
    measured = [value for value in values if np.isfinite(value)]
    return float(np.median(measured)) if 2 * len(measured) >= len(values) else np.nan
