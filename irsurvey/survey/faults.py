"""What pydantic found wrong, as faults with key paths that a person can follow; all of them in one pass."""

from __future__ import annotations

import json
import re
from collections.abc import Iterable, Iterator, Mapping
from copy import deepcopy
from difflib import get_close_matches
from pathlib import PurePosixPath
from typing import Any, get_args, get_origin

from pydantic import ValidationError
from pydantic.fields import FieldInfo
from pydantic_core import ErrorDetails

from irsurvey.errors import Fault
from irsurvey.survey.fields import LARGEST, Table
from irsurvey.survey.schema import Document

Place = tuple[str | int, ...]
"""Keys and list positions from the top of the file down to one value."""

_EXPECTED = {
    "float_type": "a number",
    "finite_number": "a finite number",
    "int_type": "a whole number",
    "string_type": "text in quotes",
    "string_too_short": "text that is not empty",
    "date_type": "a date such as 2026-01-18, without quotes",
    "datetime_type": "a date and time such as 2026-01-18T07:12:00, without quotes",
    "list_type": "a list",
    "tuple_type": "a list",
    "dict_type": "a table",
    "model_type": "a table",
}
_BOUNDS = ("gt", "ge", "le")
_INSTEAD = {"transmittance": "window_from"}
"""Key that may be missing → the one that stands for it."""
_KNOWN_KEY = "a known key"
_TAG = re.compile(r"<[a-z-]+>")
_GONE = object()


def validated(content: Mapping[str, Any]) -> tuple[Document, list[Fault]]:
    """The survey file as a model, and all its faults.

    Where there are faults, the model holds what is left when everything at fault is cut out, so that references
    and levels can still be checked; faults that only the cutting caused are not reported.
    """
    content, faults = deepcopy(dict(content)), list[Fault]()
    while True:
        try:
            return Document.model_validate(content), faults
        except ValidationError as error:
            details = error.errors(include_url=False)
        faults += [_fault(detail, content) for detail in details if not _is_consequence(detail, content, faults)]
        content = _cut(content, [_culprit(detail, content) for detail in details])


def follows_from(fault: Fault, earlier: Iterable[Fault]) -> bool:
    """Whether something is missing, or a name unknown, only because of a fault found earlier."""
    name = fault.where.split(".")[-1]
    return _lies_over(fault.where, earlier) or any(
        fault.got.startswith("nothing")
        and (other.where.split(".")[-1] == name or f".{_INSTEAD.get(name)}" in other.where)
        for other in earlier
    )


def nearest(word: str, known: Iterable[str]) -> str:
    """Remedy that names the known word nearest to a wrong one; empty where none is known."""
    words = list(known)
    close = get_close_matches(word, words, n=1, cutoff=0.5) or get_close_matches(word.lower(), words, n=1, cutoff=0.0)
    return f"did you mean {close[0]}?" if close else ""


def home_of(place: Place) -> str:
    """The table within this one, else the one at the top, that knows a key which may not stand at its place; or none.

    Keys of `uncertainty` are passed over: they look like those of conditions, and are mistaken for them."""
    word, here = str(place[-1]), tables_at(place[:-1])
    tables: list[type[Table]] = [*here, Document]
    for field_name, field in ((name, field) for table in tables for name, field in table.model_fields.items()):
        if field_name != "uncertainty" and any(word in keys_of(inner) for inner in _direct(field)):
            return field_name
    return ""


def key_path(place: Place, content: object) -> str:
    """A place as people read it: `frame[F01].surface[cover plate].emissivity`; list items by id, name or number."""
    text = ""
    for step in place:
        if isinstance(step, int):
            content = content[step] if isinstance(content, list | tuple) and step < len(content) else None
            text += f"[{_item_name(content) or f'#{step + 1}'}]"
        else:
            content = content.get(step) if isinstance(content, dict) else None
            name = step or '""'
            text += f".{name}" if text else name
    return text


