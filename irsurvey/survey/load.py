"""A survey file read, checked and resolved: one pass, all faults."""

from __future__ import annotations

import json
import re
import tomllib
from collections.abc import Collection, Mapping
from pathlib import Path
from typing import Any

from irsurvey.errors import Fault, SurveyError
from irsurvey.model import Asset, Survey
from irsurvey.survey import places, table
from irsurvey.survey.correlations import unknown_inputs
from irsurvey.survey.earlier import earlier
from irsurvey.survey.elements import elements
from irsurvey.survey.faults import follows_from, validated
from irsurvey.survey.known import Known
from irsurvey.survey.notices import notices
from irsurvey.survey.outside import polygon_faults
from irsurvey.survey.resolve import resolved
from irsurvey.survey.schema import Document
from irsurvey.survey.season import seasons

__all__ = ["Known", "load", "polygon_faults", "schema"]

_FREE_TEXT = (
    "surveyor",
    "qualification",
    "client",
    "site",
    "construction",
    "limitations",
    "standard",
    "test_description",
    "supplementary",
    "influences",
    "signed_by",
    "notes",
)


def load(path: Path, *, known: Known, ahead: bool = False) -> Survey:
    """The survey in a TOML file, resolved frame by frame, in SI units.

    `ahead`: read before going out, when frames, tables and logs need not be there; one frame then stands for each
    group without any.  Raises `SurveyError` with every fault that can be found without reading a frame.
    """
    try:
        content = _content(path)
        return _survey(content, path.parent.resolve(), known, ahead=ahead)
    except RecursionError as error:
        fault = Fault(path.name, "tables a few levels deep", "tables nested without end", "see irsurvey schema survey")
        raise SurveyError(fault) from error


def schema() -> dict[str, Any]:
    """JSON Schema of the survey file.  A default of null means absent."""
    described = Document.model_json_schema()
    found = _plain(described)
    return {"$schema": "https://json-schema.org/draft/2020-12/schema", **found}


def _content(path: Path) -> dict[str, Any]:
    try:
        data = path.read_bytes()
    except OSError as error:
        remedy = "name the survey file, such as survey.toml; irsurvey start writes one"
        raise SurveyError(
            Fault(path.name or str(path), "a survey file", error.strerror or str(error), remedy)
        ) from error
    try:
        return tomllib.loads(data.decode("utf-8-sig"))
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        fault = Fault(f"{path.name}, line {line}", "text in UTF-8", "another encoding", "save the file as UTF-8")
        raise SurveyError(fault) from error
    except ValueError as error:
        message = re.sub(r" \(at (line \d+, column \d+|end of document)\)$", "", str(error))
        found = re.search(r"line \d+", str(error))
        where = found[0] if found else f"line {data.count(bytes([10])) + 1}"
        raise SurveyError(Fault(f"{path.name}, {where}", "TOML", message, "text stands in quotes")) from error


def _survey(content: Mapping[str, Any], folder: Path, known: Known, *, ahead: bool) -> Survey:
    rows, faults = _table_rows(content, folder)
    if ahead and not rows:
        faults = []
    listed = content.get("frame", [])
    whole = {**content, "frame": [*listed, *rows]} if rows and isinstance(listed, list) else dict(content)
    document, wrong = validated(whole)
    faults += wrong
    tasks, unresolved, noted = resolved(document, folder, known, _names(whole), ahead=ahead)
    costs = seasons(document, folder, known, unresolved, noted, ahead=ahead)
    history = earlier(document, folder, tasks, unresolved, noted, ahead=ahead)
    faults += [fault for fault in unresolved if not follows_from(fault, faults)]
    if not tasks and not faults:
        faults = [Fault("frame", "at least one frame", "nothing", "list [[frame]] or give a [[group]] a glob")]
    faults += unknown_inputs(document, tasks, with_areas=not faults)  # those of an area at fault may be missing
    if faults:
        raise SurveyError(*dict.fromkeys(faults))
    about = document.survey
    return Survey(
        title=about.title,
        folder=str(folder),
        tasks=tuple(tasks),
        date=about.date,
        timezone=about.timezone,
        about=tuple((name, text) for name in _FREE_TEXT if (text := getattr(about, name))),
        assets=tuple(Asset(**dict(asset)) for asset in document.asset),
        elements=tuple(elements(document, known).values()),
        seasons=costs,
        history=history,
        as_read=json.dumps(content, ensure_ascii=False, default=lambda moment: moment.isoformat()),
        notices=notices(document, tasks, noted),
    )


def _table_rows(content: Mapping[str, Any], folder: Path) -> tuple[list[dict[str, Any]], list[Fault]]:
    """Frames of the tables that the file names, on top or in [survey]."""
    rows: list[dict[str, Any]] = []
    faults: list[Fault] = []
    for where, holder in (("frame_table", content), ("survey.frame_table", content.get("survey"))):
        written = holder.get("frame_table") if isinstance(holder, dict) else None
        if not isinstance(written, str) or not written:
            continue
        try:
            found, wrong = table.frames(folder / places.inside(folder, written, where), where)
        except SurveyError as error:
            faults += error.faults
        else:
            rows += found
            faults += wrong
    return rows, faults


def _names(content: Mapping[str, Any]) -> dict[str, Collection[str]]:
    """Names of groups, cameras, circuits, assets, elements and frames as written, right or wrong."""
    names: dict[str, Collection[str]] = {
        kind: {item["id"] for item in _items(content.get(kind)) if isinstance(item.get("id"), str)}
        for kind in ("group", "circuit", "asset", "element", "frame")
    }
    cameras = content.get("cameras")
    single = {"camera"} if "camera" in content else set()
    return {**names, "camera": {*single, *cameras} if isinstance(cameras, dict) else single}


def _items(value: object) -> list[dict[str, Any]]:
    return [item for item in value if isinstance(item, dict)] if isinstance(value, list) else []


def _plain(described: Any) -> Any:
    """Without what TOML cannot say: no null beside a type, and tables that are absent are empty."""
    if isinstance(described, list):
        return [_plain(item) for item in described]
    if not isinstance(described, dict):
        return described
    plain = {key: _plain(value) for key, value in described.items() if key != "title" or not isinstance(value, str)}
    alternatives = [item for item in plain.get("anyOf", []) if item != {"type": "null"}]
    if len(alternatives) == 1 and len(plain["anyOf"]) == 2:
        plain = {**alternatives[0], **{key: value for key, value in plain.items() if key != "anyOf"}}
    if "$ref" in plain and isinstance(plain.get("default"), dict):
        plain["default"] = {}
    return plain
