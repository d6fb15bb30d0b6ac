"""Earlier values of components, from the history file: what trends are made of."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from datetime import datetime, time, tzinfo
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from irsurvey.errors import Fault, SurveyError
from irsurvey.model import Earlier, FrameTask
from irsurvey.survey import places
from irsurvey.survey.faults import nearest, shown
from irsurvey.survey.schema import Document
from irsurvey.survey.schema_electrical import EarlierRow
from irsurvey.survey.table import Sheet, sheet
from irsurvey.survey.times import instant, zone_named

DATE = "date"
_KEYS = (DATE, *EarlierRow.model_fields)
_TEXTS = ("asset", "component")
_DIFFERENCES = ("delta_ambient_k", "delta_similar_k")


def earlier(
    document: Document,
    folder: Path,
    tasks: Sequence[FrameTask],
    faults: list[Fault],
    notices: list[tuple[str, str]],
    *,
    ahead: bool = False,
) -> tuple[Earlier, ...]:
    """Earlier values, the oldest first; adds to `faults` and `notices` (frame, text).

    `ahead`: before going out, when a file that is not there yet is a notice.
    """
    where = "history" if document.history is not None else "survey.history"
    written = document.history or document.survey.history
    if written is None:
        return ()
    try:
        table = sheet(folder / places.inside(folder, written, where), where)
        rows = _rows(table, _zone(document), notices)
    except SurveyError as error:
        if ahead:
            notices += [("", f"{fault.where}: {fault.got}, not used") for fault in error.faults]
        else:
            faults += error.faults
        return ()
    notices += [("", f"{where}: {text}") for text in _unmatched(rows, tasks)]
    return rows


def _zone(document: Document) -> tzinfo:
    try:
        return zone_named(document.survey.timezone)
    except SurveyError:  # which is told where frames are resolved
        return zone_named(None)


def _rows(table: Sheet, zone: tzinfo, notices: list[tuple[str, str]]) -> tuple[Earlier, ...]:
    missing = [name for name in (DATE, "component") if name not in table.columns]
    if missing or not any(name in table.columns for name in _DIFFERENCES):
        expected = f"columns {DATE}, component and {' or '.join(_DIFFERENCES)}"
        unknown = [column for column in table.columns if column not in _KEYS]
        remedy = "; ".join(f"{column}: {nearest(column, _KEYS)}" for column in unknown[:3])
        raise SurveyError(Fault(table.where, expected, ", ".join(table.columns), remedy))
    faults: dict[tuple[str, str], list[Fault]] = {}
    found: dict[int, Earlier] = {}
    empty = 0
    for line, cells in table.rows:
        one, wrong = _row(line, cells, table, zone)
        for fault in wrong:
            faults.setdefault((fault.where.rpartition(", line")[0], fault.expected), []).append(fault)
        if one is not None:
            found[line] = one
        elif not wrong:
            empty += 1
    twice = Counter((one.when, one.asset, one.component) for one in found.values())
    for line, one in found.items():
        if twice[one.when, one.asset, one.component] > 1:
            expected, got = "each component once at a time", f"{one.component} again"
            fault = Fault(f"{table.where}, line {line}", expected, got, "drop one, or add the time to the date")
            faults.setdefault((table.where, expected), []).append(fault)
    if faults:
        raise SurveyError(*(_first(kind) for kind in faults.values()))
    for column in (column for column in table.columns if column not in _KEYS):
        notices.append(("", f"{table.where}: column {column} not used; {nearest(column, _KEYS)}"))
    if empty:
        rows = "1 row" if empty == 1 else f"{empty} rows"
        notices.append(("", f"{table.where}: {rows} without a difference passed over"))
    return tuple(sorted(found.values(), key=lambda one: (one.when, one.asset, one.component)))


def _first(faults: list[Fault]) -> Fault:
    """The first fault of one kind, which tells how many more there are."""
    one, more = faults[0], len(faults) - 1
    return Fault(one.where, one.expected, f"{one.got} and {more} more", one.remedy) if more else one


def _row(line: int, cells: dict[str, str], table: Sheet, zone: tzinfo) -> tuple[Earlier | None, list[Fault]]:
    """One earlier value; None where it is at fault or holds no difference."""
    faults: list[Fault] = []
    values: dict[str, Any] = {
        key: cell if key in _TEXTS else table.value(cell) for key, cell in cells.items() if key in _KEYS and key != DATE
    }
    when = None
    try:
        when = _moment(cells.get(DATE, ""), zone, f"{table.where}.{DATE}, line {line}")
    except SurveyError as error:
        faults += error.faults
    try:
        row = EarlierRow.model_validate(values)
    except ValidationError as error:
        for detail in error.errors():
            key = str(detail["loc"][0])
            expected = detail["msg"].removeprefix("Input should be ")
            expected = "a name" if detail["type"] == "missing" else f"a value, {expected}"
            faults.append(Fault(f"{table.where}.{key}, line {line}", expected, shown(values.get(key))))
        return None, faults
    if when is None or (row.delta_ambient_k is None and row.delta_similar_k is None):
        return None, faults
    found = Earlier(
        when, row.asset, row.component, row.delta_ambient_k, row.delta_similar_k, row.load_a, row.rated_a, row.u_k
    )
    return found, faults


def _moment(cell: str, zone: tzinfo, where: str) -> datetime:
    """A date, of which noon stands for the day, or a date and time.  Raises SurveyError."""
    try:
        moment = datetime.fromisoformat(cell)
        if not 1900 <= moment.year < 2200:
            raise ValueError
    except ValueError:
        expected = "a date such as 2025-03-11"
        raise SurveyError(Fault(where, expected, shown(cell or None), "write ISO 8601")) from None
    is_day = moment.time() == time() and len(cell) <= len("2025-03-11")
    return instant(moment.replace(hour=12) if is_day else moment, zone, where)


def _unmatched(rows: Sequence[Earlier], tasks: Sequence[FrameTask]) -> Iterator[str]:
    """Earlier values that belong to nothing drawn now; where parts are looked for, their names are not known yet."""
    drawn = {(task.asset or "", component.name) for task in tasks for component in task.components}
    searched = {task.asset or "" for task in tasks if task.find_components}
    lost = dict.fromkeys((one.asset, one.component) for one in rows)
    names = [
        f"{component} of {asset}" if asset else component
        for asset, component in lost
        if (asset, component) not in drawn and asset not in searched
    ]
    if names:
        more = f" and {len(names) - 4} more" if len(names) > 4 else ""
        yield f"no component drawn now is {', '.join(names[:4])}{more}: no trend"