def tables_at(place: Iterable[str | int]) -> list[type[Table]]:
    """The kinds of table that may stand at a place."""
    tables: list[type[Table]] = [Document]
    for step in place:
        fields = [field for table in tables if (field := _field(table, step))]
        tables = [found for field in fields for found in _tables_in(field.annotation)] if fields else tables
    return tables


def field_at(place: Place) -> FieldInfo | None:
    """The key at a place; list positions do not matter."""
    names = [step for step in place if isinstance(step, str)]
    found = (_field(table, names[-1]) for table in tables_at(names[:-1])) if names else iter(())
    return next(filter(None, found), None)


def keys_of(table: type[Table]) -> list[str]:
    """The keys of a table as they are written in the file."""
    return [field.alias or name for name, field in table.model_fields.items()]


def shown(value: object) -> str:
    """A value in a message: short, on one line."""
    if value is None:
        return "nothing"
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list | tuple) and len(value) > 4:
        return f"a list of {len(value)}"
    try:
        text = json.dumps(value, ensure_ascii=False, default=str)
    except ValueError:  # a whole number too long to be written out
        return "a number far too large"
    return text if len(text) <= 60 else f"{text[:57]}…"


def _item_name(item: object) -> str | None:
    if not isinstance(item, dict):
        return None
    for name in ("id", "name"):
        if isinstance(item.get(name), str) and item[name]:
            return str(item[name])
    return PurePosixPath(item["file"]).stem if isinstance(item.get("file"), str) else None


def _is_consequence(detail: ErrorDetails, content: Mapping[str, Any], earlier: list[Fault]) -> bool:
    """Whether a detail is there only because what was at fault earlier was cut out."""
    if detail["type"] != "survey":
        return _lies_over(key_path(_place(detail), content), earlier)
    ctx, table = detail["ctx"], _table(detail)
    names = [name for name in (ctx["key"], *ctx["of"]) if name]
    return any(_lies_over(key_path((*table, name), content), earlier) for name in names)


def _lies_over(where: str, earlier: Iterable[Fault]) -> bool:
    """Whether a fault, other than that of an unknown key, was found at a key path or below it."""
    return any(
        other.where == where or other.where.startswith((f"{where}.", f"{where}["))
        for other in earlier
        if other.expected != _KNOWN_KEY
    )


def _table(detail: ErrorDetails) -> Place:
    """Where a detail points in the file, without the tags of unions."""
    steps = detail["loc"]
    own = steps[-1:] if detail["type"] == "extra_forbidden" else ()  # an unknown key may look like a tag
    tagged = steps[: len(steps) - len(own)]
    return (*(step for step in tagged if isinstance(step, int) or not _TAG.fullmatch(step)), *own)


def _place(detail: ErrorDetails) -> Place:
    """The key at fault: that of a union by its quantity, that which a table's own check names, or where it points."""
    place = _table(detail)
    if detail["type"].startswith("union_tag"):
        return (*place, "quantity")
    own = detail["ctx"]["key"] if detail["type"] == "survey" else ""
    return (*place, own) if own else place


def _culprit(detail: ErrorDetails, content: Mapping[str, Any]) -> Place:
    """What to cut out: the value at fault, or the table that misses something."""
    place = _place(detail)
    while place and not _holds(content, place):
        place = place[:-1]
    while place and isinstance(place[-1], int) and not _lists_tables(place):
        place = place[:-1]  # a list of numbers makes no sense without one of them
    return place


def _holds(content: Any, place: Place) -> bool:
    try:
        for step in place:
            content = content[step]
    except (KeyError, IndexError, TypeError):
        return False
    return True


def _lists_tables(place: Place) -> bool:
    field = field_at(place)
    return field is not None and bool(_tables_in(field.annotation))


def _cut(content: Mapping[str, Any], places: list[Place]) -> dict[str, Any]:
    for place in places:
        inside: Any = content
        if place == ("survey",) and isinstance(content["survey"], dict):
            continue  # it misses its title, which is filled in below
        try:
            for step in place[:-1]:
                inside = inside[step]
            inside[place[-1]] = _GONE
        except (IndexError, KeyError, TypeError):
            continue  # already cut out with what held it
    left: dict[str, Any] = _without_gone(content)
    about = left.get("survey")
    left["survey"] = {"title": "-", **about} if isinstance(about, dict) else {"title": "-"}
    return left


