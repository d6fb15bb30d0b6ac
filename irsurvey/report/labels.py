"""The numbers and letters on a picture, put where they hide nothing that matters."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from math import hypot

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.report import outlines
from irsurvey.report.inks import DARK, LIGHT, Pixels, lettering

Point = tuple[int, int]
"""x, y [px]."""
Box = tuple[int, int, int, int]
"""Left, top, right, bottom [px]; the last two are the first pixel outside."""

_SIZE = 15  # of the lettering
_PADDING = 4  # between the lettering and the edge of its tag
_GAPS = (7, 18, 34)  # from what is labelled to its tag, the nearest that is free
_NEAR = 12  # pixels up to which a tag needs no line to what it names
_LATTICE = 24  # step of the places tried in a crowded picture
_ROMAN = ((100, "c"), (90, "xc"), (50, "l"), (40, "xl"), (10, "x"), (9, "ix"), (5, "v"), (4, "iv"), (1, "i"))
TAG_COST = 100
"""What a pixel of a tag adds to `busy`; outlines and what they enclose add 1."""


@dataclass(frozen=True, slots=True)
class Label:
    """A tag with a few letters for what lies in `box`; light on dark or dark on light.

    `outline`: its corners, closed, for the line that leads there from a tag which had to stand apart."""

    text: str
    box: Box
    dark_on_light: bool
    outline: tuple[Point, ...] = ()

    def tag(self) -> Pixels:
        """The tag as a block of ink numbers: the letters, a margin and a border that sets it off any background."""
        word = lettering(self.text, _SIZE, dark_on_light=self.dark_on_light)
        paper, border = (LIGHT, DARK) if self.dark_on_light else (DARK, LIGHT)
        return np.pad(np.pad(word, _PADDING, constant_values=paper), 1, constant_values=border)


def place(labels: Iterable[Label], busy: NDArray[np.int32]) -> Iterator[tuple[Pixels, Point]]:
    """The tag of each label and its left top corner, clear of whatever has a cost in `busy` where there is room.

    `busy` has the shape of the picture; a tag once placed adds its own cost there, so that none hides another.
    A tag that is larger than the picture is left out."""
    rows, columns = busy.shape
    for label in labels:
        tag = label.tag()
        height, width = tag.shape
        last_x, last_y = columns - width, rows - height
        if last_x < 0 or last_y < 0:
            continue
        places = [(x, y) for x, y in _places(label.box, width, height) if 0 <= x <= last_x and 0 <= y <= last_y]
        best = next((corner for corner in places if _cost(busy, corner, tag) == 0), None)
        if best is None:
            places += _lattice(label.box, last_x, last_y)
            best = min(places, key=lambda corner: _cost(busy, corner, tag))
        x, y = best
        busy[y : y + height, x : x + width] += TAG_COST
        yield tag, best


def put(canvas: Pixels, labels: Sequence[Label], busy: NDArray[np.int32]) -> None:
    """Place the tags and draw them, under them a line from each that stands apart to what it names."""
    placed = list(zip(_that_fit(labels, canvas.shape), place(labels, busy), strict=True))
    for label, (tag, corner) in placed:
        if ends := leader(label, tag, corner):
            outlines.leader(canvas, *ends)
    for _, (tag, (x, y)) in placed:
        canvas[y : y + tag.shape[0], x : x + tag.shape[1]] = tag


def leader(label: Label, tag: Pixels, corner: Point) -> tuple[Point, Point] | None:
    """The line from a tag to the nearest place of the outline it names; None where it is near, or lies within."""
    if len(label.outline) < 2:
        return None
    (x, y), (height, width) = corner, tag.shape
    centre = np.array([x + width / 2, y + height / 2])
    corners = np.array(label.outline, dtype=np.float64)
    if cv2.pointPolygonTest(corners.astype(np.float32), centre.tolist(), False) >= 0:
        return None
    along = np.roll(corners, -1, axis=0) - corners
    length = np.maximum((along**2).sum(axis=1), 1e-9)
    share = np.clip(((centre - corners) * along).sum(axis=1) / length, 0, 1)
    points = corners + share[:, None] * along
    to_x, to_y = points[np.argmin(((points - centre) ** 2).sum(axis=1))].round().astype(int).tolist()
    start = min(max(to_x, x), x + width - 1), min(max(to_y, y), y + height - 1)
    return (start, (to_x, to_y)) if hypot(start[0] - to_x, start[1] - to_y) > _NEAR else None


def component_mark(place: int) -> str:
    """A, B, … Z, AA, AB, … for the first, second, … component of a frame."""
    mark = ""
    while place > 0:
        place, letter = divmod(place - 1, 26)
        mark = chr(ord("A") + letter) + mark
    return mark


def change_mark(place: int) -> str:
    """a, b, … z, aa, ab, … for the first, second, … change between two frames."""
    return component_mark(place).lower()


def strip_mark(place: int) -> str:
    """i, ii, iii, iv, … for the first, second, … strip of a frame."""
    mark = ""
    for value, numeral in _ROMAN:
        count, place = divmod(place, value)
        mark += numeral * count
    return mark


def _that_fit(labels: Iterable[Label], shape: tuple[int, ...]) -> list[Label]:
    """Those whose tag is no larger than the picture."""
    return [label for label in labels if all(a <= b for a, b in zip(label.tag().shape, shape, strict=True))]


def _cost(busy: NDArray[np.int32], corner: Point, tag: Pixels) -> int:
    x, y = corner
    return int(busy[y : y + tag.shape[0], x : x + tag.shape[1]].sum())


def _places(box: Box, width: int, height: int) -> Iterator[Point]:
    """Left top corners of a tag around a box, in order of preference: right, left, above, below."""
    left, top, right, bottom = box
    middle_x, middle_y = (left + right - width) // 2, (top + bottom - height) // 2
    for gap in _GAPS:
        for y in (top, middle_y, bottom - height):
            yield right + gap, y
            yield left - gap - width, y
        for x in (left, middle_x, right - width):
            yield x, top - gap - height
            yield x, bottom + gap


def _lattice(box: Box, last_x: int, last_y: int) -> list[Point]:
    """Places all over the picture, the nearest to the box first."""
    x, y = (box[0] + box[2]) // 2, (box[1] + box[3]) // 2
    places = [(i, j) for i in range(0, last_x + 1, _LATTICE) for j in range(0, last_y + 1, _LATTICE)]
    return sorted(places, key=lambda place: (place[0] - x) ** 2 + (place[1] - y) ** 2)
