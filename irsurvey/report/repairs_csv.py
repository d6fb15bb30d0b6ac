"""repairs.csv: the repair list as a work-order system imports it, one row for each item, what to repair first first."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from irsurvey import texts
from irsurvey.model import FrameTask, RepairItem, Report
from irsurvey.report import csv_table
from irsurvey.report.json import plain

COLUMNS = (
    *("rank", "asset", "location", "frame", "component"),
    *("urgency", "asks_for", "class", "confidence"),
    *("delta_k", "u_delta_k", "basis", "load_a", "rated_a"),
    *("action", "inspect_again", "taken", "key"),
)


def write(report: Report, _tasks: tuple[FrameTask, ...], out: Path) -> Path | None:
    """Write OUT/repairs.csv, whole or not at all, and return its path.

    A report without electrical frames has no repair list: None, and that of an earlier run is removed."""
    path = out / "repairs.csv"
    if not any(frame.kind == "electrical" for frame in report.frames):
        path.unlink(missing_ok=True)
        return None
    taken = {frame.id: frame.taken for frame in report.frames}
    return csv_table.write(path, COLUMNS, (_row(item, taken) for item in report.repairs))


def _row(item: RepairItem, taken: Mapping[str, str | None]) -> dict[str, Any]:
    written = plain(item)
    delta = written["delta_k"] or {}
    same = ("rank", "asset", "location", "frame", "urgency", "class", "confidence")
    return {
        **{name: written[name] for name in (*same, "load_a", "rated_a", "action", "inspect_again", "key")},
        "component": item.what,
        "asks_for": texts.to_do(item.urgency, "not cleared"),  # what asks for nothing is here to be looked at again
        "delta_k": delta.get("value"),
        "u_delta_k": delta.get("u"),
        "basis": item.delta_basis if delta else None,
        "taken": taken.get(item.frame),
    }
