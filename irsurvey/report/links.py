"""Where the parts of a report stand, on one page or on many."""

from __future__ import annotations

from dataclasses import dataclass

REPORT, SHEET = "report.html", "sheet.html"
"""The report, and the page of one frame in its folder where frames have pages of their own."""


@dataclass(frozen=True, slots=True)
class Links:
    """How one page leads to another; `here` is the frame whose page it is, "" for the report itself."""

    is_split: bool = False
    here: str = ""

    def sheet(self, frame: str, place: str = "") -> str:
        """The address of a place on the sheet of a frame, else of the sheet as a whole."""
        place = place or f"frame-{frame}"
        if not self.is_split or frame == self.here:
            return f"#{place}"
        return f"{'../' if self.here else 'frames/'}{frame}/{SHEET}#{place}"

    def report(self, place: str) -> str:
        """The address of a place of the report itself."""
        return f"{f'../../{REPORT}' if self.here else ''}#{place}"
