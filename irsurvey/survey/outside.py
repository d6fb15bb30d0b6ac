"""Whether what is drawn lies in the frame: known only once its file is read."""

from __future__ import annotations

from collections.abc import Iterator

from irsurvey.errors import Fault
from irsurvey.model import FrameTask, KnownLength, Polygon


def polygon_faults(task: FrameTask, shape: tuple[int, int]) -> tuple[Fault, ...]:
    """A fault for each thing drawn on a frame of (rows, columns) that has a corner outside it.

    Pixel centres are at integers, so a frame reaches from −0.5 to its size − 0.5.
    """
    rows, columns = shape
    faults = []
    for where, corners in _drawn(task):
        out = [(x, y) for x, y in corners if not (-0.5 <= x <= columns - 0.5 and -0.5 <= y <= rows - 0.5)]
        if out:
            expected = f"corners from −0.5 to {columns - 0.5} across and to {rows - 0.5} down"
            got = ", ".join(f"({x:g}, {y:g})" for x, y in out[:3])
            remedy = f"the frame has {columns} columns and {rows} rows"
            faults.append(Fault(f"frame[{task.id}].{where}", expected, got, remedy))
    return tuple(faults)


def is_drawn_on(task: FrameTask) -> bool:
    """Whether anything is drawn on a frame at all."""
    return next(_drawn(task), None) is not None


def areas(task: FrameTask) -> Iterator[tuple[str, Polygon]]:
    """Every area drawn on a frame, with its key."""
    for where, polygon in (("reference", task.reference), ("inspect", task.inspect)):
        if polygon is not None:
            yield f"{where}.polygon", polygon
    for surface in task.surfaces:
        yield f"surface[{surface.name}].polygon", surface.polygon
    for component in task.components:
        yield f"component[{component.name}].polygon", component.polygon
    if task.window_frames is not None:  # frames of one camera are of one size
        yield "window_from.polygon", task.window_frames.polygon


def _drawn(task: FrameTask) -> Iterator[tuple[str, Polygon]]:
    yield from areas(task)
    for strip in task.strips:
        yield f"strip[{strip.name}]", (strip.start, strip.end)
    if isinstance(task.known_scale, KnownLength):
        yield "known_length", (task.known_scale.start, task.known_scale.end)
    elif task.known_scale is not None:
        yield "known_rectangle.corners", task.known_scale.corners
