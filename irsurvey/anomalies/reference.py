"""The reference area: what the rest of the frame is compared with."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.anomalies.noise import robust_spread

_FIT_PIXELS = 12_000
"""A plane is fitted to every k-th pixel of larger areas: noise of 50 mK is then far below 1 mK on the plane."""
_BLOCK = 8
"""Side [px] of the blocks whose means are taken as independent: structure of walls and shutters is correlated."""
_TUKEY = 4.685
"""Tukey's biweight constant for 95 % efficiency.  Huber and Ronchetti (2009), Robust Statistics."""


@dataclass(frozen=True, slots=True, eq=False)
class Reference:
    """A fitted reference area: level + slope_x·(x − x0) + slope_y·(y − y0) [K], slopes [K px⁻¹].

    The plane is continued over the frame, but no further than the area is wide and high beyond its `box`
    (left, top, right, bottom); from there on it stays level: a strip of wall says nothing of the far end of a house.

    `rows`, `columns` are the pixels it was computed from and `weights` (3, n) the linear functionals that
    give level and slopes from their temperatures, fixed by this fit: uncertainty moves the temperatures.
    `u_level`, `u_slope` are standard errors from block means [K, K px⁻¹]; `hidden` [K] is the range over the area
    below which a gradient does not count.
    """

    level: float
    slope: tuple[float, float]
    centre: tuple[float, float]
    box: tuple[float, float, float, float]
    spread: float
    pixels: int
    gradient: float
    u_level: float
    u_slope: tuple[float, float]
    hidden: float
    rows: NDArray[np.intp]
    columns: NDArray[np.intp]
    weights: NDArray[np.float64]

    def lever(self, x: Any, y: Any) -> tuple[Any, Any]:
        """What the slopes are multiplied by at pixel position(s) x, y [px]."""
        left, top, right, bottom = self.box
        width, height = right - left, bottom - top
        return (
            np.clip(x, left - width, right + width) - self.centre[0],
            np.clip(y, top - height, bottom + height) - self.centre[1],
        )

    def at(self, x: Any, y: Any) -> Any:
        """Reference temperature [K] at pixel position(s) x, y."""
        dx, dy = self.lever(x, y)
        return self.level + self.slope[0] * dx + self.slope[1] * dy

    def plane(self, shape: tuple[int, int]) -> NDArray[np.float32]:
        """Reference temperature [K] at every pixel, broadcastable to `shape`."""
        rows, columns = shape
        if self.slope == (0.0, 0.0):
            return np.full((1, 1), self.level, np.float32)
        return np.asarray(self.at(np.arange(columns)[None, :], np.arange(rows)[:, None]), dtype=np.float32)


