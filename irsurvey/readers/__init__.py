"""Raw files to Frames: a dict of suffix → reader, and the one place where bytes are read, hashed and checked.

A reader turns a `RawFile` into the stored numbers of the one page that its options name.  `read` asks for one page
at a time, so a function that yields all pages of a sequence can stand beside it later without changing its callers.
"""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from irsurvey.errors import Fault, FrameError
from irsurvey.model.frame import Frame
from irsurvey.model.survey import ReadOptions
from irsurvey.readers import binary, matrix, npy, png, tiff
from irsurvey.readers.raw_file import RawFile

READERS: dict[str, Callable[[RawFile], NDArray[np.generic]]] = {
    ".bin": binary.numbers,
    ".csv": matrix.numbers,
    ".dat": binary.numbers,
    ".npy": npy.array,
    ".npz": npy.member,
    ".png": png.image,
    ".raw": binary.numbers,
    ".tif": tiff.page,
    ".tiff": tiff.page,
    ".tsv": matrix.numbers,
    ".txt": matrix.numbers,
}

LARGEST_FILE = 2**32
"""[bytes] A file is held in memory whole, to be read only once for its hash and its numbers; beyond this it is not."""


def read(path: Path, options: ReadOptions, *, pixel_limit: int = 100_000_000) -> Frame:
    """The frame stored in `path`: shape (rows, columns), native byte order, C-contiguous, values untouched.

    Fill values become NaN in float frames and True in `missing` in integer frames.  Raises `FrameError`, with the
    file's name alone as its place, for whatever is not one channel of differing numbers within `pixel_limit`.
    """
    suffix = path.suffix.lower()
    if suffix not in READERS:
        raise _refusal(
            path,
            f"a frame of stored numbers ({', '.join(READERS)})",
            f"a file of type {suffix!r}",
            "export the frame with its measured values; a picture holds none",
        )
    raw = RawFile(path.name, _content(path), options, pixel_limit)
    try:
        page = READERS[suffix](raw)
    except (FrameError, MemoryError):
        raise
    except Exception as error:  # the one decoding boundary: on damaged bytes a decoder raises nearly anything
        reason = " ".join(f"{type(error).__name__}: {error}".split())[:200]
        raise raw.refusal(f"a sound {suffix} file", f"damage ({reason})", "copy or export it again") from error
    raw.check(page.shape, page.dtype)  # what came out, not only what a header had said
    stored = np.require(page, page.dtype.newbyteorder("="), ["C", "W"])
    missing = _mark_missing(stored, options.fill_values)
    _check_values(raw, stored, missing)
    return Frame(stored, hashlib.sha256(raw.data).hexdigest(), missing)


def _refusal(path: Path, expected: str, got: str, remedy: str) -> FrameError:
    return FrameError(Fault(path.name, expected, got, remedy))


def _content(path: Path) -> bytes:
    """All bytes of the file."""
    try:
        if not path.exists():
            raise _refusal(path, "a file", "nothing of that name", "check the name, also capitals, and the folder")
        if not path.is_file():
            raise _refusal(path, "a file", "a folder or a device", "name one file")
        if (size := path.stat().st_size) > LARGEST_FILE:
            raise _refusal(path, f"a file of at most {LARGEST_FILE} bytes", f"{size} bytes", "split the sequence")
        data = path.read_bytes()
    except OSError as error:
        raise _refusal(path, "a readable file", error.strerror or str(error), "check its permissions") from error
    if not data:
        raise _refusal(path, "a frame of stored numbers", "an empty file", "copy or export it again")
    return data


def _mark_missing(stored: NDArray[np.generic], fill_values: tuple[float, ...]) -> NDArray[np.bool_] | None:
    """Set fill values to NaN in floats, in place; in integers return where they are, None where nowhere."""
    if not fill_values:
        return None
    with np.errstate(over="ignore"):  # a fill value beyond a float16 is no pixel of it
        filled = np.logical_or.reduce([stored == value for value in fill_values])
    if stored.dtype.kind == "f":
        stored[filled] = np.nan
        return None
    return filled if filled.any() else None


def _check_values(raw: RawFile, stored: NDArray[np.generic], missing: NDArray[np.bool_] | None) -> None:
    """Raise `FrameError` where no pixel, or only one value, was measured."""
    if stored.dtype.kind == "f":
        measured = stored[np.isfinite(stored)]
    else:
        measured = stored if missing is None else stored[~missing]
    if measured.size == 0:
        raise raw.refusal("measured values", "no pixel with a number", "check fill_values and the export")
    if measured.min() == measured.max():
        raise raw.refusal(
            "differing values",
            f"{measured.flat[0]} in every pixel",
            "a shutter or test picture is no frame; check page, dtype and byte_order",
        )
