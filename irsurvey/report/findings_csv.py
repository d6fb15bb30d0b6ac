"""findings.csv: one row per finding and per component, with the numbers of report.json."""

from __future__ import annotations

from dataclasses import fields
from pathlib import Path
from typing import Any

from irsurvey.model import ComponentReport, Finding, FrameReport, FrameTask, JointHeat, Report, TrendReport
from irsurvey.report import csv_table
from irsurvey.report.json import plain
from irsurvey.report.ranking import governing
from irsurvey.report.review.standing import COLUMNS as REVIEW
from irsurvey.report.review.standing import cells


def _estimates(*records: type) -> tuple[str, ...]:
    """Names of the fields that hold one measured number, not a dict of them."""
    return tuple(
        dict.fromkeys(
            field.name for record in records for field in fields(record) if str(field.type) == "Estimate | None"
        )
    )


_OF_PARTS = {"joint": _estimates(JointHeat), "trend": _estimates(TrendReport)}
"""Records within a component → their measured numbers; a column begins with the record's name."""
_ESTIMATES = (
    *_estimates(Finding, ComponentReport),
    *(f"{part}_{name}" for part, names in _OF_PARTS.items() for name in names),
)
_PLAIN = ("label", "pixels", "load_a", "rated_a")
_SHAPE = ("elongation", "edge_sharpness_per_pixel")
_PROBABILITIES = ("exceeds_threshold", "condensation_probability", "mould_probability")
_RATED = tuple(f"{delta}_{end}" for delta in ("delta_similar_k", "delta_ambient_k") for end in ("low", "high"))
_LIMIT = ("name", "max_c", "rise_k")
_ALLOWED = ("low", "high")
_SLOPE = ("slope_low_k_per_year", "slope_high_k_per_year")

COLUMNS = (
    *("frame", "id", "key", "kind", "name", "sense"),
    *_PLAIN,
    *(column for name in _ESTIMATES for column in (name, f"u_{name}")),
    *(f"at_rated_load_{name}" for name in _RATED),
    *(f"limit_{name}" for name in _LIMIT),
    *(f"limit_allowed_now_c_{end}" for end in _ALLOWED),
    *(f"trend_{name}" for name in _SLOPE),
    *_SHAPE,
    *_PROBABILITIES,
    "indication",
    *("criterion", "class", "urgency", "verdict", "outcome", "flags"),
    *REVIEW,
)


def write(report: Report, _tasks: tuple[FrameTask, ...], out: Path) -> Path:
    """Write OUT/findings.csv, whole or not at all, and return its path."""
    told = cells(report)
    rows = (_row(frame, item) | told.get(item.key, {}) for frame in report.frames for item in _items(frame))
    return csv_table.write(out / "findings.csv", COLUMNS, rows)


def _items(frame: FrameReport) -> tuple[Finding | ComponentReport, ...]:
    return (*frame.findings, *frame.components)


def _row(frame: FrameReport, item: Finding | ComponentReport) -> dict[str, Any]:
    written = plain(item)
    governs = governing(item.assessments)
    limit, trend = written.get("limit") or {}, written.get("trend") or {}
    measured = written | {
        f"{part}_{name}": (written.get(part) or {}).get(name) for part, names in _OF_PARTS.items() for name in names
    }
    row: dict[str, Any] = {"frame": frame.id, "kind": "finding" if isinstance(item, Finding) else "component"}
    row |= {name: written.get(name) for name in ("id", "key", "name", "sense", *_PLAIN)}
    for name in _ESTIMATES:
        estimate = measured.get(name) or {}
        row |= {name: estimate.get("value"), f"u_{name}": estimate.get("u")}
    for delta, band in (written.get("at_rated_load") or {}).items():
        row |= {f"at_rated_load_{delta}_{end}": number for end, number in (band or {}).items()}
    row |= {f"limit_{name}": limit.get(name) for name in _LIMIT}
    row |= {f"limit_allowed_now_c_{end}": (limit.get("allowed_now_c") or {}).get(end) for end in _ALLOWED}
    row |= {f"trend_{name}": trend.get(name) for name in _SLOPE}
    row |= {name: written.get("shape", {}).get(name) for name in _SHAPE}
    row |= {name: written.get(name) for name in _PROBABILITIES}
    row["indication"] = (written.get("indication") or {}).get("pattern")
    if governs:
        row |= {"criterion": governs.criterion, "class": governs.class_, "verdict": governs.verdict}
    return row | {"urgency": item.urgency, "outcome": item.outcome, "flags": ";".join(item.flags)}
