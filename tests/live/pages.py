"""Pages to open in a browser: one with the script alone, one with sheets of a real run."""

from __future__ import annotations

import json
import re
import shutil
from base64 import b64encode
from pathlib import Path

from irsurvey.model import FrameTask, Report
from irsurvey.radiometry.planck import Band
from irsurvey.report import live
from irsurvey.report.live.tables import equations as tables_of
from irsurvey.report.style import asked

REPORT_CSS = Path(live.__file__).parents[1] / "templates" / "report.css"
_BLOCK = re.compile(r"^(?=\[\[(?:frame|asset)\]\])", re.MULTILINE)
_ID = re.compile(r'^id = "([^"]+)"', re.MULTILINE)


def policy() -> str:
    """What the page may do: pictures from itself, its own style, one script, nothing from elsewhere."""
    return f"default-src 'none'; img-src data:; style-src 'unsafe-inline'; script-src {live.script_hash()}"


def document(body: str, script: str) -> str:
    """A page under the policy, with the report's own style."""
    return (
        '<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">'
        f'<meta http-equiv="Content-Security-Policy" content="{policy()}">'
        '<meta name="viewport" content="width=device-width, initial-scale=1"><title>Frames</title>'
        f"<style>{REPORT_CSS.read_text('utf-8')}\n{live.style()}</style></head>"
        f"<body><main>{body}</main><script>{script}</script></body></html>"
    )


def equations(bands: tuple[Band, ...]) -> str:
    """A page with the equations and the tables of these bands, no frame."""
    data = json.dumps(tables_of(bands))
    return document(f'<script type="application/json" id="live-tables">{data}</script>', live.script())


def sheets(report: Report, tasks: tuple[FrameTask, ...], out: Path, *, script: str | None = None) -> str:
    """A page with the picture and the data of every frame of a run."""
    by_id = {task.id: task for task in tasks}
    body = [f'<script type="application/json" id="live-tables">{live.page_data(report, tasks)}</script>']
    for frame in report.frames:
        data = live.frame_data(frame, by_id.get(frame.id), out, style=asked(report))
        if data is None:
            continue
        picture = b64encode((out / "frames" / frame.id / "annotated.png").read_bytes()).decode()
        body.append(
            f'<article class="card sheet" data-frame="{frame.id}"><h2>{frame.id}</h2><div class="evidence"><figure>'
            f'<img id="picture-{frame.id}" src="data:image/png;base64,{picture}" alt="Thermal picture of {frame.id}">'
            f"<figcaption>Surface temperature in °C.</figcaption></figure><div></div></div>"
            f'<script type="application/json" class="live-data">{data}</script></article>'
        )
    return document("".join(body), live.script() if script is None else script)


def reduced(survey: Path, folder: Path, frames: tuple[str, ...], *changes: tuple[str, str]) -> Path:
    """A copy of a survey with these frames alone, and pieces of its file replaced: each must stand in it."""
    shutil.copytree(survey.parent, folder, ignore=shutil.ignore_patterns("truth"))
    blocks = _BLOCK.split(survey.read_text("utf-8"))
    kept = [block for block in blocks if not block.startswith("[[frame]]") or _name(block) in frames]
    assert len([block for block in kept if block.startswith("[[frame]]")]) == len(frames)
    text = "".join(kept)
    for old, new in changes:
        assert old in text, old
        text = text.replace(old, new)
    path = folder / survey.name
    path.write_text(text, encoding="utf-8")
    return path


def _name(block: str) -> str:
    found = _ID.search(block)
    return found[1] if found else ""
