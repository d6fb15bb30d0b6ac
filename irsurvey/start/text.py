"""The lines of a first survey.toml: known, guessed and open, each so marked."""

from __future__ import annotations

import json
import re
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path

from irsurvey.start.look import Seen
from irsurvey.start.meaning import Meaning

_CONTROLS = re.compile(r"[\x00-\x1f\x7f]")  # which TOML forbids in a comment
_NO_FOLDER = re.compile(r"(con|prn|aux|nul|com\d|lpt\d)?(\..*)?|.*\.", re.IGNORECASE)
"""What some system does not take as the name of a folder, which an id becomes."""
PHOTOS = (".jpg", ".jpeg", ".JPG", ".JPEG")


def survey_lines(
    folder: Path, seen: Sequence[Seen], unread: Sequence[str], cameras: Mapping[str, Meaning]
) -> Iterator[str]:
    """The whole file, line by line; with the lines marked "fill in" completed it is ready to run."""
    yield f"# Written by irsurvey start from {'1 frame' if len(seen) == 1 else f'{len(seen)} frames'}."
    yield '# fill in: no frame tells this.  Take away "# fill in: " and write the value.'
    yield "# guess: may be wrong, check it.  optional: take away the mark where you know the value."
    yield "format = 1"
    yield from ("", "[survey]")
    yield _line("title", _text(folder.resolve().name), "guess: the folder's name")
    yield _line("kind", '"building"', 'guess: or "electrical", which has no viewed_from')
    yield _line("# fill in: viewed_from", "", '"inside" or "outside": decides which way heat flows')
    yield _line("# optional: date", "", "as 2026-01-18")
    yield _line("# optional: timezone", "", 'as "Europe/Vienna"')
    for name, meaning in cameras.items():
        yield from _camera(f"cameras.{name}" if len(cameras) > 1 else "camera", meaning)
    yield from ("", "[conditions]")
    yield _line("# fill in: air_c", "", "air between camera and surface, °C")
    yield _line("# fill in: reflected_c", "", "reflected apparent temperature, °C; rarely that of the air")
    yield _line("# fill in: distance_m", "", "from camera to surface, m")
    yield _line("# optional: relative_humidity_percent", "")
    yield _line("# optional: indoor_air_c", "", "with outdoor_air_c: needed for statements on insulation")
    yield _line("# optional: outdoor_air_c", "")
    yield from ("", "[target]")
    yield _line("emissivity", "0.95", "guess: plaster, brick, paint; see irsurvey materials.  Never bare metal")
    for group in dict.fromkeys(Path(frame.file).parts[0] for frame in seen if "/" in frame.file):
        yield from ("", "[[group]]", _line("id", _text(_identifier(group)), "guess: one group for each folder"))
    camera_of = {frame: name for name, meaning in cameras.items() for frame in meaning.frames}
    taken: set[str] = set()
    for frame in seen:
        yield from _frame(folder, frame, camera_of[frame] if len(cameras) > 1 else None, taken)
    if unread:
        yield from ("", "# Not frames, or not readable:", *map(_comment, unread))


def _camera(key: str, meaning: Meaning) -> Iterator[str]:
    yield from ("", f"[{key}]")
    yield _line("band_um", "[7.5, 14.0]", "guess: an uncooled long-wave camera; its data sheet tells")
    yield _line("# optional: ifov_mrad", "", "angle that one pixel sees, mrad: needed for areas and spot size")
    yield from ("", f"[{key}.signal]", f"# {meaning.finding}")
    yield _line("quantity", '"apparent-temperature"', "guess: nothing is corrected in the stored numbers")
    if meaning.scaling is None:
        yield _line("# fill in: unit", "", '"C", "K" or "F": temperature = scale * stored + offset')
        yield _line("# fill in: scale", "")
        yield _line("# optional: offset", "")
        return
    yield _line("unit", _text(meaning.scaling.unit))
    if meaning.scaling.scale != 1:
        yield _line("scale", repr(meaning.scaling.scale))
    if meaning.scaling.offset:
        yield _line("offset", repr(meaning.scaling.offset))


def _frame(folder: Path, frame: Seen, camera: str | None, taken: set[str]) -> Iterator[str]:
    """One frame; with an id only where the file's stem cannot be one, or is taken."""
    path, (rows, columns), options = Path(frame.file), frame.shape, frame.options
    yield from ("", "[[frame]]")
    size = f"{columns} wide, {rows} high, {frame.dtype}, {frame.low:g} to {frame.high:g}"
    yield _line("file", _text(frame.file), size)
    identifier = _identifier(path.stem)
    while identifier.casefold() in taken:
        identifier = f"{identifier[:56]}-{len(taken)}"
    taken.add(identifier.casefold())
    if identifier != path.stem:
        yield _line("id", _text(identifier))
    if len(path.parts) > 1:
        yield _line("group", _text(_identifier(path.parts[0])))
    if camera:
        yield _line("camera", _text(camera))
    if options.page is not None:
        yield _line("page", f"{options.page}", "guess: the first of several")
    if options.array is not None:
        yield _line("array", _text(options.array), "guess: the first that could be a frame")
    if options.shape and options.dtype and options.byte_order:
        yield _line("shape", f"[{rows}, {columns}]", "guess: of the common sizes, the one that makes a picture")
        yield _line("dtype", _text(options.dtype), "guess")
        yield _line("byte_order", _text(options.byte_order), "guess: the other makes noise")
    photo = next((path.with_suffix(suffix) for suffix in PHOTOS if (folder / path.with_suffix(suffix)).is_file()), None)
    if photo:
        yield _line("photo", _text(photo.as_posix()), "guess: same name")


def _line(key: str, value: str, comment: str = "") -> str:
    line = f"{key} = {value}".rstrip()
    return f"{line:<39} # {comment}" if comment else line


def _comment(text: str) -> str:
    return "# " + _CONTROLS.sub("?", " ".join(text.split()))


def _text(value: str) -> str:
    written = json.dumps(value, ensure_ascii=False)  # a TOML basic string is escaped as a JSON string is, nearly
    return written.replace("\x7f", "\\u007f")


def _identifier(name: str) -> str:
    identifier = re.sub(r"[^A-Za-z0-9._-]+", "-", name)[:64]
    return f"frame-{identifier[:57]}".rstrip("-.") if _NO_FOLDER.fullmatch(identifier) else identifier
