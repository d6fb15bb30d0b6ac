"""findings.csv: one row per finding and per component, with the numbers of report.json."""

from __future__ import annotations

import csv
import io
import re
from dataclasses import fields
from pathlib import Path
from typing import Any

from irsurvey import files
from irsurvey.model import ComponentReport, Finding, FrameReport, FrameTask, Report
from irsurvey.report.json import plain
from irsurvey.report.ranking import governing

_ESTIMATES = dict.fromkeys(
    field.name
    for record in (Finding, ComponentReport)
    for field in fields(record)
    if str(field.type) == "Estimate | None"  # one number, not a dict of them
)
_PLAIN = ("label", "pixels", "load_a", "rated_a")
_SHAPE = ("elongation", "edge_sharpness_per_pixel")
_PROBABILITIES = ("exceeds_threshold", "condensation_probability", "mould_probability")
_RATED = tuple(f"{delta}_{end}" for delta in ("delta_similar_k", "delta_ambient_k") for end in ("low", "high"))

COLUMNS = (
    *("frame", "id", "key", "kind", "name", "sense"),
    *_PLAIN,
    *(column for name in _ESTIMATES for column in (name, f"u_{name}")),
    *(f"at_rated_load_{name}" for name in _RATED),
    *_SHAPE,
    *_PROBABILITIES,
    "indication",
    *("criterion", "class", "urgency", "verdict", "outcome", "flags"),
)

_CONTROLS = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f]")
_FORMULA_STARTS = tuple("=+-@\t\r\n＝＋－＠")
"""What makes a spreadsheet run a cell as a formula, full-width forms included (OWASP, CSV Injection)."""


def write(report: Report, _tasks: tuple[FrameTask, ...], out: Path) -> Path:
    """Write OUT/findings.csv (UTF-8, RFC 4180: comma, CRLF), whole or not at all, and return its path."""
    stream = io.StringIO(newline="")
    writer = csv.DictWriter(stream, COLUMNS, restval="")
    writer.writeheader()
    for frame in report.frames:
        items: tuple[Finding | ComponentReport, ...] = (*frame.findings, *frame.components)
        for item in items:
            writer.writerow({name: _cell(value) for name, value in _row(frame, item).items()})
    path = out / "findings.csv"
    files.write_bytes(path, stream.getvalue().encode("utf-8", "replace"))
    return path


def as_text(cell: str) -> str:
    """A text that a spreadsheet shows instead of running it: an apostrophe before what would start a formula.

    Control characters, of which NUL ends a table in many a reader, become U+FFFD as on the page."""
    cell = _CONTROLS.sub("\ufffd", cell)
    return f"'{cell}" if cell.startswith(_FORMULA_STARTS) else cell


def _row(frame: FrameReport, item: Finding | ComponentReport) -> dict[str, Any]:
    written = plain(item)
    governs = governing(item.assessments)
    row: dict[str, Any] = {"frame": frame.id, "kind": "finding" if isinstance(item, Finding) else "component"}
    row |= {name: written.get(name) for name in ("id", "key", "name", "sense", *_PLAIN)}
    for name in _ESTIMATES:
        estimate = written.get(name) or {}
        row |= {name: estimate.get("value"), f"u_{name}": estimate.get("u")}
    for delta, band in (written.get("at_rated_load") or {}).items():
        row |= {f"at_rated_load_{delta}_{end}": number for end, number in (band or {}).items()}
    row |= {name: written.get("shape", {}).get(name) for name in _SHAPE}
    row |= {name: written.get(name) for name in _PROBABILITIES}
    row["indication"] = (written.get("indication") or {}).get("pattern")
    if governs:
        row |= {"criterion": governs.criterion, "class": governs.class_, "verdict": governs.verdict}
    return row | {"urgency": item.urgency, "outcome": item.outcome, "flags": ";".join(item.flags)}


def _cell(value: str | float | None) -> str | float:
    if value is None:
        return ""
    return as_text(value) if isinstance(value, str) else value
