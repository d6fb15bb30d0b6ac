"""Where everything stands: pieces one under the other, pages turned between them; nothing is drawn yet."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from irsurvey.report.pdf.paper import Paper

WIDTH, HEIGHT = 210.0, 297.0
"""Of the paper [mm]: A4."""
LEFT, RIGHT, TOP, BOTTOM = 17.0, 193.0, 23.0, 279.0
"""Edges of what is written on."""
BREADTH, LENGTH = RIGHT - LEFT, BOTTOM - TOP

Draw = Callable[["Paper", float, float], None]
"""Draws something whose left top corner is at (x, y)."""

_TOLERANCE = 1e-6  # mm, of sums of heights


@dataclass(frozen=True, slots=True)
class Entry:
    """A line of the contents and of the bookmarks, the outermost level 0."""

    title: str
    level: int


@dataclass(frozen=True, slots=True)
class Piece:
    """What no turn of the page divides: its height [mm] and how it is drawn."""

    height: float
    draw: Draw
    gap: float = 0.0  # above it, unless it stands at the top
    keep: bool = False  # on one page with the next piece
    head: Piece | None = None  # drawn again above it where it begins a page
    place: str = ""  # its name, for what leads to it
    entry: Entry | None = None


@dataclass(frozen=True, slots=True)
class Placed:
    """A piece and the height at which it stands."""

    piece: Piece
    y: float


@dataclass(slots=True)
class Page:
    """One page; `section` stands at its head, a plain page has neither head nor foot."""

    section: str
    is_plain: bool = False
    placed: list[Placed] = field(default_factory=list)


@dataclass(slots=True)
class Layout:
    """Pages that grow downwards and in number."""

    pages: list[Page] = field(default_factory=list)
    y: float = TOP
    section: str = ""

    @property
    def room(self) -> float:
        """Height left on the last page [mm]."""
        return BOTTOM - self.y if self.pages else 0.0

    def turn(self, section: str | None = None, *, plain: bool = False) -> None:
        """Begin a page, in the same section where none is named."""
        self.section = self.section if section is None else section
        self.pages.append(Page(self.section, plain))
        self.y = TOP

    def reach(self, pieces: Iterable[Piece]) -> tuple[int, float]:
        """How many pages pieces would still begin if they were added here, and how far down the last would reach."""
        trial = Layout([Page(self.section)], self.y, self.section)
        trial.add(pieces)
        return len(trial.pages) - 1, trial.y - TOP

    def go_on(self, section: str, least_room: float) -> None:
        """Begin a section: on the last page, or on a new one where less room is left."""
        self.section = section
        if self.room < least_room:
            self.turn()

    def add(self, pieces: Iterable[Piece]) -> None:
        """Put pieces under what is there; those that stay together move to a new page together."""
        together: list[Piece] = []
        for piece in pieces:
            together.append(piece)
            if not piece.keep:
                self._put(together)
                together = []
        self._put(together)

    def _put(self, together: list[Piece]) -> None:
        if not together:
            return
        needed = total(together)
        if not self._fits(needed + together[0].gap) and needed <= LENGTH:
            self.turn()
        for piece in together:
            if not self._fits(piece.height + piece.gap):
                self.turn()
            if self.y == TOP and piece.head:
                self._set(piece.head, 0.0)
            self._set(piece, 0.0 if self.y == TOP else piece.gap)

    def _fits(self, height: float) -> bool:
        return self.y == TOP or self.y + height <= BOTTOM + _TOLERANCE

    def _set(self, piece: Piece, gap: float) -> None:
        self.pages[-1].placed.append(Placed(piece, self.y + gap))
        self.y += gap + piece.height


def total(pieces: Iterable[Piece]) -> float:
    """Height of pieces one under the other [mm], without the gap above the first."""
    stacked = list(pieces)
    return sum(piece.height + piece.gap for piece in stacked) - (stacked[0].gap if stacked else 0.0)
