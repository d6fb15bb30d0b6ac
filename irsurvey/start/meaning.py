"""One camera for each kind of file in a folder, and what the numbers of its files seem to mean."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from irsurvey.errors import Fault, UsageError
from irsurvey.readers import READERS, read
from irsurvey.start.look import Seen, rounding
from irsurvey.start.scaling import Known, Scaling, is_ordinary, ordinary, scalings


@dataclass(frozen=True, slots=True)
class Meaning:
    """What the numbers of some files mean, in words how that was found; `scaling` None: nobody can tell."""

    frames: tuple[Seen, ...]
    scaling: Scaling | None
    finding: str


def meanings(folder: Path, seen: Sequence[Seen], points: Sequence[Known]) -> dict[str, Meaning]:
    """Camera name → meaning of its files' numbers, fitted where there are known points.  Raises UsageError."""
    told = [(_frame_of(point, seen), point) for point in points]
    groups: dict[tuple[object, ...], list[Seen]] = {}
    for frame in seen:
        is_told = any(frame == other for other, _ in told)
        groups.setdefault((*_encoding(frame), "told" if is_told else ordinary(frame.middle)), []).append(frame)
    fits: dict[tuple[object, ...], tuple[Scaling, str]] = {}
    for kind in [kind for kind in groups if kind[-1] == "told"]:
        mine = [(frame, point) for frame, point in told if frame in groups[kind]]
        stored = [(_stored_at(folder, frame, point), point.celsius, point.half) for frame, point in mine]
        fits[kind] = _fitted(stored, groups[kind][0].dtype)
        for other in [other for other in groups if other[:-1] == kind[:-1] and other != kind]:
            if not other[-1] or all(is_ordinary(fits[kind][0].celsius(frame.middle)) for frame in groups[other]):
                groups[kind] += groups.pop(other)
    found: dict[str, Meaning] = {}
    for kind, frames in groups.items():
        name = f"{Path(frames[0].file).suffix.lower().removeprefix('.')}-{frames[0].dtype}"
        name = f"{name}-{len(found) + 1}" if name in found else name
        found[name] = Meaning(tuple(frames), *(fits.get(kind) or _guessed(frames[0])))
    return found


def _encoding(frame: Seen) -> tuple[object, ...]:
    """Files that differ in this cannot mean the same by their numbers."""
    return READERS[Path(frame.file).suffix.lower()], frame.dtype


def _fitted(points: Sequence[tuple[float, float, float]], dtype: str) -> tuple[Scaling, str]:
    """The scaling that (stored, temperature, half-width) points tell, and how surely."""
    if len({stored for stored, _, _ in points}) < 2:
        got = f"{len(points)} with {points[0][0]:g}"
        remedy = "choose pixels well apart in temperature"
        raise UsageError(Fault("--known", "two points with different numbers in files of one kind", got, remedy))
    found = scalings(points, rounding(dtype))
    if not found:
        scale, offset = np.polyfit([stored for stored, _, _ in points], [celsius for _, celsius, _ in points], 1)
        line = Scaling("C", float(f"{scale:.6g}"), float(f"{offset:.6g}"))
        return line, f"guess: {line}, a line through the known points; no plain scale fits: counts, or a wrong point?"
    others = f"; so do {', '.join(map(str, found[1:]))}: add a point further off" if found[1:] else ""
    return found[0], f"{found[0]} fits the known points{others}"


def _guessed(frame: Seen) -> tuple[Scaling | None, str]:
    """The scaling that makes ordinary temperatures of a frame and its like, and that it is a guess."""
    found = ordinary(frame.middle)
    if not found:
        return None, "no common scale makes ordinary temperatures of these numbers: two --known points would tell"
    others = f", or {', '.join(map(str, found[1:]))}" if found[1:] else ""
    return found[0], f"guess: {found[0]}{others}, as it gives ordinary temperatures; two --known points would tell"


def _frame_of(point: Known, seen: Sequence[Seen]) -> Seen:
    named = [frame for frame in seen if point.file in (None, frame.file, Path(frame.file).name)]
    if not named:
        listed = ", ".join(frame.file for frame in seen[:5])
        raise UsageError(Fault("--known", f"a frame of the folder ({listed} …)", f"{point.file}", "write it as listed"))
    return named[0]


def _stored_at(folder: Path, frame: Seen, point: Known) -> float:
    where, (rows, columns) = f"--known {point.x},{point.y}", frame.shape
    if point.x >= columns or point.y >= rows:
        size = f"x below {columns} and y below {rows} in {frame.file}"
        raise UsageError(Fault(where, size, f"{point.x},{point.y}", "x counts from the left, y from the top"))
    number = float(read(folder / frame.file, frame.options).stored[point.y, point.x])
    if not np.isfinite(number):
        raise UsageError(Fault(where, "a pixel with a number", "one without data", "choose another pixel"))
    return number
