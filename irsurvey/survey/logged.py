"""What the logs of a survey add to a frame: conditions at the moment it was taken, and the time before that."""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Iterable, Iterator, Mapping
from datetime import datetime
from math import isfinite
from typing import NamedTuple

from irsurvey.model import FrameTask
from irsurvey.survey import history
from irsurvey.survey.context import Context
from irsurvey.survey.history import DAY, LONGEST_GAP, Held, Series
from irsurvey.survey.levels import DEPTH, Levels, Stated
from irsurvey.survey.log import RAIN, Log
from irsurvey.survey.units import si

LEAST_DIFFERENCE = 10.0
"""Between indoor and outdoor air, that is to be held [K]: EN 13187 as applied (S)."""
STEADY = (2.0, 0.1)
"""How far the outdoor air may go and still be steady: kelvin, or share of indoors minus outdoors (house rule)."""
_LOOK_BACK = 14 * DAY
"""No requirement asks for longer, and the log of a year would be gone through anew for every frame."""
_OF_THE_DAY = ("indoor_air_c", "outdoor_air_c", "irradiance_w_m2", RAIN)
"""Columns that tell of the time before a frame."""


class Column(NamedTuple):
    """A column of a log, and how deep the level lies that names the log."""

    log: Log
    key: str
    depth: int

    def until(self, moment: float) -> Series:
        """Readings of the time before a moment [s], to the first one at or after it."""
        seconds, values = self.log.series[self.key]
        first, last = bisect_left(seconds, moment - _LOOK_BACK), bisect_left(seconds, moment) + 1
        return seconds[first:last], values[first:last]


def columns(levels: Levels, context: Context) -> dict[str, Column]:
    """Columns by condition, of the lowest level that logs it."""
    found: dict[str, Column] = {}
    for source, table in levels.tables():
        series = context.logs.get(table.conditions.log or "")
        if series is not None:
            found |= {key: Column(series, key, DEPTH[source]) for key in series.series}
    return found


def at(levels: Levels, taken: datetime | None, context: Context) -> dict[str, dict[str, float]]:
    """Logged values at the moment a frame was taken, by source; tells of what could not be taken from a log."""
    logged: dict[str, dict[str, float]] = {}
    for source, table in levels.tables():
        series = context.logs.get(table.conditions.log or "")
        if series is None:
            continue
        if taken is None:
            context.notices.append((levels.id, f"time not stated: {series.name} not used"))
            for key in series.series:
                context.unlogged[levels.id, key] = f"{series.name} is not used, as the frame states no time"
            continue
        logged[source] = series.at(taken)
        unreached: dict[str, list[str]] = {}
        for key in series.series:
            if not series.reaches(key, taken):
                unreached.setdefault(series.span(key), []).append(key)
                where = f"{series.name}, {series.span(key)},"
                context.unlogged[levels.id, key] = f"{where} does not reach to {taken.isoformat()}"
        for span, keys in unreached.items():
            text = f"{series.name} does not reach to this time: {', '.join(keys)} not taken from it, {span}"
            context.notices.append((levels.id, text))
        for key, text, is_lost in _gaps(series, taken):
            context.notices.append((levels.id, text))
            if is_lost:
                context.unlogged[levels.id, key] = text
    return logged


def before(
    found: Mapping[str, Column], taken: datetime | None, conditions: Mapping[str, Stated]
) -> tuple[dict[str, Stated], dict[str, float], list[str]]:
    """Conditions, the time before a frame included; figures by requirement key; notices.

    What is stated counts, unless a log of the same level or a lower one says that it ended sooner.
    """
    conditions, figures, notices = dict(conditions), dict[str, float](), list[str]()
    if "unheated_before" in conditions:
        figures["unheated_before"] = float(conditions["unheated_before"].value)
    if taken is None:
        return conditions, figures, notices
    moment = taken.timestamp()
    series = {key: found[key].until(moment) for key in _OF_THE_DAY if key in found}
    indoor, outdoor = series.get("indoor_air_c"), series.get("outdoor_air_c")
    if outdoor:
        low, high = history.extremes(outdoor, moment - DAY, moment)
        if "outdoor_24h_c" not in conditions and isfinite(low):
            conditions["outdoor_24h_c"] = Stated((low, high), "log", found["outdoor_air_c"].depth)
        figures["outdoor_change_24h_k"] = history.largest_change(outdoor, moment)
    if indoor and outdoor:
        figures["air_difference_24h_min_k"] = history.least_difference(indoor, outdoor, moment)
    for key, held, depth in _held(series, found, moment, conditions):
        hours = held.seconds / history.HOUR
        stated = conditions.get(key)
        if not isfinite(hours):
            continue
        if stated is None:
            if key.startswith("hours_since"):
                conditions[key] = Stated(hours, "log", depth)
            else:
                figures[key] = hours
        elif held.ended and hours < stated.value and depth >= stated.depth and stated.source != "log":
            conditions[key] = Stated(hours, "log", depth)
            notices.append(f"{key} stated as {stated.value:g}, by the log {hours:.1f}: the log counts")
    return conditions, {key: value for key, value in figures.items() if isfinite(value)}, notices


