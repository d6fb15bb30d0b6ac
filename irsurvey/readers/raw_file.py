"""A raw file's bytes with all that its reader is told, and the checks made before anything is decoded."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import DTypeLike

from irsurvey.errors import Fault, FrameError
from irsurvey.model.survey import ReadOptions

STORED_TYPES = (
    *("uint8", "uint16", "uint32", "uint64", "int8", "int16", "int32", "int64"),
    *("float16", "float32", "float64"),
)
"""numpy names of the number types that a frame may be stored in."""


@dataclass(frozen=True, slots=True)
class RawFile:
    """The whole content of one file; `name` is its name without folders, for messages."""

    name: str
    data: bytes
    options: ReadOptions
    pixel_limit: int

    def refusal(self, expected: str, got: str, remedy: str = "") -> FrameError:
        """The error to raise where this file is not what it should be."""
        return FrameError(Fault(self.name, expected, got, remedy))

    def check(self, shape: tuple[int, ...], dtype: DTypeLike) -> None:
        """Raise `FrameError` unless `shape` and `dtype` are those of a frame within the pixel limit.

        Asked of what a header states, before decoding, so that a small file cannot claim all memory.
        """
        sides = " × ".join(map(str, shape)) or "a single number"
        if len(shape) != 2:
            raise self.refusal(
                "one channel of rows × columns", sides, "export one frame of stored numbers, no colours and no stack"
            )
        if min(shape) < 1:
            raise self.refusal("at least one row and one column", sides, "copy or export it again")
        if shape[0] * shape[1] > self.pixel_limit:
            raise self.refusal(
                f"at most {self.pixel_limit} pixels",
                f"{sides} = {shape[0] * shape[1]}",
                "export it again if it should be smaller, else cut it into parts",
            )
        name = np.dtype(dtype).name
        if name not in STORED_TYPES:
            raise self.refusal(
                "integers or real floats of at most 64 bits", f"type {name}", "export the stored numbers themselves"
            )
