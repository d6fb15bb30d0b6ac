"""Walls as functions of position, so that a view of them shifted and turned by a known amount is exact."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from scipy.special import erf

Field = Callable[[Any, Any], Any]
"""Temperature [K] at x, y [px] of the first view."""

SHAPE = (120, 160)


def wall(rng: np.random.Generator, shape: tuple[int, int] = SHAPE) -> Field:
    """A wall with what is built in: studs, plates and rectangles (windows, outlets), and a slow gradient."""
    rows, columns = shape
    studs = [_line(rng, columns) for _ in range(rng.integers(2, 5))]
    plates = [_line(rng, rows) for _ in range(rng.integers(1, 3))]
    boxes = [
        (*rng.uniform(0.1, 0.7, 2) * (columns, rows), *rng.uniform(0.1, 0.3, 2) * (columns, rows), rng.uniform(-4, 3))
        for _ in range(rng.integers(1, 3))
    ]
    slope = rng.normal(0, 1.5, 2) / (columns, rows)

    def field(x: Any, y: Any) -> Any:
        t = 291 + slope[0] * x + slope[1] * y
        for at, lean, width, delta in studs:
            t = t + delta * np.exp(-(((x - at - lean * y) / width) ** 2) / 2)
        for at, lean, width, delta in plates:
            t = t + delta * np.exp(-(((y - at - lean * x) / width) ** 2) / 2)
        for left, top, width, height, delta in boxes:
            t = t + delta * (_edge(x - left) - _edge(x - left - width)) * (_edge(y - top) - _edge(y - top - height))
        return t

    return field


def leak(rng: np.random.Generator, shape: tuple[int, int] = SHAPE) -> Field:
    """What a leak adds: a plume with one sharp end and a feathered one."""
    rows, columns = shape
    x0, y0 = rng.uniform(0.25, 0.75) * columns, rng.uniform(0.2, 0.6) * rows
    length, width, delta = rng.uniform(0.1, 0.2) * rows, rng.uniform(0.04, 0.08) * columns, -rng.uniform(2, 5)

    def field(x: Any, y: Any) -> Any:
        along = np.clip((y - y0) / length, 0, 4)
        spread = width * (1 + along / 2)
        return delta * _edge(y - y0) * np.exp(-(along**2)) * np.exp(-(((x - x0) / spread) ** 2) / 2)

    return field


def placed(shape: tuple[int, int] = SHAPE, shift: tuple[float, float] = (0.0, 0.0), turned: float = 0.0) -> Any:
    """Where the pixels of a moved view lie in the first, (x, y): the centre shifted, then all turned about it [°].

    What the first view has at p, the moved one has at c + R (p − c) + shift, c the centre."""
    y, x = np.mgrid[: shape[0], : shape[1]].astype(float)
    centre_x, centre_y = (shape[1] - 1) / 2, (shape[0] - 1) / 2
    dx, dy = x - centre_x - shift[0], y - centre_y - shift[1]
    c, s = np.cos(np.radians(turned)), np.sin(np.radians(turned))
    return centre_x + c * dx + s * dy, centre_y - s * dx + c * dy


def moved(rng: np.random.Generator, largest: float = 8.0, turn: float = 3.0) -> tuple[tuple[float, float], float]:
    """A shift [px] of any direction and a rotation [°], both up to the largest, sub-pixel ones included."""
    size, direction = rng.uniform(0, largest), rng.uniform(0, 2 * np.pi)
    return (size * np.cos(direction), size * np.sin(direction)), rng.uniform(-turn, turn)


def _line(rng: np.random.Generator, size: int) -> tuple[float, float, float, float]:
    return rng.uniform(0, size), rng.normal(0, 0.02), rng.uniform(2, 8), -rng.uniform(0.5, 2)


def _edge(distance: Any) -> Any:
    """A step blurred as a lens does, σ 0.8 px."""
    return (1 + erf(distance / (0.8 * np.sqrt(2)))) / 2
