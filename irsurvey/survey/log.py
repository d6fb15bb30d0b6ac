"""A logger's time series, read at the moment a frame was taken: interpolated, never extrapolated nor over long gaps."""

from __future__ import annotations

import math
import re
from bisect import bisect_left
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import UTC, datetime, tzinfo
from pathlib import Path
from typing import TypeGuard

from pydantic import ValidationError

from irsurvey.errors import Fault, SurveyError
from irsurvey.survey.faults import nearest, shown
from irsurvey.survey.fields import NotNegative, Table, key
from irsurvey.survey.history import LONGEST_GAP, Series
from irsurvey.survey.schema import Conditions
from irsurvey.survey.table import Sheet, sheet
from irsurvey.survey.times import instant

TIME = "time"
"""Column of times: ISO 8601, local time in the survey's time zone where without an offset."""
RAIN = "rain_mm"


class _Row(Conditions):
    """What a reading may hold."""

    rain_mm: NotNegative | None = key("Rain since the reading before [mm]")


class _Load(Table):
    """What a reading of a load may hold."""

    load_a: NotNegative | None = key("Current [A]")


_CONSTANT = {
    "reflected_from",
    "outdoor_24h_c",
    "tilt_deg",
    "humidity_class",
    "sky_model",
    "hours_difference_held",
    "hours_steady",
    "hours_furniture_clear",
    "unheated_before",
    "convection",
    "surface_height_m",
    "log",
}
COLUMNS = tuple(name for name in _Row.model_fields if name not in _CONSTANT)
"""Conditions that change with time, each one number, and rain."""


@dataclass(frozen=True, slots=True)
class Log:
    """Values by condition as (seconds since the epoch, values), rising in time; columns that were not understood."""

    name: str
    series: Mapping[str, Series]
    ignored: tuple[str, ...]
    zone: tzinfo = UTC  # of local times

    def at(self, moment: datetime) -> dict[str, float]:
        """Conditions at an instant, linearly between their two neighbours; without those that were not logged then."""
        second = moment.timestamp()
        values = {key: _between(second, *series) for key, series in self.series.items() if key != RAIN}
        return {key: value for key, value in values.items() if value is not None}

    def reaches(self, key: str, moment: datetime) -> bool:
        """Whether a column has readings before and after an instant, or at it."""
        seconds, _ = self.series[key]
        return seconds[0] <= moment.timestamp() <= seconds[-1]

    def span(self, key: str) -> str:
        """From when to when a column has readings, in words."""
        seconds, _ = self.series[key]
        return self.between(seconds[0], seconds[-1])

    def between(self, start: float, end: float) -> str:
        """Two instants [s] in words, as local times."""
        one, other = (datetime.fromtimestamp(second, self.zone).isoformat() for second in (start, end))
        return f"{one} to {other}"


def read(path: Path, zone: tzinfo, where: str) -> Log:
    """The log in a CSV file with a column `time` and columns named as conditions.  Raises SurveyError."""
    table = sheet(path, where)
    known = {column: (_Row, column) for column in table.columns if column in COLUMNS}
    if TIME not in table.columns or not known:
        expected = f"a column {TIME} and columns named as conditions"
        if TIME not in table.columns:
            remedy = f"name the column of times {TIME}"
        else:
            near = {column: nearest(column, COLUMNS) for column in table.columns if column != TIME}
            remedy = "; ".join(f"{column}: {remedy}" for column, remedy in list(near.items())[:3])
        raise SurveyError(Fault(table.where, expected, ", ".join(table.columns), remedy))
    return _log(path, table, known, zone)


def read_loads(path: Path, zone: tzinfo, where: str) -> Log:
    """The log in a CSV file with a column `time` and columns load_a or load_a_<phase>.  Raises SurveyError."""
    table = sheet(path, where)
    known = {column: (_Load, "load_a") for column in table.columns if re.fullmatch("load_a(_.+)?", column)}
    if TIME not in table.columns or not known:
        expected, got = f"columns {TIME} and load_a, or load_a_1 for phase 1", ", ".join(table.columns)
        raise SurveyError(Fault(table.where, expected, got, "name the columns so"))
    return _log(path, table, known, zone)


def _log(path: Path, table: Sheet, known: Mapping[str, tuple[type[Table], str]], zone: tzinfo) -> Log:
    """The log of the `known` columns, each by the table and key that say what it may hold.  Raises SurveyError."""
    times, faults = _times(table, zone)
    series = {}
    for column, kind in known.items():
        values = {line: table.value(cells[column]) for line, cells in table.rows if column in cells}
        faults += _value_faults(values, f"{table.where}.{column}", *kind)
        pairs = sorted((times[line], float(value)) for line, value in values.items() if line in times and _is(value))
        if pairs:
            series[column] = (tuple(time for time, _ in pairs), tuple(value for _, value in pairs))
    if faults:
        raise SurveyError(*faults)
    return Log(path.name, series, tuple(c for c in table.columns if c not in (*known, TIME)), zone)


def _times(table: Sheet, zone: tzinfo) -> tuple[dict[int, float], list[Fault]]:
    """Instants [s] by line."""
    times: dict[int, float] = {}
    faults: list[Fault] = []
    for line, cells in table.rows:
        where = f"{table.where}, line {line}"
        try:
            moment = datetime.fromisoformat(cells.get(TIME, ""))
            if not 1900 <= moment.year < 2200:
                raise ValueError
            times[line] = instant(moment, zone, where).timestamp()
        except ValueError:
            expected = "a time such as 2026-01-18T07:10:00"
            faults.append(Fault(where, expected, shown(cells.get(TIME)), "write ISO 8601"))
        except SurveyError as error:
            faults += error.faults
    twice = {time for time, count in Counter(times.values()).items() if count > 1}
    faults += [
        Fault(f"{table.where}, line {line}", "each time once", table_time, "drop the row that does not hold")
        for line, time in times.items()
        if time in twice and (table_time := dict(table.rows)[line][TIME])
    ]
    return times, faults


def _value_faults(values: Mapping[int, object], where: str, table: type[Table], key: str) -> Iterator[Fault]:
    """Cells that are no numbers, and numbers that cannot be this condition: each kind once, with its line."""
    numbers = {line: float(value) for line, value in values.items() if _is(value)}
    wrong = [line for line in values if line not in numbers]
    if wrong:
        more = f" and {len(wrong) - 1} more" if len(wrong) > 1 else ""
        got = f"{shown(values[wrong[0]])}{more}"
        yield Fault(f"{where}, line {wrong[0]}", "a number", got, "leave the cell empty where nothing was logged")
    for line in {pick(numbers, key=numbers.__getitem__): None for pick in (min, max) if numbers}:
        try:
            table.model_validate({key: numbers[line]})
        except ValidationError as error:
            expected = error.errors()[0]["msg"].removeprefix("Input should be ")
            yield Fault(f"{where}, line {line}", f"a value {expected}", shown(numbers[line]))


def _is(value: object) -> TypeGuard[float]:
    return isinstance(value, int | float) and not isinstance(value, bool) and math.isfinite(value)


def _between(second: float, seconds: Sequence[float], values: Sequence[float]) -> float | None:
    after = bisect_left(seconds, second)
    if after < len(seconds) and seconds[after] == second:
        return values[after]
    if after in (0, len(seconds)):
        return None
    before = after - 1
    if seconds[after] - seconds[before] > LONGEST_GAP:
        return None
    share = (second - seconds[before]) / (seconds[after] - seconds[before])
    return values[before] + share * (values[after] - values[before])
