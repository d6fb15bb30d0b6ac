"""What one pixel and one measurement spot cover at a distance."""

from __future__ import annotations

from math import pi

import numpy as np

from irsurvey.geometry import Numbers


def pixel_side(distance: Numbers, ifov: Numbers) -> Numbers:
    """Side of a pixel's footprint [m] on a surface square to the view: distance [m] × IFOV [rad]; NaN below 0.

    Small angles: at 10 mrad the tangent differs by 1e-5."""
    return _not_negative(distance) * _not_negative(ifov)


def pixel_area(distance: Numbers, ifov: Numbers, view_angle: Numbers) -> Numbers:
    """Area of the surface one pixel covers [m²]; `view_angle` [rad] from the surface normal, NaN from 90° on.

    The near and far side of a tilted surface differ: the value is that at `distance`."""
    steepness = np.where(np.less(np.abs(view_angle), pi / 2), np.cos(view_angle), np.nan)[()]
    return pixel_side(distance, ifov) ** 2 / steepness


def spot_size(distance: Numbers, ifov: Numbers, spot_pixels: Numbers) -> Numbers:
    """Side of the measurement spot [m]: the smallest target whose temperature can be read at this distance."""
    return _not_negative(spot_pixels) * pixel_side(distance, ifov)


def largest_distance(size: Numbers, ifov: Numbers, spot_pixels: Numbers) -> Numbers:
    """Largest distance [m] at which a target of this size [m] still fills the measurement spot."""
    return _not_negative(size) / (_positive(spot_pixels) * _positive(ifov))


def scale_from_length(start: tuple[Numbers, Numbers], end: tuple[Numbers, Numbers], metres: Numbers) -> Numbers:
    """Side of a pixel [m] from a known length between two points (x, y) [px]; NaN where they coincide."""
    return _not_negative(metres) / _positive(np.hypot(end[0] - start[0], end[1] - start[1]))


def _not_negative(value: Numbers) -> Numbers:
    return np.where(np.greater_equal(value, 0), value, np.nan)[()]


def _positive(value: Numbers) -> Numbers:
    return np.where(np.greater(value, 0), value, np.nan)[()]
