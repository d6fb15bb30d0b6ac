"""Where the warm part of a four-sided module lies: its shares of the module's area and sides."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.anomalies.patch import Patch

_SPOT: Final = 9
"""Pixels of the hottest measurement spot, 3 × 3, whose least one stands for how warm the warmest part is."""
_TAIL: Final = 0.02
"""Share of the warm pixels left out at each end of an extent: a few noisy ones do not stretch it."""


def module_shares(
    delta: NDArray[np.float32], module: Patch, corners: Sequence[tuple[float, float]], least: float
) -> dict[str, float]:
    """Shares of the part of a module that is `least` [K] or more above its neighbours, and half of what its hottest is.

    So what is much hotter than the rest of a warm module is told by itself, and blur does not widen it.
    delta (rows, columns) [K], pixels that are NaN are not warm; module: its pixels; corners (x, y) of its outline, of
    which four are taken for those of a rectangle seen at an angle, others for what the smallest rectangle around them
    holds.  `warm_share` of its area; `along` its longer side and `across`: extents over the sides; `centre_along`,
    `centre_across`: where its middle lies, 0 to 1; `filled`: warm pixels over those of the module in the warm part's
    box.  All but the first are NaN where nothing is warm.
    """
    along, across = _sides(module, corners)
    seen = np.nan_to_num(np.asarray(module.of(delta), np.float64), nan=-np.inf)
    hottest = float(np.partition(seen, -min(_SPOT, seen.size))[-min(_SPOT, seen.size)])
    warm = seen >= max(least, hottest / 2)
    shares = {"warm_share": float(np.mean(warm))}
    names = ("along", "across", "centre_along", "centre_across", "filled")
    if not warm.any():
        return {**shares, **dict.fromkeys(names, float("nan"))}
    ends = [np.quantile(side[warm], (_TAIL, 1 - _TAIL)) for side in (along, across)]
    sides = [_extent(low, high) for low, high in ends]
    in_box = np.ones(warm.shape, np.bool_)
    for side, (low, high) in zip((along, across), ends, strict=True):
        in_box &= (side >= low) & (side <= high)
    middles = [(low + high) / 2 for low, high in ends]
    filled = np.count_nonzero(warm & in_box) / np.count_nonzero(in_box)
    return {**shares, **dict(zip(names, map(float, (*sides, *middles, filled)), strict=True))}


def _extent(low: float, high: float) -> float:
    """A whole extent from that between two quantiles."""
    return min((high - low) / (1 - 2 * _TAIL), 1.0)


def _sides(module: Patch, corners: Sequence[tuple[float, float]]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Place of each pixel of a module along its longer and its shorter side, 0 to 1."""
    points = np.array(corners, np.float32).reshape(-1, 2)
    box = points if len(points) == 4 else cv2.boxPoints(cv2.minAreaRect(points)).astype(np.float32)
    lengths = np.linalg.norm(np.roll(box, -1, axis=0) - box, axis=1)
    if lengths[0] + lengths[2] < lengths[1] + lengths[3]:
        box = np.roll(box, -1, axis=0)
    unit = np.array([(0, 0), (1, 0), (1, 1), (0, 1)], np.float32)
    rows, columns = module.positions()
    seen = np.stack([columns, rows], axis=1).astype(np.float32)[None]
    placed = cv2.perspectiveTransform(seen, cv2.getPerspectiveTransform(box, unit))[0].astype(np.float64)
    return placed[:, 0], placed[:, 1]
