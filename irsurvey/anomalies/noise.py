"""Noise of a frame, estimated from the frame itself."""

from __future__ import annotations

from typing import Any

import cv2
import numpy as np
from numpy.typing import NDArray

MAD_TO_SIGMA = 1.4826
"""Median absolute deviation to standard deviation for a normal distribution, 1/Φ⁻¹(¾)."""

# Blind to constant, linear and bilinear structure; its response to white noise σ has standard deviation 6σ.
_KERNEL = np.array([[1, -2, 1], [-2, 4, -2], [1, -2, 1]], dtype=np.float32)


def robust_spread(values: NDArray[Any]) -> float:
    """Standard deviation of a sample from its median absolute deviation; NaN for an empty one."""
    if values.size == 0:
        return float("nan")
    return MAD_TO_SIGMA * float(np.median(np.abs(values - np.median(values))))


def pixel_noise(t: NDArray[np.float32], usable: NDArray[np.bool_], resolution: float) -> float:
    """Standard deviation [K] of independent pixel noise in the temperature map `t` (rows, columns).

    Difference-of-Laplacians kernel with a robust spread over the usable pixels: structure of the scene
    does not count, edges are outvoted.  Never below the step of the stored numbers, `resolution`/√12 [K].
    After J. Immerkær (1996), Computer Vision and Image Understanding 64:300, with the median in place of the mean.
    """
    filled = np.where(usable, t, np.float32(np.median(t[usable]) if usable.any() else 0))
    response = cv2.filter2D(filled, cv2.CV_32F, _KERNEL, borderType=cv2.BORDER_REFLECT)
    inner = cv2.erode(usable.view(np.uint8), np.ones((3, 3), np.uint8)).view(np.bool_)
    sample = response[inner][::3]
    spread = MAD_TO_SIGMA * float(np.median(np.abs(sample))) / 6 if sample.size else float("nan")
    return max(spread, resolution / 12**0.5)
