"""Drawing on a page: lines of text, boxes, paths, pictures, and what leads to another place."""

from __future__ import annotations

import io
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

from irsurvey.report.pdf import letters
from irsurvey.report.pdf.runs import Box, Colour, Face, Line

if TYPE_CHECKING:
    from fpdf import FPDF

RULE: Colour = (220, 218, 211)
STRONG_RULE: Colour = (185, 182, 171)
HAIR, FINE = 0.12, 0.2
"""Widths of lines [mm]."""


class Paper:
    """The page of a document that is being drawn; `page_of` has the page and height of each place in it."""

    def __init__(self, pdf: FPDF, page_of: Mapping[str, tuple[int, float]]) -> None:
        self.pdf = pdf
        self.page_of = page_of

    def line(self, line: Line, x: float, y: float) -> None:
        """A line of text whose top is at `y`, with its boxes and with links where the document has their places."""
        for segment in line.segments:
            run, left = segment.run, x + segment.x
            if run.box:
                top = y + line.baseline - run.face.baseline
                self.box(run.box, left, top, segment.width, run.face.height + 0.15)
                left += (segment.width - run.face.width(run.text)) / 2
            self.text(segment.text, left, y + line.baseline, run.face)
            if run.link in self.page_of:
                self.link(run.link, left, y, segment.width, line.height)

    def link(self, place: str, x: float, y: float, width: float, height: float) -> None:
        """An area that leads to a place of this document."""
        page, top = self.page_of[place]
        self.pdf.link(x, y, width, height, self.pdf.add_link(y=max(top - 3, 0), page=page))

    def text(self, text: str, x: float, baseline: float, face: Face) -> None:
        """Letters in the order given."""
        if text:
            self.pdf.set_font(letters.FAMILY, face.style, face.size)
            self.pdf.set_text_color(*face.ink)
            self.pdf.text(x, baseline, text)

    def box(self, box: Box, x: float, y: float, width: float, height: float) -> None:
        """A small box, its corners round or square."""
        self.pdf.set_fill_color(*box.fill)
        self.pdf.set_draw_color(*box.border)
        self.pdf.set_line_width(FINE)
        if box.dashed:
            self.pdf.set_dash_pattern(dash=0.9, gap=0.7)
        radius = min(1.5, height / 2)
        self.pdf.rect(x, y, width, height, style="DF", round_corners=not box.square, corner_radius=radius)
        if box.dashed:
            self.pdf.set_dash_pattern()

    def block(self, x: float, y: float, width: float, height: float, ink: Colour) -> None:
        """A filled rectangle."""
        self.pdf.set_fill_color(*ink)
        self.pdf.rect(x, y, width, height, style="F")

    def path(
        self, points: Sequence[tuple[float, float]], ink: Colour = RULE, *, width: float = HAIR, dash: float = 0.0
    ) -> None:
        """A line through points, dashed where `dash` is the length of its dashes."""
        self.pdf.set_draw_color(*ink)
        self.pdf.set_line_width(width)
        if dash:
            self.pdf.set_dash_pattern(dash=dash, gap=0.8 * dash)
        self.pdf.polyline(list(points))
        if dash:
            self.pdf.set_dash_pattern()

    def dot(self, x: float, y: float, radius: float, ink: Colour) -> None:
        """A filled circle around (x, y)."""
        self.pdf.set_fill_color(*ink)
        self.pdf.circle(x, y, radius, style="F")

    def picture(self, data: bytes, x: float, y: float, size: tuple[float, float]) -> None:
        """A picture of that width and height, with a fine border."""
        self.pdf.image(io.BytesIO(data), x=x, y=y, w=size[0], h=size[1])
        self.pdf.set_draw_color(*RULE)
        self.pdf.set_line_width(HAIR)
        self.pdf.rect(x, y, *size)
