"""Text in runs of one face each, broken into the lines of a column."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace
from functools import lru_cache

from irsurvey.report.pdf import letters

Colour = tuple[int, int, int]

INK: Colour = (28, 36, 48)
QUIET: Colour = (86, 96, 110)
DEEP: Colour = (0, 34, 78)
AMBER: Colour = (138, 75, 0)
PAPER: Colour = (255, 255, 255)

POINT = 25.4 / 72
"""Millimetres in a point."""
GAP = "\u2002"
"""A wider space, between things that are no sentence."""
LEADING = 1.38
"""Distance of two lines of text, in sizes of its letters."""

_BASELINE = 1.03  # from the top of a line, in sizes
_CHIP_PADDING = 1.5  # mm, left and right of the words of a chip
_CHIP_MARGIN = 0.9  # mm, behind a chip
_MOST_LETTERS = 300  # of a text that is cut to one line
_WORD = re.compile(r"[^ ]+ *| +")
_OPEN_ENDED = re.compile(r"(?<=[/_\\])(?=[^ ]{6})")
"""Places where a long word, such as a path, may be broken."""


@dataclass(frozen=True, slots=True)
class Face:
    """How letters look: size [pt], style ("" or "B"), colour."""

    size: float = 8.2
    style: str = ""
    ink: Colour = INK

    @property
    def height(self) -> float:
        """Of a line [mm]."""
        return self.size * POINT * LEADING

    @property
    def baseline(self) -> float:
        """From the top of a line [mm]."""
        return self.size * POINT * _BASELINE

    def width(self, text: str) -> float:
        """Of a text as it can be written [mm]."""
        return letters.width(text, self.style) * self.size * POINT


@dataclass(frozen=True, slots=True)
class Box:
    """The box of a chip or a mark: its fill, its border, whether that is dashed, whether its corners are square."""

    fill: Colour = PAPER
    border: Colour = (141, 148, 158)
    dashed: bool = False
    square: bool = False


@dataclass(frozen=True, slots=True)
class Run:
    """Text of one face; where it leads (the name of a place), and the box around it, which keeps it in one line."""

    text: str
    face: Face = Face()
    link: str = ""
    box: Box | None = None


Runs = tuple[Run, ...]


@dataclass(frozen=True, slots=True)
class Segment:
    """A part of a line, in the order in which it is drawn: where it begins, how wide it is [mm]."""

    x: float
    width: float
    text: str
    run: Run


@dataclass(frozen=True, slots=True)
class Line:
    """One line of text; `width` is what its letters take, and it stands at the right where that is how it is read."""

    segments: tuple[Segment, ...]
    width: float
    height: float
    baseline: float
    right_to_left: bool = False


class _Part:
    """A word, or a part of one, of a single run; its width, and that without the space behind it [mm]."""

    __slots__ = ("inked", "run", "text", "width")

    def __init__(self, text: str, run: Run) -> None:
        self.text, self.run = text, run
        inked = text.rstrip(" ")
        self.inked = run.face.width(inked)
        self.width = self.inked if len(inked) == len(text) else run.face.width(text)
        if run.box:
            self.inked += 2 * _CHIP_PADDING
            self.width += 2 * _CHIP_PADDING + _CHIP_MARGIN


def broken(runs: Iterable[Run], width: float) -> list[Line]:
    """The lines of these runs in a column [mm]; a word wider than the column is broken where it has to be."""
    prepared = [replace(run, text=letters.shown(run.text)) for run in runs]
    if not any(run.text for run in prepared):
        return []
    lines: list[Line] = []
    open_: list[_Part] = []
    used = 0.0
    for word in _words(prepared):
        if open_ and used + _inked(word) > width:
            lines.append(_line(open_, prepared))
            open_, used = [], 0.0
        for part in _fitting(word, width):
            if open_ and used + part.inked > width + 1e-9:
                lines.append(_line(open_, prepared))
                open_, used = [], 0.0
            if open_ or part.text.strip(" "):  # no line begins with a space
                open_.append(part)
                used += part.width
    return [*lines, _line(open_, prepared)] if open_ else lines


def cut(text: str, face: Face, width: float) -> str:
    """A text cut to what fits on one line [mm], with … where it was."""
    text = letters.shown(text[:_MOST_LETTERS])
    if face.width(text) <= width:
        return text
    while text and face.width(f"{text}…") > width:
        text = text[:-1]
    return f"{text.rstrip()}…"


def spans(runs: Iterable[Run]) -> tuple[float, float]:
    """The least width in which no word is broken, and the width in which nothing is [mm]."""
    words = list(_words([replace(run, text=letters.shown(run.text)) for run in runs]))
    return max(map(_inked, words), default=0.0), sum(part.width for word in words for part in word)


def _words(runs: list[Run]) -> Iterator[list[_Part]]:
    """Words; one may go on from run to run."""
    word: list[_Part] = []
    for run in runs:
        parts = [run.text] if run.box else _parts(run.text)
        for text in parts:
            word.append(_Part(text, run))
            if text.endswith(" ") or (run.box and len(word) == 1):
                yield word
                word = []
    if word:
        yield word


@lru_cache(maxsize=20_000)
def _parts(text: str) -> tuple[str, ...]:
    return tuple(
        piece for word in _WORD.findall(text) for piece in (_OPEN_ENDED.split(word) if len(word) > 24 else [word])
    )


def _inked(word: list[_Part]) -> float:
    return sum(part.width for part in word[:-1]) + word[-1].inked


def _fitting(word: list[_Part], width: float) -> Iterator[_Part]:
    """The parts of a word, those wider than the column cut into pieces that fit."""
    for part in word:
        if part.inked <= width or len(part.text) < 2:
            yield part
            continue
        run = replace(part.run, box=None)
        start, used = 0, 0.0
        for place, char in enumerate(part.text):
            step = run.face.width(char)
            if place > start and used + step > width:
                yield _Part(part.text[start:place], run)
                start, used = place, 0.0
            used += step
        yield _Part(part.text[start:], run)


def _line(parts: list[_Part], runs: list[Run]) -> Line:
    """Parts of one run beside each other are one segment, put into the order of reading within it."""
    merged: list[_Part] = []
    for part in parts:
        if merged and merged[-1].run == part.run and not part.run.box:
            merged[-1] = _Part(merged[-1].text + part.text, part.run)
        else:
            merged.append(part)
    merged[-1] = _Part(merged[-1].text.rstrip(" "), merged[-1].run)
    segments, x = [], 0.0
    for part in merged:
        order = letters.visual(part.text, right_to_left=letters.is_right_to_left(part.run.text))
        segments.append(Segment(x, part.inked if part.run.box else part.width, order, part.run))
        x += part.width
    faces = [part.run.face for part in merged]
    return Line(
        tuple(segments),
        x,
        height=max(face.height for face in faces) + (0.9 if any(part.run.box for part in merged) else 0.0),
        baseline=max(face.baseline for face in faces) + (0.45 if any(part.run.box for part in merged) else 0.0),
        right_to_left=all(letters.is_right_to_left(run.text) for run in runs if run.text.strip()),
    )
