"""Tables: columns as wide as what they hold asks for, their heading again on every page."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from irsurvey.report.pdf.blocks import Column, beside, over, paragraph, text
from irsurvey.report.pdf.layout import BREADTH, Piece
from irsurvey.report.pdf.paper import FINE, HAIR, RULE, STRONG_RULE
from irsurvey.report.pdf.runs import QUIET, Colour, Face, Runs, spans

if TYPE_CHECKING:
    from irsurvey.report.pdf.paper import Paper

HEAD = Face(6.6, "B", QUIET)
CELL = Face(7.2)

_GUTTER = 2.6  # mm, between columns
_SAMPLE = 60  # rows that tell how wide columns should be
_STEP = 3.0  # mm, in which columns are made wider
_LONGEST_NUMBER = 34.0  # mm: what is longer, with its interval, is broken into lines
_RAGGED = 1.12  # what lines that end where words do take more than their letters
_NARROWEST = 9.0  # mm, of a column of text
_ABOVE, _BELOW = 0.9, 0.8  # mm, in a row
DENSE, TIGHT = 0.45, 0.2
"""Of the room above and below what stands in a row: in a table that is read for one row, and in one looked things up
in."""


@dataclass(frozen=True, slots=True)
class Head:
    """What stands over a column, and whether its cells stand at the right, as numbers do."""

    words: str
    at_right: bool = False


def table(
    heads: Sequence[Head],
    rows: Sequence[Sequence[Runs]],
    *,
    caption: Runs = (),
    x: float = 0.0,
    width: float = BREADTH,
    foot: Sequence[Runs] = (),
    airy: float = 1.0,
) -> list[Piece]:
    """A table; `foot` is its last row, of the same columns; `airy`: how much of the usual room its rows have."""
    all_rows = [*rows, foot] if foot else rows
    places = _places(heads, all_rows, x, width)
    right = places[-1][0] + places[-1][1]
    head = _row([text(head.words, HEAD) for head in heads], heads, places, 1.0)
    head = [replace(over(piece, _rule(x, right, piece.height - 0.1, STRONG_RULE, FINE)), keep=True) for piece in head]
    pieces = [*paragraph(caption, x=x, width=width, gap=1.6, keep=True), *head]
    for number, row in enumerate(all_rows):
        ink = STRONG_RULE if foot and number == len(rows) else RULE
        for part, piece in enumerate(_row(row, heads, places, airy)):
            ruled = over(piece, _rule(x, right, 0.0, ink, HAIR)) if number and not part else piece
            stays = bool(foot) and number == len(rows) - 1  # a total never stands alone
            pieces.append(replace(ruled, head=head[0] if len(head) == 1 else None, keep=stays))
    return pieces


def _row(
    cells: Sequence[Runs], heads: Sequence[Head], places: Sequence[tuple[float, float]], airy: float
) -> list[Piece]:
    columns = [
        Column(0, paragraph(runs, x=left, width=breadth, gap=0, at_right=head.at_right))
        for runs, head, (left, breadth) in zip(cells, heads, places, strict=True)
    ]
    pieces = beside(columns)
    return [_padded(piece, airy) for piece in pieces]


def _padded(piece: Piece, airy: float) -> Piece:
    def draw(paper: Paper, x: float, y: float) -> None:
        piece.draw(paper, x, y + airy * _ABOVE)

    return replace(piece, height=piece.height + airy * (_ABOVE + _BELOW), draw=draw)


def _rule(left: float, right: float, below: float, ink: Colour, width: float) -> Callable[[Paper, float, float], None]:
    return lambda paper, x, y: paper.path([(x + left, y + below), (x + right, y + below)], ink, width=width)


def _places(heads: Sequence[Head], rows: Sequence[Sequence[Runs]], x: float, width: float) -> list[tuple[float, float]]:
    """Where each column begins and how wide it is: as wide as its text where there is room, else so that the table
    becomes short; no narrower than its longest word, numbers first."""
    asked = [
        [_asked(text(head.words, HEAD), head, whole=False) for head in heads],
        *([_asked(cell, head, whole=True) for cell, head in zip(row, heads, strict=True)] for row in _some(rows)),
    ]
    least = [max(row[k][0] for row in asked) for k in range(len(heads))]
    wished = [max(row[k][1] for row in asked) + 0.1 for k in range(len(heads))]
    free = width - _GUTTER * (len(heads) - 1)
    least = _shrunk([low + 0.1 for low in least], heads, free)
    if sum(wished) <= free:
        extra = (free - sum(wished)) / len(heads)
        widths = [one + extra for one in wished]
    else:
        widths = _widened(least, [[cell for _, cell in row] for row in asked], free)
    starts = [x + sum(widths[:k]) + k * _GUTTER for k in range(len(widths))]
    return list(zip(starts, widths, strict=True))


def _asked(runs: Runs, head: Head, *, whole: bool) -> tuple[float, float]:
    """The least width of a cell and the width it asks for: a number is one word, and its heading may be broken."""
    least, wished = spans(runs)
    if not head.at_right:
        return least, wished
    return (wished, wished) if whole and wished <= _LONGEST_NUMBER else (least, wished if whole else least)


def _some(rows: Sequence[Sequence[Runs]]) -> Sequence[Sequence[Runs]]:
    """Rows enough to tell how wide the columns of a long table should be."""
    return rows[:: max(1, len(rows) // _SAMPLE)]


def _shrunk(least: list[float], heads: Sequence[Head], free: float) -> list[float]:
    """Where not even the longest words fit, words of text are broken before numbers are."""
    over = sum(least) - free
    if over <= 0:
        return least
    of_text = sum(low for low, head in zip(least, heads, strict=True) if not head.at_right)
    if of_text - over < _NARROWEST * sum(not head.at_right for head in heads):
        return [low * free / sum(least) for low in least]
    return [low if head.at_right else low * (1 - over / of_text) for low, head in zip(least, heads, strict=True)]


def _widened(widths: list[float], wished: Sequence[Sequence[float]], free: float) -> list[float]:
    """What is left over goes, bit by bit, to the column that then makes the table shortest."""

    def lines(candidate: Sequence[float]) -> float:
        return sum(
            max(wish * _RAGGED / one if wish > one else 1.0 for wish, one in zip(row, candidate, strict=True))
            for row in wished
        )

    widths = list(widths)
    left = free - sum(widths)
    while left > 0.05:
        step = min(_STEP, left)
        tried = [[one + step * (k == chosen) for k, one in enumerate(widths)] for chosen in range(len(widths))]
        most = [max(row[k] for row in wished) / widths[k] for k in range(len(widths))]
        best = min(range(len(widths)), key=lambda k: (lines(tried[k]), -most[k]))
        widths, left = tried[best], left - step
    return widths
