"""Measures of a region: where its extreme lies, how it is shaped, how sharp its edge is."""

from __future__ import annotations

from dataclasses import dataclass

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.anomalies.patch import Patch


@dataclass(frozen=True, slots=True, eq=False)
class Spot:
    """Where a region's extreme was read: the pixels of one full measurement spot, or one pixel."""

    rows: NDArray[np.intp]
    columns: NDArray[np.intp]
    is_full: bool

    @property
    def centre(self) -> tuple[float, float]:
        """Centre (x, y) [px]."""
        return float(self.columns.mean()), float(self.rows.mean())


def extreme_spot(t: NDArray[np.float32], region: Patch, sense: str, spot_pixels: int) -> Spot | None:
    """The full measurement spot inside `region` with the highest ("hot") or lowest ("cold") mean.

    t (rows, columns) [K], NaN pixels belong to no spot; where no full spot fits, the extreme pixel; None where the
    region has no measurable pixel.
    """
    seen = t[region.box]
    inside = region.mask & ~np.isnan(seen)
    if not inside.any():
        return None
    top, left = region.top, region.left
    score = np.where(inside, seen if sense == "hot" else -seen, -np.inf).astype(np.float64)
    if min(inside.shape) >= spot_pixels:
        windows = (spot_pixels, spot_pixels)
        filled = np.where(inside, score, 0.0)
        anchor = (0, 0)  # a mean is stored at the first row and column of its spot
        mean = cv2.blur(filled, windows, anchor=anchor, borderType=cv2.BORDER_CONSTANT)
        full = cv2.erode(inside.view(np.uint8), np.ones(windows, np.uint8), anchor=anchor, borderValue=0).view(np.bool_)
        if full.any():
            row, column = np.unravel_index(int(np.argmax(np.where(full, mean, -np.inf))), full.shape)
            rows, columns = np.mgrid[row : row + spot_pixels, column : column + spot_pixels]
            return Spot(rows.ravel() + top, columns.ravel() + left, is_full=True)
    row, column = np.unravel_index(int(np.argmax(score)), score.shape)
    return Spot(np.array([row + top], np.intp), np.array([column + left], np.intp), is_full=False)


def elongation(region: Patch) -> float:
    """Major over minor axis of the ellipse with the region's second moments; ≥ 1.

    Pixels count as unit squares (1/12 px² added to each moment), so a one-pixel line has a finite value.
    """
    rows, columns = region.positions()
    if rows.size < 2:
        return 1.0
    moments = np.linalg.eigvalsh(np.cov(np.stack([columns, rows]), bias=True) + np.eye(2) / 12)
    return float(np.sqrt(moments[1] / moments[0]))


def edge_sharpness(delta: NDArray[np.float32], region: Patch) -> float | None:
    """Median over the outline of the steepest gradient within one pixel, per mean contrast [px⁻¹].

    About 0.4 for a step blurred by a lens (σ ≈ 1 px), below 0.1 for a feathered plume.  None where no gradient
    exists (region at NaN or frame edges only).
    """
    rows, columns = region.box
    top, left = min(rows.start, 3), min(columns.start, 3)
    values = delta[rows.start - top : rows.stop + 3, columns.start - left : columns.stop + 3]
    bottom, right = values.shape[0] - top - region.mask.shape[0], values.shape[1] - left - region.mask.shape[1]
    part = np.pad(region.mask, ((top, bottom), (left, right))).view(np.uint8)
    slope = np.hypot(
        cv2.Sobel(values, cv2.CV_32F, 1, 0) / 8,
        cv2.Sobel(values, cv2.CV_32F, 0, 1) / 8,
    )
    kernel = np.ones((3, 3), np.uint8)
    steepest = cv2.dilate(np.nan_to_num(slope, nan=0.0).astype(np.float32), kernel)
    rim = (part - cv2.erode(part, kernel, borderValue=1)).view(np.bool_) & ~np.isnan(slope)
    contrast = abs(float(np.nanmean(values[part.view(np.bool_)]))) if rim.any() else 0.0
    return float(np.median(steepest[rim])) / contrast if contrast > 0 else None
