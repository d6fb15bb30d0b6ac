"""A document of pages laid out before: head and foot of each, bookmarks, metadata."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime

from fpdf import FPDF

from irsurvey.report.pdf import letters
from irsurvey.report.pdf.layout import HEIGHT, LEFT, RIGHT, Page
from irsurvey.report.pdf.paper import FINE, RULE, Paper
from irsurvey.report.pdf.runs import QUIET, Face, Run, broken, cut
from irsurvey.texts import language, say

_HEAD, _FOOT = 12.5, HEIGHT - 13.0
_SMALL = Face(7, ink=QUIET)
_MOST_LETTERS = 1000  # of a title or author in the metadata
_ABOVE = 3.0  # mm, of what a bookmark leads to


@dataclass(frozen=True, slots=True)
class About:
    """What a document says of itself; `running` stands at the head of its pages, `foot` under them."""

    title: str
    author: str
    subject: str
    creator: str
    made: datetime
    running: str
    foot: str


def drawn(pages: Sequence[Page], about: About) -> bytes:
    """The whole document; the same pages give the same bytes."""
    pdf = FPDF(unit="mm", format="A4")
    pdf.set_auto_page_break(False)
    letters.embed(pdf)
    for set_, text in (
        (pdf.set_title, about.title),
        (pdf.set_author, about.author),
        (pdf.set_subject, about.subject),
        (pdf.set_creator, about.creator),
    ):
        set_(letters.shown(text)[:_MOST_LETTERS])
    pdf.set_lang(language())
    pdf.set_creation_date(about.made)
    paper = Paper(pdf, places(pages))
    for number, page in enumerate(pages, 1):
        pdf.add_page()
        if not page.is_plain:
            _edges(paper, about.running, page.section, _HEAD)
            paper.path([(LEFT, _HEAD + 5), (RIGHT, _HEAD + 5)], RULE, width=FINE)
            _edges(paper, about.foot, say("page_of", page=number, pages=len(pages)), _FOOT)
        for placed in page.placed:
            if entry := placed.piece.entry:
                pdf.set_y(max(placed.y - _ABOVE, 0))
                pdf.start_section(letters.shown(entry.title)[:200], entry.level, strict=False)
            placed.piece.draw(paper, LEFT, placed.y)
    return bytes(pdf.output())


def places(pages: Sequence[Page]) -> dict[str, tuple[int, float]]:
    """Place → page and height of the first piece of that name."""
    found: dict[str, tuple[int, float]] = {}
    for number, page in enumerate(pages, 1):
        for placed in page.placed:
            if placed.piece.place:
                found.setdefault(placed.piece.place, (number, placed.y))
    return found


def _edges(paper: Paper, left: str, right: str, y: float) -> None:
    """A short text at either edge."""
    most = (RIGHT - LEFT) / 2 - 4
    for text, at_right in ((left, False), (right, True)):
        for line in broken((Run(cut(text, _SMALL, most), _SMALL),), 2 * most)[:1]:
            paper.line(line, RIGHT - line.width if at_right else LEFT, y)
