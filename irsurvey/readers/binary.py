"""Headerless binary: nothing but the numbers, row by row; shape, type and byte order come from the survey file."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from irsurvey.readers.raw_file import STORED_TYPES, RawFile


def numbers(raw: RawFile) -> NDArray[np.generic]:
    """The numbers of the file, shape and type as `raw.options` declare them; its size must be exactly theirs."""
    options = raw.options
    if options.shape is None:
        raise raw.refusal("a declared shape", "none for headerless numbers", "write shape = [rows, columns]")
    if options.dtype not in STORED_TYPES:
        raise raw.refusal(f"dtype one of {', '.join(STORED_TYPES)}", repr(options.dtype), 'write dtype = "uint16"')
    dtype = np.dtype(options.dtype)
    if options.byte_order not in ("little", "big") and dtype.itemsize > 1:
        raise raw.refusal('byte_order "little" or "big"', repr(options.byte_order), 'write byte_order = "little"')
    raw.check(options.shape, dtype)
    rows, columns = options.shape
    size = rows * columns * dtype.itemsize
    if len(raw.data) != size:
        raise raw.refusal(
            f"{rows} × {columns} × {dtype.itemsize} = {size} bytes",
            f"{len(raw.data)} bytes",
            "correct shape or dtype, or copy the file again",
        )
    stored = dtype.newbyteorder("big" if options.byte_order == "big" else "little")
    return np.frombuffer(raw.data, stored).reshape(rows, columns)
