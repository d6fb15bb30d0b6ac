"""The frames of a folder, read to see what they are; headerless files also to see how they must be read."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from zipfile import BadZipFile, ZipFile

import numpy as np

from irsurvey.errors import FrameError
from irsurvey.model import Frame, ReadOptions
from irsurvey.readers import READERS, read
from irsurvey.start.scaling import Known, scalings

HEADERLESS = (".bin", ".dat", ".raw")
STORED_AS = ("uint16", "int16", "float32", "float64")
SENSORS = (
    *((60, 80), (120, 160), (192, 256), (240, 320), (256, 320), (288, 382), (288, 384), (480, 640)),
    *((512, 640), (576, 768), (768, 1024), (960, 1280), (1024, 1280), (1080, 1920)),
)
"""Rows and columns of detectors in use (common practice), for files that state none; tried upright as well."""


@dataclass(frozen=True, slots=True)
class Seen:
    """A frame file that could be read, how, and its lowest, median and highest stored number."""

    file: str  # relative to the folder, with forward slashes
    options: ReadOptions
    shape: tuple[int, int]
    dtype: str
    low: float
    middle: float
    high: float


def look(folder: Path, points: Sequence[Known]) -> tuple[tuple[Seen, ...], tuple[str, ...]]:
    """The frames of a folder and of the folders right inside it, by name; and why other files are none."""
    seen: list[Seen] = []
    unread: list[str] = []
    names = (path.relative_to(folder).as_posix() for depth in ("*", "*/*") for path in folder.glob(depth))
    for name in sorted(name for name in names if not any(part.startswith(".") for part in name.split("/"))):
        path = folder / name
        if not _is_text(name):
            unread.append(f"{shown_name(name)}: expected a name in UTF-8, got another encoding; rename it")
            continue
        if not path.is_file() or path.suffix.lower() not in READERS:
            continue
        mine = [point for point in points if point.file in (name, path.name) or (point.file is None and not seen)]
        try:
            options, frame = _open(path, mine)
        except FrameError as error:
            unread.append(str(error).replace(path.name, name, 1))
            continue
        numbers = frame.stored[np.isfinite(frame.stored)]
        low, middle, high = float(numbers.min()), float(np.median(numbers)), float(numbers.max())
        rows, columns = frame.stored.shape
        seen.append(Seen(name, options, (rows, columns), frame.stored.dtype.name, low, middle, high))
    return tuple(seen), tuple(unread)


def rounding(dtype: str) -> float:
    """Step of stored numbers: whole ones, or the two decimals that many exports keep (common practice)."""
    return 0.01 if "float" in dtype else 1.0


def shown_name(name: str) -> str:
    """A file's name as it can be printed; what is not UTF-8 in it becomes question marks."""
    return name.encode("utf-8", "replace").decode("utf-8")


def _is_text(name: str) -> bool:
    return shown_name(name) == name


def _open(path: Path, points: Sequence[Known]) -> tuple[ReadOptions, Frame]:
    """A frame and what its reader had to be told.  Raises the first FrameError where nothing helps."""
    opened, errors = [], []
    for options in _ways(path):
        try:
            opened.append((options, read(path, options)))
        except FrameError as error:
            errors.append(error)
        if opened and path.suffix.lower() not in HEADERLESS:
            break
    if not opened:
        raise errors[0]
    return min(opened, key=lambda way: _strangeness(way[1], points)) if len(opened) > 1 else opened[0]


def _ways(path: Path) -> Iterator[ReadOptions]:
    """Options to try on a file, in this order; on a headerless one all that fit, to see which make a picture."""
    suffix = path.suffix.lower()
    if suffix in HEADERLESS:
        layouts = tuple(_layouts(path.stat().st_size))
        yield from layouts or (ReadOptions(),)
        return
    yield ReadOptions()
    if suffix in (".tif", ".tiff"):
        yield ReadOptions(page=0)
    if suffix == ".npz":
        try:
            with ZipFile(path) as archive:
                yield from (ReadOptions(array=name.removesuffix(".npy")) for name in archive.namelist())
        except (BadZipFile, OSError):
            return  # the reader has said what is wrong with it


def _layouts(size: int) -> Iterator[ReadOptions]:
    """Shapes, types and byte orders that a file of this many bytes may have."""
    for rows, columns in (*SENSORS, *((columns, rows) for rows, columns in SENSORS)):
        for dtype in STORED_AS:
            if rows * columns * np.dtype(dtype).itemsize == size:
                for byte_order in ("little", "big"):
                    yield ReadOptions(shape=(rows, columns), dtype=dtype, byte_order=byte_order)


def _strangeness(frame: Frame, points: Sequence[Known]) -> float:
    """How unlike a picture a frame is: its steps from pixel to pixel over its spread; double against the points."""
    with np.errstate(all="ignore"):  # a wrong layout holds any number there is
        stored = frame.stored.astype(np.float64)
        steps = np.abs(np.diff(stored, axis=0)).mean() + np.abs(np.diff(stored, axis=1)).mean()
        spread = np.median(np.abs(stored - np.median(stored))) or stored.std()  # blind to negatives that wrapped around
        roughness = float(steps / spread)
        extent = float(np.percentile(np.abs(stored), 99))
    if not (np.isfinite(roughness) and 0.1 < extent < 1e6):  # no temperatures or counts: other types read as floats
        return np.inf
    rows, columns = stored.shape
    inside = [point for point in points if point.x < columns and point.y < rows]
    told = [(float(stored[point.y, point.x]), point.celsius, point.half) for point in inside]
    agrees = len(inside) == len(points) and (not told or scalings(told, rounding(frame.stored.dtype.name)))
    return roughness if agrees else 2 * roughness
