"""A first survey file for a folder of frames: what they show, guesses marked as guesses, gaps left open."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from irsurvey import files
from irsurvey.errors import Fault, OutputError, UsageError
from irsurvey.readers import READERS
from irsurvey.start.look import look
from irsurvey.start.meaning import meanings
from irsurvey.start.scaling import known_point
from irsurvey.start.text import survey_lines


@dataclass(frozen=True, slots=True)
class Started:
    """The file written, the number of frames in it, and what to tell."""

    path: Path
    frames: int
    notices: tuple[str, ...]


def write_start(folder: Path, known: Sequence[str] = ()) -> Started:
    """Write `folder`/survey.toml for the frames in it and in the folders right inside it.

    `known` are points as "x,y=T" or "file:x,y=T" [px, °C].  Raises UsageError where the points do not fit
    the frames or there is no frame at all, OutputError where a survey.toml stands already.
    """
    if not folder.is_dir():
        got = "a file" if folder.is_file() else "none of that name"
        raise UsageError(Fault(str(folder), "a folder of frames", got, "check the name"))
    path = folder / "survey.toml"
    if path.exists():
        remedy = "edit it, or move it away to start again"
        raise OutputError(Fault(str(path), "no survey file yet", "one that is somebody's work", remedy))
    points = tuple(known_point(text) for text in known)
    if len(points) == 1:
        raise UsageError(Fault("--known", "two points or none", "one", "add a second, well apart in temperature"))
    seen, unread = look(folder, points)
    if not seen:
        got = "; ".join(unread) or "no file of these types"
        raise UsageError(Fault(str(folder), f"frames ({', '.join(READERS)})", got, "put the frames here"))
    cameras = meanings(folder, seen, points)
    files.write_text(path, "\n".join(survey_lines(folder, seen, unread, cameras)) + "\n")
    notices = [f"not a frame: {reason}" for reason in unread]
    notices += [f"{name}: {meaning.finding}" for name, meaning in cameras.items()]
    return Started(path, len(seen), tuple(notices))
