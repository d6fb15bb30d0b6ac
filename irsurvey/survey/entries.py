"""Which frames there are: those listed, those of a table, and those that a group's glob finds."""

from __future__ import annotations

import posixpath
import re
from collections import defaultdict
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path, PurePosixPath

from irsurvey.errors import Fault, SurveyError
from irsurvey.survey import places
from irsurvey.survey.schema import Document, Frame, Group

_ID = re.compile(r"[A-Za-z0-9._-]{1,64}")
_RESERVED = {"con", "prn", "aux", "nul", *(f"{port}{n}" for port in ("com", "lpt") for n in range(1, 10))}
"""Names that some file systems keep for devices, with any ending: an output folder cannot be called so."""


@dataclass(frozen=True, slots=True)
class Entry:
    """One frame to come: its id, its file as written, and the group it names or whose glob finds it."""

    id: str
    file: str
    frame: Frame
    group: str | None


def entries(document: Document, folder: Path, faults: list[Fault], *, ahead: bool) -> list[Entry]:
    """All frames: listed ones in their order, then those found by globs, group by group, sorted; adds to `faults`.

    A listed frame whose file a glob finds, or that names no file but the id of one that it finds, is not a second
    one; it belongs to that group unless it names another.  `ahead`, before any frame was taken, a glob may find
    nothing, and a group without frames, or a survey without groups, is given one to stand for those to come.
    """
    found = list(_found(document.group, folder, [] if ahead else faults))
    groups_of: dict[str, str] = {}
    for group, file in found:
        groups_of.setdefault(posixpath.normpath(file), group)
    by_stem = {PurePosixPath(file).stem: (group, file) for group, file in reversed(found)}
    listed = []
    for number, frame in enumerate(document.frame, 1):
        name = frame_name(frame, number)
        if frame.file is not None:
            try:
                file = places.inside(folder, frame.file, f"frame[{name}].file")
            except SurveyError as error:
                faults += error.faults
                continue
        elif frame.id in by_stem:
            file = by_stem[frame.id][1]
        else:
            faults.append(Fault(f"frame[{name}].file", "the frame's raw file", "nothing", 'write file = "…"'))
            continue
        listed.append(Entry(name, file, frame, frame.group or groups_of.get(posixpath.normpath(file))))
    taken = {posixpath.normpath(entry.file) for entry in listed}
    globbed = [Entry(PurePosixPath(name).stem, name, Frame(), group) for group, name in found if name not in taken]
    result = [*listed, *globbed]
    if ahead:
        occupied = {entry.group for entry in result}
        to_come = [group.id for group in document.group if group.id not in occupied]
        result += [Entry(group, f"{group} (to come)", Frame(), group) for group in to_come]
        result = result or [Entry("frame", "to come", Frame(), None)]
    faults += _id_faults(result)
    return result


def frame_name(frame: Frame, number: int) -> str:
    """What faults call a listed frame: its id, its file's name without ending, or its number."""
    return frame.id or (PurePosixPath(frame.file.replace("\\", "/")).stem if frame.file else "") or f"#{number}"


def _found(groups: Iterable[Group], folder: Path, faults: list[Fault]) -> Iterable[tuple[str, str]]:
    for group in groups:
        if group.frames is None:
            continue
        try:
            for file in places.matches(folder, group.frames, f"group[{group.id}].frames"):
                yield group.id, file
        except SurveyError as error:
            faults += error.faults


def _id_faults(result: list[Entry]) -> Iterable[Fault]:
    rename = 'give it an id: [[frame]] with id = "…" and file = "…"'
    files = defaultdict(list)
    for entry in result:
        files[entry.id.casefold()].append(entry.file)
        where = f"frame[{entry.id}].id"
        if not _ID.fullmatch(entry.id):
            yield Fault(where, "letters A-Z a-z, digits, . _ - and at most 64 of them", repr(entry.id), rename)
        elif entry.id.endswith(".") or entry.id.split(".")[0].lower() in _RESERVED:
            yield Fault(where, "a name that every system allows for a folder", repr(entry.id), rename)
    for entry in {entry.id.casefold(): entry for entry in reversed(result)}.values():
        same = files[entry.id.casefold()]
        if len(same) > 1:
            where, got = f"frame[{entry.id}].id", f"{len(same)} with this one: {', '.join(same[:3])}"
            yield Fault(where, "an id that no other frame has, capitals aside", got, rename)