def over_the_survey(
    tasks: Iterable[FrameTask], found: Mapping[str, Mapping[str, Column]]
) -> dict[str, dict[str, float]]:
    """Largest changes of the air temperatures over a survey, by frame and requirement key.

    Between frames whose time is known, and what their logs, `found` by frame, tell of the time between; indoors from
    frame to frame of one group, as rooms differ, outdoors from any to any other.
    """
    buildings = [task for task in tasks if task.kind == "building" and task.taken is not None]
    figures: dict[str, dict[str, float]] = {task.id: {} for task in buildings}
    rooms: dict[str | None, list[FrameTask]] = {}
    for task in buildings:
        rooms.setdefault(task.group, []).append(task)
    for name, ones in (("outdoor", [buildings]), ("indoor", list(rooms.values()))):
        for together in ones:
            change = _change(together, f"{name}_air", [found[task.id].get(f"{name}_air_c") for task in together])
            if change is not None:
                for task in together:
                    figures[task.id][f"{name}_change_survey_k"] = change
    return figures


def _change(tasks: list[FrameTask], name: str, logged: list[Column | None]) -> float | None:
    """Largest difference between two frames; None where not every frame has a temperature of its own."""
    known = [task.scene[name] for task in tasks if name in task.scene]
    is_own = len(tasks) == 1 or all(quantity.source in ("frame", "log") for quantity in known)
    if not known or len(known) < len(tasks) or not is_own:
        return None
    values = [quantity.value for quantity in known]
    moments = [task.taken.timestamp() for task in tasks if task.taken is not None]
    for column in {id(one.log): one for one in logged if one is not None}.values():
        ends = history.extremes(column.log.series[column.key], min(moments), max(moments))
        values += [si("air_c", celsius) for celsius in ends if isfinite(celsius)]
    return max(values) - min(values)


def _held(
    series: Mapping[str, Series], found: Mapping[str, Column], moment: float, conditions: Mapping[str, Stated]
) -> Iterator[tuple[str, Held, int]]:
    """Hours that something has held, by condition, with the depth of the log that says so."""
    indoor, outdoor = series.get("indoor_air_c"), series.get("outdoor_air_c")
    if indoor and outdoor:
        depth = min(found[key].depth for key in ("indoor_air_c", "outdoor_air_c"))
        yield "hours_difference_held", history.difference_held(indoor, outdoor, moment, LEAST_DIFFERENCE), depth
    if outdoor:
        inside, outside = (conditions.get(key) for key in ("indoor_air_c", "outdoor_air_c"))
        difference = abs(inside.value - outside.value) if inside and outside else 0.0
        limit = max(STEADY[0], STEADY[1] * difference)
        yield "hours_steady", history.steady(outdoor, moment, limit), found["outdoor_air_c"].depth
    for key, column, since in (
        ("hours_since_sun", "irradiance_w_m2", history.since_sun),
        ("hours_since_rain", RAIN, history.since_rain),
    ):
        if column in series:
            yield key, since(series[column], moment), found[column].depth


def _gaps(series: Log, taken: datetime) -> Iterator[tuple[str, str, bool]]:
    """Columns with a gap around a moment, or in the day before where that counts; what of it, and whether no value."""
    moment = taken.timestamp()
    for key, (seconds, _) in series.series.items():
        if not series.reaches(key, taken):
            continue
        around = history.longest_gap(seconds, moment, moment)
        earlier = history.longest_gap(seconds, moment - DAY, moment) if key in _OF_THE_DAY else None
        for gap in dict.fromkeys(gap for gap in (around, earlier) if gap is not None):
            is_long, is_around = gap[1] - gap[0] > LONGEST_GAP, gap == around
            lost = f"{key} not taken from it" if is_around else "what was before is not known"
            how = lost if is_long else "straight lines assumed"
            yield key, f"{series.name} has no {key} from {series.between(*gap)}: {how}", is_long and is_around
