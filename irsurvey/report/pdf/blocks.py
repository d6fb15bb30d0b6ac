"""What a page is made of: paragraphs, headings, facts, things side by side, pictures; each a list of pieces."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from irsurvey.report.facts import Fact
from irsurvey.report.pdf.layout import BREADTH, LENGTH, Entry, Piece, total
from irsurvey.report.pdf.runs import AMBER, DEEP, INK, QUIET, Colour, Face, Line, Run, Runs, broken

if TYPE_CHECKING:
    from irsurvey.report.pdf.paper import Paper

BODY = Face()
STRONG = Face(style="B")
SMALL = Face(7.2)
SMALL_STRONG = Face(7.2, "B")
NOTE = Face(7.2, ink=QUIET)
H1, H2, H3, H4 = (Face(size, "B", DEEP) for size in (21, 13, 9.4, 8.4))

_TALLEST = 0.55 * LENGTH  # of what stands side by side: taller is divided
_SLICE = 55.0  # mm, the height of its parts then
_GUTTER = 6.0  # mm, between columns of facts
_LONG = 150  # letters from which a fact takes a line of its own


@dataclass(frozen=True, slots=True)
class Column:
    """Pieces that stand beside others: how far from the left edge, and what they are."""

    x: float
    pieces: Sequence[Piece]


def text(words: str, face: Face = BODY) -> Runs:
    """One run."""
    return (Run(words, face),)


def paragraph(
    runs: Runs, *, x: float = 0.0, width: float = BREADTH, gap: float = 1.6, keep: bool = False, at_right: bool = False
) -> list[Piece]:
    """Lines of text.  Neither its first nor its last line stands alone on a page."""
    lines = broken(runs, width)
    last = len(lines) - 1
    return [
        Piece(
            line.height,
            _drawn(line, x, width, at_right or line.right_to_left),
            gap=gap if place == 0 else 0.0,
            keep=(place in (0, last - 1) and place < last) or (keep and place == last),
        )
        for place, line in enumerate(lines)
    ]


def heading(
    runs: Runs | str, face: Face = H3, *, gap: float = 4.0, place: str = "", entry: Entry | None = None
) -> list[Piece]:
    """A heading, which stays with what it heads; a rule under those of the first two kinds would be too much."""
    pieces = paragraph(text(runs, face) if isinstance(runs, str) else runs, gap=gap)
    return [
        replace(piece, keep=True, place=place if number == 0 else "", entry=entry if number == 0 else None)
        for number, piece in enumerate(pieces)
    ]


def bullets(entries: Iterable[Runs], *, gap: float = 0.9, face: Face = BODY) -> list[Piece]:
    """Paragraphs, each behind a dot."""
    pieces: list[Piece] = []
    for runs in entries:
        lines = paragraph(runs, x=3.6, width=BREADTH - 3.6, gap=gap)
        for piece in lines[:1]:
            pieces.append(over(piece, lambda paper, x, y: paper.dot(x + 1.0, y + face.height / 2, 0.5, QUIET)))
        pieces += lines[1:]
    return pieces


def aside(pieces: Iterable[Piece], ink: Colour = AMBER) -> list[Piece]:
    """Pieces with a bar at their left; they were made with room for it (`ASIDE`)."""
    return [over(piece, _bar(piece.height, ink)) for piece in pieces]


ASIDE = 3.5
"""How far from the left edge what has a bar stands [mm]."""


def facts(
    told: Sequence[Fact], *, columns: int = 3, x: float = 0.0, width: float = BREADTH, gap: float = 1.6
) -> list[Piece]:
    """Facts in columns, the name over what is told; one that tells much takes a line of its own."""
    pieces: list[Piece] = []
    each = (width - (columns - 1) * _GUTTER) / columns
    waiting: list[Fact] = []

    def row(entries: Sequence[Fact], wide: float) -> None:
        cells = [
            Column(k * (each + _GUTTER), _fact(entry, x + k * (each + _GUTTER), wide))
            for k, entry in enumerate(entries)
        ]
        pieces.extend(beside(cells, gap=gap))

    for fact in told:
        is_long = len(fact.name) + len(fact.text) + len(fact.note) > _LONG
        if waiting and (is_long or len(waiting) == columns):
            row(waiting, each)
            waiting = []
        if is_long:
            row([fact], width)
        else:
            waiting.append(fact)
    if waiting:
        row(waiting, each)
    return pieces


def labelled(told: Iterable[tuple[str, Runs]], *, x: float = 0.0, width: float, label: float = 23.0) -> list[Piece]:
    """Facts one under the other, the name at the left of what is told."""
    pieces: list[Piece] = []
    for name, runs in told:
        named = paragraph(text(name, NOTE), x=x, width=label - 2, gap=0)
        value = paragraph(runs, x=x + label, width=width - label, gap=0)
        pieces += beside([Column(0, named), Column(0, value)], gap=0.9)
    return pieces


def beside(columns: Sequence[Column], *, gap: float = 0.0, place: str = "") -> list[Piece]:
    """Stacks of pieces side by side (their own x says where) as one piece; very tall ones in several, one part of each
    beside the others."""
    stacks = [list(column.pieces) for column in columns]
    tallest = max((total(stack) for stack in stacks), default=0.0)
    if tallest <= _TALLEST:
        return [replace(_side_by_side(stacks), gap=gap, place=place)] if tallest else []
    pieces = []
    while any(stacks):
        parts = [_taken(stack, _SLICE) for stack in stacks]
        pieces.append(_side_by_side(parts))
    return [replace(pieces[0], gap=gap, place=place), *pieces[1:]]


def stacked(pieces: Iterable[Piece]) -> Piece:
    """Pieces as one that no turn of the page divides."""
    return _side_by_side([list(pieces)])


def space(height: float) -> Piece:
    """Nothing, so high."""
    return Piece(height, lambda _paper, _x, _y: None)


def over(piece: Piece, under: Callable[[Paper, float, float], None]) -> Piece:
    """A piece with something drawn before it at its own corner."""

    def draw(paper: Paper, x: float, y: float) -> None:
        under(paper, x, y)
        piece.draw(paper, x, y)

    return replace(piece, draw=draw)


def picture(data: bytes, size: tuple[float, float], *, x: float = 0.0, gap: float = 0.0) -> Piece:
    """A picture of that width and height [mm]."""
    return Piece(size[1] + 0.8, lambda paper, left, y: paper.picture(data, left + x, y, size), gap=gap, keep=True)


def emphasis(words: str, size: float = BODY.size, ink: Colour = INK) -> Run:
    """A bold run."""
    return Run(words, Face(size, "B", ink))


def _fact(fact: Fact, x: float, width: float) -> list[Piece]:
    return [
        *paragraph(text(fact.name, Face(6.8, ink=QUIET)), x=x, width=width, gap=0, keep=True),
        *paragraph(text(fact.text, Face(7.8)), x=x, width=width, gap=0),
        *paragraph(text(fact.note, Face(6.8, ink=QUIET)), x=x, width=width, gap=0.2),
    ]


def _drawn(line: Line, x: float, width: float, at_right: bool) -> Callable[[Paper, float, float], None]:
    offset = x + (max(width - line.width, 0.0) if at_right else 0.0)
    return lambda paper, left, y: paper.line(line, left + offset, y)


def _bar(height: float, ink: Colour) -> Callable[[Paper, float, float], None]:
    return lambda paper, x, y: paper.block(x, y, 1.0, height, ink)


def _side_by_side(stacks: Sequence[Sequence[Piece]]) -> Piece:
    def draw(paper: Paper, x: float, y: float) -> None:
        for stack in stacks:
            top = y
            for number, piece in enumerate(stack):
                top += piece.gap if number else 0.0
                piece.draw(paper, x, top)
                top += piece.height

    return Piece(max((total(stack) for stack in stacks), default=0.0), draw)


def _taken(stack: list[Piece], height: float) -> list[Piece]:
    """The first pieces of a stack, up to that height and one at least, which it loses."""
    taken: list[Piece] = []
    while stack and (not taken or total([*taken, stack[0]]) <= height):
        taken.append(stack.pop(0))
    return taken
