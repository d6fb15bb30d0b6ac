"""Records read back from the JSON that was written of them: the inverse of `irsurvey.report.json`."""

from __future__ import annotations

import json
from collections.abc import Iterable
from dataclasses import MISSING, fields, is_dataclass
from datetime import date, datetime
from functools import cache
from math import inf, nan
from pathlib import Path
from types import NoneType, UnionType
from typing import Any, TypeVar, Union, get_args, get_origin, get_type_hints

from irsurvey.errors import Fault, OutputError
from irsurvey.model import Report

_NOT_FINITE = {"inf": inf, "-inf": -inf, "nan": nan}
"""What stands for a number that JSON has none for, where a file keeps them."""
_AGAIN = "run irsurvey run once more"
_KINDS: dict[object, str] = {float: "a number", int: "a whole number", str: "text", bool: "true or false"}

T = TypeVar("T")


def read_report(path: Path) -> Report:
    """The records of a report.json.  Raises OutputError where it is none."""
    return record(Report, contents(path, _AGAIN), path.name, _AGAIN)


def contents(path: Path, remedy: str) -> Any:
    """What a JSON file of this program holds.  Raises OutputError where there is none, or what is there is not JSON."""
    try:
        return parsed(path.read_bytes())
    except OSError as error:
        raise OutputError(Fault(path.name, "a file of a run", error.strerror or str(error), remedy)) from error
    except (ValueError, RecursionError) as error:
        raise OutputError(Fault(path.name, "JSON that a run wrote", f"what is no JSON ({error})", remedy)) from error


def parsed(data: bytes) -> Any:
    """The value of a JSON text in UTF-8; raises ValueError also for NaN, infinities and a key that stands twice."""
    return json.loads(data.decode("utf-8-sig"), parse_constant=_refused, object_pairs_hook=_once)


def record(kind: type[T], data: Any, where: str, remedy: str) -> T:
    """A record from what was written of it: null is NaN where a number must be, a key that is missing has its default.

    Raises OutputError, naming the place below `where`, for what cannot be such a record."""

    def value(expected: Any, found: Any, at: str) -> Any:
        origin, parts = get_origin(expected), get_args(expected)
        if origin in (Union, UnionType):
            return alternative(parts, found, at)
        if is_dataclass(expected):
            return made(expected, found, at)
        if origin is tuple and isinstance(found, list):
            kinds = [parts[0]] * len(found) if parts[1:] == (...,) else list(parts)
            if len(kinds) == len(found):
                return tuple(
                    value(one, entry, f"{at}[{n}]") for n, (one, entry) in enumerate(zip(kinds, found, strict=True))
                )
        elif origin is dict and isinstance(found, dict):
            return {key: value(parts[1], entry, f"{at}.{key}") for key, entry in found.items()}
        elif expected is float and found is None:
            return nan
        elif expected is float and isinstance(found, str) and found in _NOT_FINITE:
            return _NOT_FINITE[found]
        elif expected in (date, datetime) and isinstance(found, str):
            return moment(expected, found, at)
        elif expected is object or type(found) is expected or (expected is float and type(found) is int):
            return found
        raise wrong(at, _KINDS.get(expected) or ("a list" if origin is tuple else "a table"), found)

    def alternative(kinds: tuple[Any, ...], found: Any, at: str) -> Any:
        """The kind that null, or else the keys of a record, show it to be."""
        if found is None and NoneType in kinds:
            return None
        given = [kind for kind in kinds if kind is not NoneType]
        if isinstance(found, dict):
            given = [kind for kind in given if found.keys() <= _keys(kind)] or given[:1]
        return value(given[0], found, at)

    def made(expected: Any, found: Any, at: str) -> Any:
        if not isinstance(found, dict):
            raise wrong(at, "a table", found)
        hints = _hints(expected)
        given = {}
        for field in fields(expected):
            key = field.name.removesuffix("_")
            if key in found:
                given[field.name] = value(hints[field.name], found[key], f"{at}.{key}")
            elif field.default is MISSING and field.default_factory is MISSING:
                raise wrong(f"{at}.{key}", "a value", None)
        return expected(**given)

    def moment(expected: type[date], found: str, at: str) -> date:
        try:
            return expected.fromisoformat(found)
        except ValueError as error:
            raise wrong(at, "a date", found) from error

    def wrong(at: str, expected: str, found: Any) -> OutputError:
        return OutputError(Fault(at, expected, told(found), remedy))

    done: T = value(kind, data, where)
    return done


def told(value: object) -> str:
    """What was found, for a message: short, on one line."""
    if value is None:
        return "nothing"
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list):
        return "a list"
    text = json.dumps(value, ensure_ascii=False)
    return text if len(text) <= 60 else f"{text[:57]}…"


@cache
def _hints(kind: type) -> dict[str, Any]:
    return get_type_hints(kind)


@cache
def _keys(kind: Any) -> frozenset[str]:
    """The keys of a record; none of what is none."""
    return frozenset(field.name.removesuffix("_") for field in fields(kind)) if is_dataclass(kind) else frozenset()


def _refused(constant: str) -> None:
    raise ValueError(f"{constant} is no number of JSON")


def _once(pairs: Iterable[tuple[str, Any]]) -> dict[str, Any]:
    found: dict[str, Any] = {}
    for key, value in pairs:
        if key in found:
            raise ValueError(f"the key {told(key)} stands twice")
        found[key] = value
    return found
