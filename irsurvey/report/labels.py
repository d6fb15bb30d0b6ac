"""The numbers and letters on a picture, put where they hide nothing that matters."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from irsurvey.report.inks import DARK, LIGHT, Pixels, lettering

Point = tuple[int, int]
"""x, y [px]."""
Box = tuple[int, int, int, int]
"""Left, top, right, bottom [px]; the last two are the first pixel outside."""

_SIZE = 15  # of the lettering
_PADDING = 4  # between the lettering and the edge of its tag
_GAPS = (7, 18, 34)  # from what is labelled to its tag, the nearest that is free
_LATTICE = 24  # step of the places tried in a crowded picture
_ROMAN = ((100, "c"), (90, "xc"), (50, "l"), (40, "xl"), (10, "x"), (9, "ix"), (5, "v"), (4, "iv"), (1, "i"))
TAG_COST = 100
"""What a pixel of a tag adds to `busy`; outlines and what they enclose add 1."""


@dataclass(frozen=True, slots=True)
class Label:
    """A tag with a few letters for what lies in `box`; light on dark or dark on light."""

    text: str
    box: Box
    dark_on_light: bool

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
