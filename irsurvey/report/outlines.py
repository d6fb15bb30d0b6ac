"""Outlines on a picture: one light ink between two dark lines, legible on any colour."""

from __future__ import annotations

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.report.inks import DARK, LIGHT, Pixels

WIDTH = 3
"""Pixels an outline takes outside what it encloses: dark, light, dark."""

_NEIGHBOURS = np.ones((3, 3), dtype=np.uint8)
_DASH, _GAP = 8, 6
_BAR = 5  # half the length of the bar at the end of a line


def around_regions(canvas: Pixels, regions: NDArray[np.uint16]) -> None:
    """Draw a solid line just outside every region of a label image; where two touch, on the lower-numbered one."""
    first = cv2.dilate(regions, _NEIGHBOURS)
    second = cv2.dilate(first, _NEIGHBOURS)
    third = cv2.dilate(second, _NEIGHBOURS)
    canvas[third != regions] = DARK
    canvas[second != first] = LIGHT


def along_polygon(canvas: Pixels, corners: NDArray[np.int32]) -> None:
    """Draw a solid line along a closed polygon; corners (n, 2) in pixels of the canvas."""
    cv2.polylines(canvas, [corners], isClosed=True, color=DARK, thickness=WIDTH)
    cv2.polylines(canvas, [corners], isClosed=True, color=LIGHT, thickness=1)


def along_line(canvas: Pixels, ends: NDArray[np.int32]) -> None:
    """Draw a straight line from one end (2, 2) to the other, with a short bar across it at either end."""
    along = (ends[1] - ends[0]).astype(np.float64)
    across = np.array([-along[1], along[0]]) / max(float(np.hypot(*along)), 1.0) * _BAR
    bars = [np.rint([end - across, end + across]).astype(np.int32) for end in ends]
    drawn = np.zeros_like(canvas)
    for first, last in (ends, *bars):
        cv2.line(drawn, first.tolist(), last.tolist(), color=1)
    canvas[cv2.dilate(drawn, _NEIGHBOURS) > 0] = DARK
    canvas[drawn > 0] = LIGHT


def leader(canvas: Pixels, first: tuple[int, int], last: tuple[int, int]) -> None:
    """Draw a thin straight line from one point to another."""
    drawn = np.zeros_like(canvas)
    cv2.line(drawn, first, last, color=1)
    canvas[cv2.dilate(drawn, _NEIGHBOURS) > 0] = DARK
    canvas[drawn > 0] = LIGHT


def dashed(canvas: Pixels, area: NDArray[np.uint8]) -> None:
    """Draw a dashed line along the rim of an area (not 0 inside)."""
    dashes = np.zeros_like(area)
    for contour in cv2.findContours(area, cv2.RETR_EXTERNAL, cv2.CHAIN_APPROX_NONE)[0]:
        x, y = contour[np.arange(len(contour)) % (_DASH + _GAP) < _DASH, 0].T
        dashes[y, x] = 1
    canvas[cv2.dilate(dashes, _NEIGHBOURS) > 0] = DARK
    canvas[dashes > 0] = LIGHT
