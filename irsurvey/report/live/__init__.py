"""What makes report.html alive: the data of each frame in the page, and the scripts that read it there."""

from __future__ import annotations

import base64
import hashlib
import json
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import Any

from irsurvey.model import FrameReport, FrameTask, Report
from irsurvey.numbers import SI, Style
from irsurvey.report.live.payload import payload
from irsurvey.report.live.tables import tables

_SCRIPTS = (
    *("physics.js", "frame.js", "shapes.js", "assumptions.js"),  # numbers
    *("page.js", "scale.js", "painter.js", "drawings.js", "panel.js", "live.js"),  # what is seen of them
    "tables.js",  # the tables of all results
)
_MARKUP = str.maketrans({mark: f"\\u{ord(mark):04x}" for mark in "<>&\u2028\u2029"})


def page_data(report: Report, tasks: tuple[FrameTask, ...]) -> str:
    """What all frames of a report share, as JSON to stand in `<script type="application/json" id="live-tables">`."""
    return _json(tables(report, tasks))


def frame_data(frame: FrameReport, task: FrameTask | None, out: Path, *, style: Style = SI) -> str | None:
    """The data of one frame, as JSON to stand in `<script type="application/json" class="live-data">` in its sheet.

    `style`: how its assumptions are written.  None where there is nothing to read: a frame that failed, or whose
    temperature.tif is missing from `out`.
    """
    data = payload(frame, task, out, style=style) if task is not None else None
    return None if data is None else _json(data)


@cache
def script() -> str:
    """The whole script of the page, to stand in one `<script>` unchanged; `script_hash` is of this text."""
    return "\n".join(_asset(name) for name in _SCRIPTS)


@cache
def script_hash() -> str:
    """What the page's policy allows to run: 'sha256-…' for the `script-src` of its Content-Security-Policy."""
    digest = hashlib.sha256(script().encode("utf-8")).digest()
    return f"'sha256-{base64.b64encode(digest).decode()}'"


@cache
def style() -> str:
    """The style rules of what the script adds to a sheet, to stand behind those of the page."""
    return _asset("live.css")


def _asset(name: str) -> str:
    return files("irsurvey.report.live").joinpath(name).read_text(encoding="utf-8")


def _json(data: dict[str, Any]) -> str:
    """Compact JSON, always the same for the same data, in which no text can end the script element it stands in."""
    text = json.dumps(data, ensure_ascii=False, allow_nan=False, separators=(",", ":"))
    return text.translate(_MARKUP)
