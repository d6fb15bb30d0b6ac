"""Temperature fields of walls, defects and electrical parts, painted with a few smooth shapes."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any
from zlib import crc32

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import gaussian_filter
from scipy.special import ndtri

Field = NDArray[np.float64]
Mask = NDArray[np.bool_]
Corners = list[tuple[int, int]]
"""Corners (x right, y down) of a convex polygon, clockwise as seen; pixel centres at integers."""


@dataclass(frozen=True)
class Patch:
    """A drawn area with optics of its own, as the survey file has it."""

    name: str
    corners: Corners
    emissivity: float
    role: str = "inspect"  # "inspect" | "ignore" | "reflector" | "known-temperature"
    emissivity_total: float | None = None  # over all wavelengths, where the survey states it


@dataclass(frozen=True)
class Part:
    """An electrical component: its name, its corners, its emissivity, and what the survey says of it."""

    name: str
    corners: Corners
    emissivity: float
    group: str | None = None
    load_a: float | None = None
    rated_a: float | None = None
    joint: dict[str, Any] | None = None  # what its heat is estimated as, in the words of the survey file
    limit: tuple[float, float] | None = None  # highest temperature [°C], rise at rated load [K]
    pattern: str | None = None  # of a PV module that is not healthy
    is_drawn: bool = True  # in the survey file; otherwise it is there to be found


@dataclass(frozen=True)
class Defect:
    """A designed deviation: what it adds to the sound temperature [K], and from where on it counts as defect."""

    kind: str
    delta_k: Field
    threshold_k: float
    against: str = "the same wall without the defect"
    more: dict[str, Any] = field(default_factory=dict)  # what else is true about it, by its name in truth.json

    @property
    def mask(self) -> Mask:
        """The pixels that count as defect."""
        return np.abs(self.delta_k) >= self.threshold_k


@dataclass(frozen=True)
class Mirage:
    """Something mirrored that looks like a deviation where none is: where, and how warm what is mirrored is."""

    kind: str
    mask: Mask
    mirrored_c: float


@dataclass(frozen=True)
class Subject:
    """What stands in front of the camera: object temperatures without and with defects, and optics."""

    sound_c: Field
    emissivity: float
    reflected_c: Field | float
    defects: tuple[Defect, ...] = ()
    patches: tuple[Patch, ...] = ()
    parts: tuple[Part, ...] = ()
    mirages: tuple[Mirage, ...] = ()  # already in reflected_c

    @property
    def temperature_c(self) -> Field:
        """Object temperatures [°C]."""
        return self.sound_c + sum((defect.delta_k for defect in self.defects), np.zeros_like(self.sound_c))

    @property
    def emissivities(self) -> Field:
        """Emissivity of each pixel; where areas overlap the later one counts, components last."""
        emissivity = np.full(self.sound_c.shape, self.emissivity)
        for area in (*self.patches, *self.parts):
            emissivity[inside(area.corners, emissivity.shape)] = area.emissivity
        return emissivity


def normals(name: str, shape: tuple[int, int]) -> Field:
    """Standard normal numbers that depend on `name` alone.

    Drawn from raw PCG64 bits, the one stream numpy promises to keep, so that any numpy makes the same frames.
    """
    bits = np.random.PCG64(crc32(name.encode())).random_raw(shape[0] * shape[1])
    return ndtri(((bits >> np.uint64(11)) + 0.5) * 2.0**-53).reshape(shape)


def grid(shape: tuple[int, int]) -> tuple[Field, Field]:
    """x and y of every pixel centre."""
    y, x = np.indices(shape, dtype=float)
    return x, y


def inside(corners: Corners, shape: tuple[int, int]) -> Mask:
    """Pixels whose centres lie inside or on a convex polygon."""
    x, y = grid(shape)
    within = np.ones(shape, bool)
    for (x0, y0), (x1, y1) in zip(corners, corners[1:] + corners[:1], strict=True):
        within &= (x1 - x0) * (y - y0) - (y1 - y0) * (x - x0) >= 0
    return within


def box(left: int, top: int, right: int, bottom: int) -> Corners:
    """The corners of an upright rectangle."""
    return [(left, top), (right, top), (right, bottom), (left, bottom)]


def soft(corners: Corners, shape: tuple[int, int], edge_px: float) -> Field:
    """1 inside a convex polygon, 0 outside, with an edge as soft as heat spreading sideways makes it."""
    return gaussian_filter(inside(corners, shape).astype(float), edge_px, mode="nearest")


def unevenness(name: str, shape: tuple[int, int], spread_k: float, grain_px: float = 16.0) -> Field:
    """Gentle clouds of ± spread_k (one standard deviation, cut off at two): no real wall is uniform."""
    clouds = gaussian_filter(normals(name, shape), grain_px, mode="reflect")
    return spread_k * np.clip(clouds / clouds.std(), -2, 2)


def wall(name: str, shape: tuple[int, int], middle_c: float, rise_k: float = 0.3) -> Field:
    """A sound wall: a middle temperature, warmer at the top by `rise_k`, slightly uneven."""
    _, y = grid(shape)
    return middle_c + rise_k * (0.5 - y / (shape[0] - 1)) + unevenness(name, shape, 0.05)


def studs(shape: tuple[int, int], positions: list[int], depth_k: float, width_px: float = 2.5) -> Field:
    """Faint upright lines where timber studs stand in the insulation."""
    x, _ = grid(shape)
    return sum((depth_k * np.exp(-(((x - at) / width_px) ** 2) / 2) for at in positions), np.zeros(shape))


def bell(offset_px: Field, width_px: float, tail_px: float) -> Field:
    """Profile across a thermal bridge: a bell with a long, weak tail, 1 in the middle."""
    return 0.85 * np.exp(-((offset_px / width_px) ** 2) / 2) + 0.15 * np.exp(-np.abs(offset_px) / tail_px)


def plume(name: str, shape: tuple[int, int], root: tuple[int, int, int], length_px: float) -> Field:
    """Cold air falling from a joint (left, right, y): sharp above, feathered below, uneven like a draught."""
    left, right, top = root
    x, y = grid(shape)
    run = np.clip(y - top, 0, None)
    along = (1 - np.exp(-run / 1.0)) * np.exp(-run / length_px)
    half = (right - left) / 2 + 0.18 * run
    across = np.exp(-(np.abs((x - (left + right) / 2 - 0.05 * run) / half) ** 3))
    return along * across * (1 + 4.0 * unevenness(name, shape, 0.05, grain_px=7.0))
