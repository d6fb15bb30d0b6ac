"""The infrared window in front of a frame: as stated, or measured by two frames of one reference."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from irsurvey.errors import Fault
from irsurvey.model import FrameTask, WindowFrames
from irsurvey.survey.levels import Levels
from irsurvey.survey.marks import points
from irsurvey.survey.schema_electrical import Window, WindowFrom


@dataclass(frozen=True, slots=True)
class Seen:
    """What a frame is seen through: the window, the level that states it, and what measures it, if anything."""

    window: Window
    source: str
    measured: WindowFrom | None
    where: str  # key path of what measures it


def window_of(levels: Levels, faults: list[Fault], notices: list[tuple[str, str]]) -> Seen | None:
    """The window of a frame; None where there is none.  Adds to `faults` and `notices`.

    A transmittance that a lower level states drops the two frames of the level above.  The frame without the window
    has none, whatever its group says.
    """
    stated, measuring = levels.choice("window"), levels.choice("window_from")
    if measuring is not None and measuring.source == "group" and measuring.value.without == levels.id:
        measuring, stated = None, None if stated is None or stated.source == "group" else stated
    window = Window() if stated is None else stated.value
    if measuring is not None and window.transmittance is not None:
        if stated is not None and stated.depth > measuring.depth:
            measuring = None
        else:
            by = f"{measuring.value.without} and {measuring.value.through}"
            notices.append((levels.id, f"window.transmittance stated beside window_from: what {by} measure counts"))
    chosen = stated or measuring
    if chosen is None:
        return None
    if measuring is not None:
        return Seen(window, chosen.source, measuring.value, levels.where(measuring.source, "window_from"))
    if window.transmittance is None:
        where = levels.where(chosen.source, "window.transmittance")
        remedy = "state it, or name two frames that measure it under window_from"
        faults.append(Fault(where, "a value, as it is required", "nothing", remedy))
    return Seen(window, chosen.source, None, "")


def with_window_frames(tasks: list[FrameTask], seen: Mapping[str, Seen | None], faults: list[Fault]) -> list[FrameTask]:
    """The tasks, with the whole tasks of the frames that measure their windows; adds to `faults`."""
    by_id = {task.id: task for task in tasks}
    result = []
    for task in tasks:
        one = seen.get(task.id)
        measured = None if one is None else one.measured
        if one is None or measured is None or not {measured.without, measured.through} <= by_id.keys():
            result.append(task)  # an unknown frame is a fault of references
            continue
        without, through = by_id[measured.without], by_id[measured.through]
        for key, other in (("without", without), ("through", through)):
            if other.camera.name != task.camera.name:
                expected = f"a frame of the same camera, {task.camera.name}"
                faults.append(Fault(f"{one.where}.{key}", expected, f"{other.id}, of {other.camera.name}"))
        if without.has_window:
            remedy = "a group's window_from exempts it from the group's window; or list it outside that group"
            faults.append(Fault(f"{one.where}.without", "a frame without a window", f"{without.id}, with one", remedy))
        result.append(replace(task, window_frames=WindowFrames(without, through, points(measured.polygon))))
    return result
