"""A connected piece of a frame, kept as small as it is: hundreds of regions must not cost hundreds of frames."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray


@dataclass(frozen=True, slots=True, eq=False)
class Patch:
    """Pixels of a frame: `mask` (h, w) placed with its corner at row `top`, column `left`.  Never empty."""

    top: int
    left: int
    mask: NDArray[np.bool_]

    @property
    def box(self) -> tuple[slice, slice]:
        """Rows and columns of the frame it lies in."""
        height, width = self.mask.shape
        return slice(self.top, self.top + height), slice(self.left, self.left + width)

    @property
    def pixels(self) -> int:
        """How many pixels it has."""
        return int(np.count_nonzero(self.mask))

    def positions(self) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
        """Rows and columns of its pixels in the frame."""
        rows, columns = np.nonzero(self.mask)
        return rows + self.top, columns + self.left

    def of(self, array: NDArray[np.generic]) -> NDArray[np.generic]:
        """Values of its pixels in a frame-sized array, in the order of `positions`."""
        return array[self.box][self.mask]

    def touches_edge(self, shape: tuple[int, ...]) -> bool:
        """Whether it reaches the border of a frame of this shape, so that part of it may lie outside."""
        rows, columns = self.box
        return bool(0 in (rows.start, columns.start) or rows.stop == shape[0] or columns.stop == shape[1])


def cropped(mask: NDArray[np.bool_]) -> Patch | None:
    """The patch of a frame-sized mask; None where it is empty."""
    rows, columns = np.flatnonzero(mask.any(axis=1)), np.flatnonzero(mask.any(axis=0))
    if rows.size == 0:
        return None
    top, left = int(rows[0]), int(columns[0])
    return Patch(top, left, mask[top : int(rows[-1]) + 1, left : int(columns[-1]) + 1])
