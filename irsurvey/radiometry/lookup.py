"""Frames as 16-bit codes, so that a correction is computed once per stored value and looked up per pixel."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import cv2
import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.model import Signal
from irsurvey.radiometry import signal as signals
from irsurvey.radiometry.measurement import Path, object_temperatures
from irsurvey.radiometry.planck import Array, Band

_NO_DATA = 65_535  # the last code, kept free for pixels without a value
_STEPS = 65_534  # as many as fit below it

CodesKey = tuple[float, float, int, int]
"""(first, step, lowest, highest): which stored values a frame has, hashable."""


@dataclass(frozen=True, slots=True, eq=False)
class Codes:
    """A frame as codes, uint16 (rows, columns): stored = first + step·code.

    Valid pixels lie in `lowest`…`highest` (an empty range where nothing is valid); `no_data` is the code of
    all others, outside that range, or None where there are none.  A `step` above the resolution asked for
    means that the range of the frame was too wide for it.
    """

    codes: NDArray[np.uint16]
    first: float
    step: float
    lowest: int
    highest: int
    no_data: int | None

    @property
    def key(self) -> CodesKey:
        """What a table of this frame's values depends on."""
        return self.first, self.step, self.lowest, self.highest


def encode(
    stored: NDArray[np.generic],
    missing: NDArray[np.bool_] | None,
    *,
    resolution: float,
    reach: tuple[float, float] = (-np.inf, np.inf),
) -> Codes:
    """A frame of any real type, shape (rows, columns), as codes.

    Integers keep their values (uint16 without missing pixels is not even copied) unless they span more than
    65 534; floats are rounded to multiples of `resolution` [stored units] above the lowest, coarser only
    where their range asks for it.  Missing, NaN and infinite pixels become `no_data`.  Where a frame cannot be kept
    as it is, numbers beyond `reach` become its ends: one far-off number may not make all others coarse."""
    if stored.dtype == np.uint16 and (missing is None or not missing.any()):
        return Codes(np.asarray(stored, np.uint16), 0.0, 1.0, int(stored.min()), int(stored.max()), None)
    valid = np.isfinite(stored) if missing is None else np.isfinite(stored) & ~missing
    codes = np.full(stored.shape, _NO_DATA, np.uint16)
    if not valid.any():
        return Codes(codes, 0.0, 1.0, 0, -1, _NO_DATA)
    is_float = stored.dtype.kind == "f"
    low, high = reach if is_float else (np.floor(reach[0]), np.ceil(reach[1]))
    values = np.clip(stored[valid].astype(float), low, high)
    first, span = float(values.min()), float(np.ptp(values))
    step = max(resolution if is_float else 1.0, span / _STEPS)
    codes[valid] = np.rint((values - first) / step)
    return Codes(codes, first, step, 0, round(span / step), None if valid.all() else _NO_DATA)


def stored_values(codes: Codes) -> Array:
    """The stored numbers of the codes `lowest`…`highest`, in order."""
    return _stored_values(*codes.key)


def look_up(codes: Codes, values: ArrayLike) -> NDArray[np.float32]:
    """The map of a value per code `lowest`…`highest`; float32 (rows, columns), NaN where there is no data."""
    table = np.full(_NO_DATA + 1, np.nan, np.float32)
    table[codes.lowest : codes.highest + 1] = values
    return np.asarray(cv2.LUT(codes.codes, table), np.float32)


@lru_cache(maxsize=64)  # surfaces of the frames at hand; at most 0.5 MB each
def temperature_table(
    codes_key: CodesKey,
    signal: Signal,
    band: Band,
    camera_offset: float,
    camera_gain: float,
    pivot: float,
    emissivity: float,
    t_reflected: float,
    path: Path,
) -> Array:
    """Object temperature [K] of every stored value of `codes_key`, for one surface in one scene; read-only.

    The camera's own error is T_app + camera_offset + camera_gain·(T_app − pivot) [K], before the measurement
    equation is inverted.  All arguments are plain numbers or frozen records of them; NaN: no solution."""
    t_apparent = signals.apparent_temperature(_stored_values(*codes_key), signal, band)
    t_apparent = t_apparent + camera_offset + camera_gain * (t_apparent - pivot)
    table = object_temperatures(t_apparent, emissivity, t_reflected, path, band)
    table.setflags(write=False)
    return table


def _stored_values(first: float, step: float, lowest: int, highest: int) -> Array:
    return first + step * np.arange(lowest, highest + 1, dtype=float)