def _without_gone(value: Any) -> Any:
    if isinstance(value, dict):
        return {key: _without_gone(inner) for key, inner in value.items() if inner is not _GONE}
    if isinstance(value, list):
        return [_without_gone(inner) for inner in value if inner is not _GONE]
    return value


def _fault(detail: ErrorDetails, content: Mapping[str, Any]) -> Fault:
    place, kind, ctx = _place(detail), detail["type"], detail.get("ctx", {})
    where, got = key_path(place, content), shown(detail["input"])
    if kind == "survey":
        return Fault(where, ctx["expected"], ctx["got"], ctx["remedy"])
    if kind == "extra_forbidden":
        known = [name for table in tables_at(place[:-1]) for name in keys_of(table)]
        home = home_of(place)
        remedy = f"it belongs under {home}" if home else nearest(str(place[-1]), known)
        return Fault(where, _KNOWN_KEY, f"the unknown key {place[-1]}", remedy)
    if kind == "missing":
        field = field_at(place)
        return Fault(where, "a value, as it is required", "nothing", _meaning(field))
    if kind in ("literal_error", "union_tag_invalid"):
        # pydantic lists what it expected as 'a', 'b' or '<a>', '<b>', by the tags of a union
        words = re.findall(r"'<?([^'>]*)>?'", ctx.get("expected") or ctx["expected_tags"])
        given = detail["input"] if kind == "literal_error" else _quantity(detail["input"])
        got = shown(given)
        expected = " or ".join(map(shown, words)) or ctx["expected"]
        return Fault(where, expected, got, nearest(str(given), words) if given else "")
    field = field_at(place)
    expected = _EXPECTED.get(kind) or (_limits(field, detail) if field else "") or detail["msg"]
    return Fault(where, expected, _count(detail) or got, _meaning(field))


def _quantity(signal: object) -> object:
    return signal.get("quantity") if isinstance(signal, dict) else signal


def _meaning(field: FieldInfo | None) -> str:
    description = field.description if field else None
    return (description or "").split(";")[0]


def _count(detail: ErrorDetails) -> str:
    ctx = detail.get("ctx", {})
    return f"{ctx['actual_length']}" if isinstance(ctx.get("actual_length"), int) else ""


def _limits(field: FieldInfo, detail: ErrorDetails) -> str:
    """The limits a number or a list is held to, in words."""
    ctx = detail.get("ctx", {})
    if detail["type"] == "too_short":
        return f"at least {ctx['min_length']} items"
    if detail["type"] == "too_long":
        return f"at most {ctx['max_length']} items"
    bounds = {name: getattr(limit, name) for limit in _metadata(field) for name in _BOUNDS if hasattr(limit, name)}
    low = f"above {bounds['gt']:g}" if "gt" in bounds else f"of at least {bounds['ge']:g}" if "ge" in bounds else ""
    high = f"at most {bounds['le']:g}" if bounds.get("le", LARGEST) < LARGEST else ""
    return f"a number {' and '.join(filter(None, (low, high)))}" if low or high else ""


def _metadata(field: FieldInfo) -> Iterator[object]:
    yield from field.metadata
    pending = [field.annotation]
    while pending:
        annotation = pending.pop(0)
        for item in getattr(annotation, "__metadata__", ()):
            yield from item.metadata if isinstance(item, FieldInfo) else (item,)
        pending += get_args(annotation)


def _field(table: type[Table], name: str | int) -> FieldInfo | None:
    return next((field for key, field in table.model_fields.items() if name == (field.alias or key)), None)


def _direct(field: FieldInfo) -> list[type[Table]]:
    """The table that a key holds, if it holds just one."""
    return [] if get_origin(field.annotation) in (list, dict) else _tables_in(field.annotation)


def _tables_in(annotation: Any) -> list[type[Table]]:
    if isinstance(annotation, type) and issubclass(annotation, Table):
        return [annotation]
    return [found for part in get_args(annotation) for found in _tables_in(part)]
