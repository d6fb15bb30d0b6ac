"""Polygons on the pixel grid: x right, y down, pixel centres at integers; an outline belongs to what it encloses."""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from irsurvey.model import Polygon

_ON_OUTLINE: Final = 1e-9  # [px] far above the rounding of coordinates (1e-13), far below what anybody can draw


def mask(polygon: Polygon, shape: tuple[int, int]) -> NDArray[np.bool_]:
    """The pixels whose centres lie inside or on the polygon, bool (rows, columns); even-odd where it crosses itself.

    Corners may be fractions and may lie outside the frame.  One corner stands for a point, two for a line, no corner
    for nothing.  A centre within 1e-9 px of the outline is on it, so that decimals need not be binary fractions."""
    inside = np.zeros(shape, dtype=np.bool_)
    corners = np.round(np.array(polygon, dtype=np.float64).reshape(-1, 2), 9)
    size = np.array([shape[1], shape[0]])
    if not len(corners):
        return inside
    left, top = np.clip(np.ceil(corners.min(axis=0)), 0, size).astype(int)
    right, bottom = np.clip(np.floor(corners.max(axis=0)) + 1, 0, size).astype(int)
    if left >= right or top >= bottom:
        return inside
    ends = np.roll(corners, -1, axis=0)
    box = inside[top:bottom, left:right]
    box |= _enclosed(corners, ends, (left, top), box.shape)
    box |= _on_outline(corners, ends, (left, top), box.shape)
    return inside


def area(polygon: Polygon) -> float:
    """Area enclosed by an outline that does not cross itself [px²] (shoelace); a region's pixels are not counted."""
    x, y = np.array(polygon, dtype=np.float64).reshape(-1, 2).T
    return float(abs(np.sum(x * np.roll(y, -1) - np.roll(x, -1) * y)) / 2)


def inside_fault(polygon: Polygon, shape: tuple[int, int]) -> str | None:
    """The first corner outside the frame, in words, or None; the frame ends half a pixel beyond the outer centres."""
    rows, columns = shape
    for x, y in polygon:
        if not (-0.5 <= x <= columns - 0.5 and -0.5 <= y <= rows - 0.5):
            return f"corner [{x:g}, {y:g}], outside a frame of {columns} × {rows} pixels"
    return None


def outline(region: NDArray[np.bool_]) -> tuple[tuple[int, int], ...]:
    """The outer outline of one connected region, corners (x, y) through its outermost pixel centres; () for nothing.

    `mask` of it gives the region back, with holes filled, whatever its shape: a single pixel is one corner, a line
    one pixel wide is walked there and back.  Pixels that touch at a corner count as connected."""
    import cv2

    contours, _ = cv2.findContours(region.astype(np.uint8), cv2.RETR_EXTERNAL, cv2.CHAIN_APPROX_SIMPLE)
    longest = max(contours, key=len, default=np.empty((0, 1, 2), dtype=np.int32))
    return tuple((x, y) for x, y in longest[:, 0].tolist())


def _enclosed(
    starts: NDArray[np.float64], ends: NDArray[np.float64], origin: tuple[int, int], shape: tuple[int, int]
) -> NDArray[np.bool_]:
    """Which pixel centres of the box have an odd number of edges to their left in their row."""
    low, high = np.minimum(starts[:, 1], ends[:, 1]), np.maximum(starts[:, 1], ends[:, 1])
    # half open, so that a corner between two edges is crossed once
    edge, y = _rows(np.ceil(low), np.ceil(high) - 1, origin[1], shape[0])
    (x1, y1), (x2, y2) = starts[edge].T, ends[edge].T
    x = x1 + (y - y1) * (x2 - x1) / (y2 - y1)
    column = np.clip(np.floor(x).astype(int) + 1 - origin[0], 0, shape[1])
    toggles = np.zeros((shape[0], shape[1] + 1), dtype=np.uint8)
    np.add.at(toggles, (y - origin[1], column), 1)
    # eight bits may overflow, which leaves odd and even alone, and are four times as fast
    return (np.cumsum(toggles[:, :-1], axis=1, dtype=np.uint8) & 1).view(np.bool_)


def _on_outline(
    starts: NDArray[np.float64], ends: NDArray[np.float64], origin: tuple[int, int], shape: tuple[int, int]
) -> NDArray[np.bool_]:
    """Which pixel centres of the box lie on an edge."""
    on = np.zeros(shape, dtype=np.bool_)
    low, high = np.minimum(starts, ends), np.maximum(starts, ends)
    for i in np.flatnonzero((low[:, 1] == high[:, 1]) & (low[:, 1] == np.round(low[:, 1]))):  # along a row
        row = int(low[i, 1]) - origin[1]
        first, last = int(np.ceil(low[i, 0])) - origin[0], int(np.floor(high[i, 0])) - origin[0]
        if 0 <= row < shape[0]:
            on[row, max(first, 0) : max(last + 1, 0)] = True
    sloping = np.flatnonzero(low[:, 1] < high[:, 1])
    edge, y = _rows(np.ceil(low[sloping, 1]), np.floor(high[sloping, 1]), origin[1], shape[0])
    (x1, y1), (x2, y2) = starts[sloping][edge].T, ends[sloping][edge].T
    x = np.round(x1 + (y - y1) * (x2 - x1) / (y2 - y1)).astype(int)
    away = np.abs((x2 - x1) * (y - y1) - (x - x1) * (y2 - y1)) / np.hypot(x2 - x1, y2 - y1)
    hit = (away <= _ON_OUTLINE) & (x >= origin[0]) & (x < origin[0] + shape[1])
    on[y[hit] - origin[1], x[hit] - origin[0]] = True
    return on


def _rows(
    first: NDArray[np.float64], last: NDArray[np.float64], top: int, rows: int
) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Every (edge, y) with y an integer from first to last of that edge, as far as it lies in the box."""
    first = np.clip(first, top, top + rows).astype(int)
    count = np.maximum(np.clip(last, top - 1, top + rows - 1).astype(int) - first + 1, 0)
    edge = np.repeat(np.arange(len(first)), count)
    y = np.arange(len(edge)) - np.repeat(np.cumsum(count) - count, count) + first[edge]
    return edge, y
