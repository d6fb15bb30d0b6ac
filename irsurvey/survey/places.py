"""Paths in the survey file: relative to its folder, and never out of it."""

from __future__ import annotations

from errno import ELOOP
from pathlib import Path, PurePosixPath, PureWindowsPath

from irsurvey.errors import Fault, SurveyError

OUTPUT_MARKER = "made-by-irsurvey.txt"
"""File in a folder that a run wrote: its pictures are no frames, whatever a glob says."""
_REMEDY = "copy it into the folder of the survey file and name it relative to that"


def inside(folder: Path, written: str, where: str) -> str:
    """A path as written, with forward slashes; it need not exist.

    `folder` is resolved; a path may leave it neither by its text nor through a symbolic link: SurveyError.
    """
    path = PurePosixPath(plain(written))
    if path.is_absolute() or PureWindowsPath(written).anchor or "\0" in written:
        raise SurveyError(Fault(where, "a path relative to the survey file", repr(written), _REMEDY))
    if _climbs_out(path) or not _resolves_inside(folder, path):
        raise SurveyError(Fault(where, "a path inside the survey's folder", repr(written), _REMEDY))
    return str(path)


def plain(written: str) -> str:
    """A path as written, with forward slashes and nothing idle in it."""
    return str(PurePosixPath(written.replace("\\", "/")))


def matches(folder: Path, pattern: str, where: str) -> list[str]:
    """Files that match a glob, sorted, with forward slashes; hidden ones only where the glob names a hidden one.

    Folders that a run wrote are passed over, so that a second run sees what the first one saw.  Raises SurveyError
    where nothing matches, or something outside `folder`.
    """
    path = PurePosixPath(pattern.replace("\\", "/"))
    if path.is_absolute() or PureWindowsPath(pattern).anchor or ".." in path.parts:
        raise SurveyError(Fault(where, "a glob inside the survey's folder", repr(pattern), "write it relative to that"))
    try:
        found = sorted(match.relative_to(folder).as_posix() for match in folder.glob(str(path)) if match.is_file())
    except (ValueError, IndexError, NotImplementedError, OSError) as error:
        raise SurveyError(Fault(where, "a glob such as north/*.tif", repr(pattern), str(error))) from error
    if not any(part.startswith(".") for part in path.parts):
        found = [name for name in found if not any(part.startswith(".") for part in name.split("/"))]
    parents = {parent for name in found for parent in PurePosixPath(name).parents if parent.parts}
    outputs = {parent for parent in parents if (folder / parent / OUTPUT_MARKER).exists()}
    found = [name for name in found if outputs.isdisjoint(PurePosixPath(name).parents)]
    if not found:
        raise SurveyError(
            Fault(where, "a glob that matches files", repr(pattern), "check its spelling; capitals count")
        )
    for name in found:
        if not _resolves_inside(folder, PurePosixPath(name)):
            raise SurveyError(Fault(where, "files inside the survey's folder", f"{name}, a link out of it", _REMEDY))
    return found


def _climbs_out(path: PurePosixPath) -> bool:
    depth = 0
    for part in path.parts:
        depth += -1 if part == ".." else 1
        if depth < 0:
            return True
    return False


def _resolves_inside(folder: Path, path: PurePosixPath) -> bool:
    try:
        (folder / path).stat()
    except OSError as error:
        if error.errno == ELOOP:  # which `resolve` reports in some versions of Python and not in others
            return False
    except ValueError:  # an impossible name
        return False
    try:
        return (folder / path).resolve().is_relative_to(folder)
    except (OSError, RuntimeError, ValueError):
        return False