def fit(t: NDArray[np.float32], area: NDArray[np.bool_], noise: float) -> Reference | None:
    """Robust centre, spread and, where the area has a gradient, plane of a reference area.

    t (rows, columns) [K]; area: its measurable pixels; noise [K].  The centre is the median.  A plane counts
    where its range over the area exceeds both the pixel noise and five times its own standard error.
    None when the area has no pixel.
    """
    rows, columns = np.nonzero(area)
    if rows.size == 0:
        return None
    stride = max(1, rows.size // _FIT_PIXELS)
    rows, columns = rows[::stride], columns[::stride]
    values = t[rows, columns].astype(np.float64)
    centre = (float(np.median(columns)), float(np.median(rows)))
    box = (float(columns.min()), float(rows.min()), float(columns.max()), float(rows.max()))
    design = np.stack([np.ones(values.size), columns - centre[0], rows - centre[1]], axis=1)
    coefficients, functional, residual = _robust_plane(design, values)
    blocks, u_coefficients = _block_errors(rows, columns, residual, design)
    over_area = design[:, 1:] @ coefficients[1:]
    gradient = float(np.ptp(over_area))
    u_gradient = float(np.hypot(*(u_coefficients[1:] * np.ptp(design[:, 1:], axis=0))))
    pixels = int(np.count_nonzero(area))
    hidden = max(noise, 5 * u_gradient) if blocks >= 6 else float("inf")
    if gradient > hidden:
        return Reference(
            float(coefficients[0]),
            (float(coefficients[1]), float(coefficients[2])),
            centre,
            box,
            robust_spread(residual),
            pixels,
            gradient,
            float(u_coefficients[0]),
            (float(u_coefficients[1]), float(u_coefficients[2])),
            hidden,
            rows,
            columns,
            functional,
        )
    median = float(np.median(values))
    spread = robust_spread(values)
    middle = _middle(values)
    # Structure is correlated over about a block, so a median of n pixels is no better than one of n / block area;
    # √(π/2) is the loss of a median against a mean for normal errors.
    u_level = (np.pi / 2) ** 0.5 * max(spread, noise) / max(1.0, values.size * stride / _BLOCK**2) ** 0.5
    weights = np.zeros((3, middle.size))
    weights[0] = 1 / middle.size
    return Reference(
        median,
        (0.0, 0.0),
        centre,
        box,
        spread,
        pixels,
        0.0,
        float(u_level),
        (0.0, 0.0),
        hidden,
        rows[middle],
        columns[middle],
        weights,
    )


def automatic(t: NDArray[np.float32], usable: NDArray[np.bool_], noise: float) -> NDArray[np.bool_]:
    """The largest thermally uniform area, shape of `t`: a suggestion for whoever looks at the frame.

    Uniform is where the smoothed temperature changes by less than 12 mK a pixel, or by what noise alone would
    give or half of what the quieter half of the frame does, whichever is most.  Small frames' edges are left out.
    May be empty.
    """
    if not usable.any():
        return np.zeros(t.shape, np.bool_)
    filled = np.where(usable, t, np.float32(np.median(t[usable])))
    smooth = cv2.GaussianBlur(filled, (0, 0), 2.0)
    steep = cv2.magnitude(cv2.Scharr(smooth, cv2.CV_32F, 1, 0), cv2.Scharr(smooth, cv2.CV_32F, 0, 1)) / 32
    inner = cv2.erode(usable.view(np.uint8), np.ones((7, 7), np.uint8), borderValue=0).view(np.bool_)
    if not inner.any():
        return np.zeros(t.shape, np.bool_)
    # A Gaussian of 2 px leaves 0.07 σ of gradient noise per axis; three times the Rayleigh scale covers it.
    limit = max(0.012, 0.2 * noise, 0.5 * float(np.median(steep[inner])))
    calm = cv2.morphologyEx((inner & (steep < limit)).view(np.uint8), cv2.MORPH_OPEN, np.ones((5, 5), np.uint8))
    count, labels, stats, _ = cv2.connectedComponentsWithStats(calm, connectivity=4)
    if count < 2:
        return np.zeros(t.shape, np.bool_)
    chosen = labels == 1 + int(np.argmax(stats[1:, cv2.CC_STAT_AREA]))
    return np.asarray(chosen & usable, dtype=np.bool_)


def _robust_plane(
    design: NDArray[np.float64], values: NDArray[np.float64]
) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    """Tukey-weighted least squares by iteration: coefficients (3,), their functionals (3, n), residuals (n,)."""
    weights = np.ones(values.size)
    coefficients = np.array([np.median(values), 0.0, 0.0])
    functional = np.zeros((3, values.size))
    for _ in range(6):
        weighted = design * weights[:, None]
        functional = np.linalg.pinv(weighted.T @ design) @ weighted.T
        coefficients = functional @ values
        residual = values - design @ coefficients
        scale = max(robust_spread(residual), 1e-6)
        weights = np.clip(1 - (residual / (_TUKEY * scale)) ** 2, 0, None) ** 2
    return coefficients, functional, values - design @ coefficients


def _block_errors(
    rows: NDArray[np.intp], columns: NDArray[np.intp], residual: NDArray[np.float64], design: NDArray[np.float64]
) -> tuple[int, NDArray[np.float64]]:
    """Number of blocks, and standard errors of level and slopes taken from the scatter of block means."""
    width = int(columns.max()) // _BLOCK + 1
    index = (rows // _BLOCK) * width + columns // _BLOCK
    counts = np.bincount(index)
    filled = counts > 0
    means = np.bincount(index, residual)[filled] / counts[filled]
    blocks = int(np.count_nonzero(filled))
    scatter = max(robust_spread(means), 1e-6)
    lever = np.array([1.0, *np.sqrt(np.mean(design[:, 1:] ** 2, axis=0)).clip(0.5)])
    return blocks, scatter / blocks**0.5 / lever


def _middle(values: NDArray[np.float64]) -> NDArray[np.intp]:
    """Indices of the one or two values the median consists of."""
    order = np.argsort(values, kind="stable")
    half = values.size // 2
    return order[half : half + 1] if values.size % 2 else order[half - 1 : half + 1]
