"""Reports for people and machines: each document has a writer; json, csv and repairs are always written."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from irsurvey.model import FrameTask, Report
from irsurvey.report import findings_csv, html, json, marked_csv, pdf, repairs_csv

Writer = Callable[[Report, tuple[FrameTask, ...], Path], Path | None]
"""Writes one document into the output folder, whole or not at all, and returns its path; None: there is none to
write of this report."""

WRITERS: dict[str, Writer] = {
    "json": json.write,
    "csv": findings_csv.write,
    "repairs": repairs_csv.write,
    "html": html.write,
    "pdf": pdf.write,
    "csv-bom": marked_csv.write,
}
"""Document → its writer."""
