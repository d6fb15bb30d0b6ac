"""A raw frame as it was read, nothing interpreted."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray


@dataclass(frozen=True, slots=True, eq=False)
class Frame:
    """Stored numbers of one frame, shape (rows, columns), in the machine's byte order, values untouched.

    Pixels without data (fill values, empty CSV cells) are NaN in float frames; in integer frames they
    are True in `missing`.
    """

    stored: NDArray[np.generic]
    sha256: str
    missing: NDArray[np.bool_] | None = None
