"""Heating and cooling seasons of the survey file: degree days as stated, or summed from a year's temperatures."""

from __future__ import annotations

from collections.abc import Iterator
from datetime import UTC, datetime
from pathlib import Path

import numpy as np

from irsurvey.errors import Fault, SurveyError
from irsurvey.model import Season
from irsurvey.survey import log, places
from irsurvey.survey.history import DAY, Series
from irsurvey.survey.known import DegreeDays, Known
from irsurvey.survey.schema import Document
from irsurvey.survey.schema_building import OneSeason
from irsurvey.survey.units import si

WHOLE_YEAR = 300
"""Days from which a file is that of a year: it may miss some of its summer or winter (house rule)."""
LONGEST = 370
"""Days to which it is that of one year and not of two."""
LONGEST_GAP = 2 * DAY
"""Between readings that may well be the means of days."""
_COLUMN = "outdoor_air_c"


def seasons(
    document: Document,
    folder: Path,
    known: Known,
    faults: list[Fault],
    notices: list[tuple[str, str]],
    *,
    ahead: bool = False,
) -> tuple[Season, ...]:
    """Seasons in order, heating first; adds to `faults` and `notices` (frame, text).

    `ahead`: before going out, when a file of temperatures that is not there yet is a notice.
    """
    found = []
    for sense, stated in (("heating", document.season.heating), ("cooling", document.season.cooling)):
        if stated is None:
            continue
        try:
            degree_days, how = _degree_days(stated, sense, folder, known, notices)
        except SurveyError as error:
            if ahead:
                notices += [("", f"{fault.where}: {fault.got}, not used") for fault in error.faults]
            else:
                faults += error.faults
            continue
        if degree_days == 0:
            notices.append(("", f"season.{sense}: no degree days, so that nothing costs anything"))
        found.append(
            Season(
                sense=sense,
                degree_days=degree_days,
                degree_days_u=stated.degree_days_fraction,
                how=how,
                efficiency=stated.efficiency,
                efficiency_u=stated.efficiency_fraction,
                price=stated.price_per_kwh,
                price_u=stated.price_fraction,
                currency=stated.currency,
            )
        )
    return tuple(found)


def _degree_days(
    stated: OneSeason, sense: str, folder: Path, known: Known, notices: list[tuple[str, str]]
) -> tuple[float, str]:
    """Degree days [K d] and where they come from.  Raises SurveyError."""
    base = "" if stated.base_c is None else f", base {stated.base_c:g} °C"
    if stated.temperatures is None or stated.base_c is None:
        return stated.degree_days_kd or 0.0, f"as stated{base}"
    where = f"season.{sense}.temperatures"
    # read as UTC: where a clock was changed, local times are no instants, and an hour more or less changes no sum
    file = log.read(folder / places.inside(folder, stated.temperatures, where), UTC, where)
    if _COLUMN not in file.series:
        raise SurveyError(Fault(where, f"a column {_COLUMN} with readings", ", ".join(file.series) or "nothing"))
    seconds, celsius = file.series[_COLUMN]
    start, end = (datetime.fromtimestamp(second, UTC).date().isoformat() for second in (seconds[0], seconds[-1]))
    days = (seconds[-1] - seconds[0]) / DAY
    how = f"{stated.temperatures}, {start} to {end}, {days:.0f} days{base}"
    if days > LONGEST:
        raise SurveyError(Fault(where, "the temperatures of one year", f"{days:.0f} days, {start} to {end}"))
    if known.degree_days is None:
        raise SurveyError(Fault(where, "degree_days_kd", "temperatures, which cannot be summed here"))
    if days < WHOLE_YEAR:
        how += ", a part of the year"
        notices.append(("", f"{where}: {days:.0f} days, {start} to {end}: degree days of that part of the year only"))
    notices += [("", f"{where}: {text}") for text in _gaps(file, (seconds, celsius))]
    return _summed(known.degree_days, seconds, celsius, stated.base_c, sense), how


def _summed(degree_days: DegreeDays, seconds: object, celsius: object, base_c: float, sense: str) -> float:
    kelvin = np.asarray(celsius, float) + si("base_c", 0.0)
    return float(degree_days(np.asarray(seconds, float), kelvin, si("base_c", base_c), sense))


def _gaps(file: log.Log, series: Series) -> Iterator[str]:
    seconds = np.asarray(series[0], float)
    gaps = np.diff(seconds)
    long = np.flatnonzero(gaps > LONGEST_GAP)
    if long.size:
        widest = int(gaps.argmax())
        between = file.between(float(seconds[widest]), float(seconds[widest + 1]))
        yield f"{gaps[long].sum() / DAY:.1f} days without readings, the longest {between}: straight lines assumed"
