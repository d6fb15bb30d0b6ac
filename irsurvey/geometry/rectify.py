"""Metres on a wall seen at an angle, from the four corners of a rectangle of known size."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from irsurvey.model import Polygon


def homography(corners: Polygon, width: float, height: float) -> NDArray[np.float64]:
    """3 × 3 matrix H from pixels to metres on the rectangle's plane: (u, v, w) = H (x, y, 1), metres (u/w, v/w).

    `corners` [px] clockwise from top left, the first of which becomes the origin; `width`, `height` [m].  w is
    positive on the camera's side of the plane's horizon.  NaN where the corners cannot be the picture of a rectangle:
    three of them in line, or not convex in this order.  Heckbert (1989), Fundamentals of texture mapping, 2.2.3."""
    p = np.array(corners, dtype=np.float64)
    turns = _cross(p - np.roll(p, 1, axis=0), np.roll(p, -1, axis=0) - p)
    if not ((turns > 0).all() or (turns < 0).all()):
        return np.full((3, 3), np.nan)
    excess, along, across = p[0] - p[1] + p[2] - p[3], p[1] - p[2], p[3] - p[2]
    g = _cross(excess, across) / _cross(along, across)
    h = _cross(along, excess) / _cross(along, across)
    from_unit_square = np.ones((3, 3))
    from_unit_square[:2] = np.column_stack([p[1] - p[0] + g * p[1], p[3] - p[0] + h * p[3], p[0]])
    from_unit_square[2, :2] = g, h
    matrix: NDArray[np.float64] = np.diag([width, height, 1.0]) @ np.linalg.inv(from_unit_square)
    return matrix


def pixel_areas(shape: tuple[int, int], corners: Polygon, width: float, height: float) -> NDArray[np.float64]:
    """Area on the wall of each pixel [m²], shape (rows, columns); NaN at and beyond the horizon.

    The Jacobian determinant of the homography at the pixel's centre, |det H|/w³ (exact where nothing converges).
    Proportional to width × height: 1 and 1 give areas in parts of the rectangle, to be scaled later."""
    matrix = homography(corners, width, height)
    y, x = np.ogrid[: shape[0], : shape[1]]
    w = matrix[2, 0] * x + matrix[2, 1] * y + matrix[2, 2]
    w = np.where(w > 0, w, np.nan)
    areas: NDArray[np.float64] = np.abs(matrix[0] @ np.cross(matrix[1], matrix[2])) / (w * w * w)
    return areas


def _cross(a: NDArray[np.float64], b: NDArray[np.float64]) -> NDArray[np.float64]:
    product: NDArray[np.float64] = a[..., 0] * b[..., 1] - a[..., 1] * b[..., 0]
    return product
