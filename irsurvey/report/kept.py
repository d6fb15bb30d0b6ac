"""What documents show beside report.json, kept in the output folder so that they can be made again from it alone."""

from __future__ import annotations

import json
from base64 import b64decode
from collections.abc import Iterable
from dataclasses import dataclass, fields, is_dataclass, replace
from datetime import date
from math import isfinite
from pathlib import Path
from typing import Any

from irsurvey import files
from irsurvey.model import FrameTask
from irsurvey.report import pictures, reading

NAME = "documents.json"
PHOTOGRAPH = "photograph.jpg"
"""The photograph of a frame in its folder, as large as any document needs it and without what a camera wrote in it."""

_FORMAT = 1
_SIDE = 2 * pictures.PHOTOGRAPH_SIDE  # twice what a page shows, for screens and paper that are finer
_REMEDY = "run irsurvey run once more"


@dataclass(frozen=True, slots=True)
class Documents:
    """What the file holds."""

    format: int
    tasks: tuple[FrameTask, ...]


def keep_photograph(task: FrameTask, out: Path) -> None:
    """Write OUT/frames/<id>/photograph.jpg where the frame has a photograph that can be read; else there is none."""
    path = out / "frames" / task.id / PHOTOGRAPH
    photo = pictures.photograph(task, _SIDE)
    if photo is None:
        path.unlink(missing_ok=True)
    else:
        files.write_bytes(path, b64decode(photo.uri.partition(",")[2]))


def keep(tasks: Iterable[FrameTask], out: Path) -> tuple[FrameTask, ...]:
    """Write OUT/documents.json, and return the tasks as `kept` gives them back: nothing in them leads out of OUT."""
    held = Documents(_FORMAT, tuple(map(_inside, tasks)))
    text = json.dumps(_plain(held), ensure_ascii=False, allow_nan=False, separators=(",", ":"))
    files.write_bytes(out / NAME, text.encode("utf-8", "replace"))
    return tuple(_with_photograph(task, out) for task in held.tasks)


def kept(out: Path) -> tuple[FrameTask, ...]:
    """The tasks of a run from its output folder.  Raises OutputError where they are not there."""
    held = reading.record(Documents, reading.contents(out / NAME, _REMEDY), NAME, _REMEDY)
    return tuple(_with_photograph(task, out) for task in held.tasks)


def _inside(task: FrameTask) -> FrameTask:
    """A task without the places of its files on this machine."""
    pair, window = task.pair, task.window_frames
    return replace(
        task,
        path="",
        photo_path=None,
        pair=pair and replace(pair, partner=_inside(pair.partner)),
        window_frames=window and replace(window, without=_inside(window.without), through=_inside(window.through)),
    )


def _with_photograph(task: FrameTask, out: Path) -> FrameTask:
    path = out / "frames" / task.id / PHOTOGRAPH
    return replace(task, photo_path=str(path)) if path.is_file() else task


def _plain(value: Any) -> Any:
    """A record for JSON with every digit of its numbers; infinities and NaN, which JSON has not, as words."""
    if is_dataclass(value):
        return {field.name.removesuffix("_"): _plain(getattr(value, field.name)) for field in fields(value)}
    if isinstance(value, tuple):
        return [_plain(entry) for entry in value]
    if isinstance(value, date):
        return value.isoformat()
    return str(value) if isinstance(value, float) and not isfinite(value) else value
