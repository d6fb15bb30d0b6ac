"""report.json: the records written out field by field, read back, and described by a JSON Schema."""

from __future__ import annotations

import json
import re
from dataclasses import fields, is_dataclass
from math import isfinite
from numbers import Integral, Real
from pathlib import Path
from typing import Any

from irsurvey import files
from irsurvey.model import Estimate, FrameTask, Report
from irsurvey.report.numbers import unit

SIGNIFICANT_DIGITS = 7
"""Enough for a temperature to 0.1 mK, and what a single-precision map carries."""

_FLAT_LIST = re.compile(r"\[\n[^\[\]{}\"]*\]")
"""A list of plain numbers over several lines; no string can hold one, its line ends are escaped."""
_LIST_OF_FLAT_LISTS = re.compile(r"\[\n(?:\s*\[[^\[\]{}\"\n]*\],?)+\s*\]")

_WORDS = {
    "status": ["analysed", "failed"],
    "kind": ["building", "electrical"],
    "claim": ["quantitative", "qualitative", "not valid"],
    "how": ["polygon", "automatic"],
    "sense": ["hot", "cold"],
    "verdict": ["met", "not met", "not recorded"],
}


def plain(record: Any) -> dict[str, Any]:
    """A record as a dict ready for JSON, keys in field order, a trailing underscore of a name dropped.

    Numbers keep 7 significant digits; NaN and infinities become None, and so does an estimate without a
    finite value.  The survey inside a report stays as it was read."""
    written = {field.name.removesuffix("_"): _plain(getattr(record, field.name)) for field in fields(record)}
    if isinstance(record, Report):
        written["survey"] = _finite(record.survey)
    return written


def text(record: Any) -> str:
    """A record as JSON text, one key a line, lists of numbers on one line; the same record gives the same text."""
    return _compact(json.dumps(plain(record), ensure_ascii=False, allow_nan=False, indent=1)) + "\n"


def write(report: Report, _tasks: tuple[FrameTask, ...], out: Path) -> Path:
    """Write OUT/report.json, whole or not at all, and return its path."""
    path = out / "report.json"
    files.write_bytes(path, text(report).encode("utf-8", "replace"))  # half a surrogate pair has no UTF-8
    return path


def read(path: Path) -> dict[str, Any]:
    """The contents of a report.json."""
    contents: dict[str, Any] = json.loads(path.read_bytes())
    return contents


def report_schema() -> dict[str, Any]:
    """JSON Schema (draft 2020-12) of report.json, made from the records themselves."""
    from pydantic import TypeAdapter

    schema = TypeAdapter(Report).json_schema(mode="serialization")
    for record in (schema, *schema["$defs"].values()):
        record["properties"] = {
            key.removesuffix("_"): _described(key, value) for key, value in record["properties"].items()
        }
        record["required"] = [key for key in record["properties"] if key != "interval_95"]
        record["additionalProperties"] = False
    return {"$schema": "https://json-schema.org/draft/2020-12/schema", **schema}


def _plain(value: Any) -> Any:
    if isinstance(value, Estimate) and not isfinite(value.value):
        return None
    if isinstance(value, Estimate) and value.interval_95 is None:
        return {"value": _plain(value.value), "u": _plain(value.u)}
    if is_dataclass(value):
        return plain(value)
    if isinstance(value, dict):
        return {key: _plain(entry) for key, entry in value.items()}
    if isinstance(value, tuple | list):
        return [_plain(entry) for entry in value]
    if isinstance(value, bool | str | None):
        return value
    if isinstance(value, Integral):
        return int(value)
    if isinstance(value, Real):
        return float(f"{value:.{SIGNIFICANT_DIGITS}g}") + 0.0 if isfinite(value) else None  # + 0.0: no minus zero
    raise TypeError(f"no JSON for {type(value).__name__}")


def _finite(value: Any) -> Any:
    """What was read from the survey file, unrounded; TOML knows NaN and infinity, JSON does not."""
    if isinstance(value, dict):
        return {key: _finite(entry) for key, entry in value.items()}
    if isinstance(value, list):
        return [_finite(entry) for entry in value]
    return None if isinstance(value, float) and not isfinite(value) else value


def _compact(indented: str) -> str:
    def on_one_line(match: re.Match[str]) -> str:
        return re.sub(r"\s+", " ", match[0]).replace("[ ", "[").replace(" ]", "]")

    return _LIST_OF_FLAT_LISTS.sub(on_one_line, _FLAT_LIST.sub(on_one_line, indented))


def _described(key: str, schema: dict[str, Any]) -> dict[str, Any]:
    """The schema of one key with its unit, its words and, for numbers by name, the null that stands for NaN."""
    schema = {name: value for name, value in schema.items() if name not in ("title", "default")}
    if schema.get("additionalProperties") == {"type": "number"}:
        schema["additionalProperties"] = {"type": ["number", "null"]}
    if key in _WORDS:
        schema["enum"] = _WORDS[key]
    if key == "urgency":
        schema["description"] = "0 none, 1 investigate, 2 repair as time permits, 3 watch closely, 4 at once"
    if symbol := unit(key):
        schema["description"] = f"in {symbol}"
    return schema
