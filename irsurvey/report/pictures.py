"""Pictures that stand in the page itself: the thermal picture of a frame, a part of it, its photograph."""

from __future__ import annotations

import io
from base64 import b64encode
from collections.abc import Callable
from dataclasses import dataclass
from math import ceil
from pathlib import Path
from typing import TYPE_CHECKING

from irsurvey.model import FrameReport, FrameTask
from irsurvey.report.labels import Box
from irsurvey.report.picture import box, enlargement
from irsurvey.texts import say

if TYPE_CHECKING:
    from PIL import Image

PHOTOGRAPH_SIDE = 520
"""Longer side [px] of a photograph on the sheet of its frame."""
THUMBNAIL_SIDE = 320
"""Longer side [px] of a picture in the repair list: sharp at the width it is printed."""

_AROUND = 2.4  # sides of a part that its thumbnail spans
_LEAST_PART = 0.4  # of the sides of the whole picture
_ASPECT = 4 / 3  # width of a thumbnail over its height, where the frame has room for it
_QUALITY = 82
_MOST_PIXELS = 120_000_000  # of a photograph: larger ones than cameras take are not opened
_FORMATS = ("JPEG", "PNG")


@dataclass(frozen=True, slots=True)
class Picture:
    """A picture to stand in the page: data URI, size [px], and what it shows in words."""

    uri: str
    width: int
    height: int
    words: str


def stored(frame: FrameReport, out: Path, name: str) -> Picture | None:
    """A picture that the run left in the folder of a frame; None where there is none."""
    from PIL import Image

    path = out / "frames" / frame.id / name
    if frame.status == "failed" or not path.is_file():
        return None
    data = path.read_bytes()
    with Image.open(io.BytesIO(data)) as image:
        words = str(image.info.get("Description", ""))
        return Picture(f"data:image/png;base64,{b64encode(data).decode()}", *image.size, words)


def around(frame: FrameReport, polygon: tuple[tuple[float, float], ...], words: str, out: Path) -> Picture | None:
    """The part of a frame's annotated picture that shows what lies in a polygon and what is beside it."""
    path = out / "frames" / frame.id / "annotated.png"
    if frame.source.shape is None or not polygon:
        return None
    part = _window(polygon, frame.source.shape)
    return _reduced(path, THUMBNAIL_SIDE, words, lambda image: image.crop(part))


def small(frame: FrameReport, side: int, out: Path) -> Picture | None:
    """A frame's annotated picture without the scale beside it, its longer side no longer than `side`; None without."""
    if frame.status == "failed" or frame.source.shape is None:
        return None
    factor = enlargement(frame.source.shape)
    whole = (0, 0, frame.source.shape[1] * factor, frame.source.shape[0] * factor)
    words = say("thermal_picture", frame=frame.id)
    return _reduced(out / "frames" / frame.id / "annotated.png", side, words, lambda image: image.crop(whole))


def photograph(task: FrameTask, side: int) -> Picture | None:
    """The photograph of a frame, its longer side no longer than `side`; None without one that can be read.

    It is drawn anew, upright, so that nothing a camera wrote beside the picture (where, when, by whom) goes along."""
    from PIL import ImageOps

    if task.photo_path is None:
        return None
    return _reduced(Path(task.photo_path), side, say("photograph", frame=task.id), ImageOps.exif_transpose)


def _reduced(
    path: Path, side: int, words: str, prepared: Callable[[Image.Image], Image.Image | None]
) -> Picture | None:
    """A picture file prepared, made small and written as JPEG; None where it is no picture or too large a one."""
    from PIL import Image

    try:
        with Image.open(path, formats=_FORMATS) as opened:
            if opened.width * opened.height > _MOST_PIXELS:
                return None
            opened.draft("RGB", (2 * side, 2 * side))
            image = (prepared(opened) or opened).convert("RGB")
    except (OSError, ValueError, SyntaxError, Image.DecompressionBombError):  # what Pillow raises on a damaged file
        return None
    image.thumbnail((side, side), Image.Resampling.LANCZOS)
    stream = io.BytesIO()
    Image.frombytes("RGB", image.size, image.tobytes()).save(stream, "JPEG", quality=_QUALITY)
    return Picture(f"data:image/jpeg;base64,{b64encode(stream.getvalue()).decode()}", *image.size, words)


def _window(polygon: tuple[tuple[float, float], ...], shape: tuple[int, int]) -> Box:
    """The part of an annotated picture to cut out: around the polygon, inside the frame, the scale beside it not."""
    factor = enlargement(shape)
    rows, columns = shape[0] * factor, shape[1] * factor
    left, top, right, bottom = box(polygon, factor)
    width = max(_AROUND * (right - left), _LEAST_PART * columns)
    height = max(_AROUND * (bottom - top), _LEAST_PART * rows)
    width, height = max(width, height * _ASPECT), max(height, width / _ASPECT)
    (start_x, end_x), (start_y, end_y) = _span(left, right, width, columns), _span(top, bottom, height, rows)
    return start_x, start_y, end_x, end_y


def _span(first: int, last: int, wanted: float, size: int) -> tuple[int, int]:
    """Where to begin and end along one side: the part in the middle where there is room."""
    length = min(size, ceil(wanted))
    start = min(max(0, (first + last - length) // 2), size - length)
    return start, start + length
