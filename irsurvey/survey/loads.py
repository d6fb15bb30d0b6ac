"""Loads that a logger wrote down: at the moment a frame was taken, and for how long they had been steady by then."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass
from datetime import datetime, tzinfo
from math import isfinite
from pathlib import Path

import numpy as np

from irsurvey.errors import Fault, SurveyError
from irsurvey.survey import history, log, places
from irsurvey.survey.log import Log
from irsurvey.survey.logged import Column
from irsurvey.survey.schema import Document
from irsurvey.survey.schema_electrical import Circuit

STEADY = 0.10
"""How far a load may go from what it was at the frame, relative to that, and still be steady (house rule)."""
LONGEST_GAP = history.HOUR
"""Between readings: loads are switched, and a straight line over more tells nothing (house rule)."""
_COLUMN = "load_a"


@dataclass(frozen=True, slots=True)
class Load:
    """What a log tells of a load [A] and how long it had been steady [s]; None where it does not."""

    amperes: float | None = None
    steady: float | None = None
    notice: str = ""


def logs(document: Document, folder: Path, zone: tzinfo, faults: list[Fault]) -> dict[str, Log | None]:
    """Load logs by circuit; None for one that is at fault.  Adds to `faults`."""
    found: dict[str, Log | None] = {}
    for circuit in document.circuit:
        if circuit.log is None:
            continue
        where, found[circuit.id] = f"circuit[{circuit.id}].log", None
        try:
            found[circuit.id] = log.read_loads(folder / places.inside(folder, circuit.log, where), zone, where)
        except SurveyError as error:
            faults += error.faults
    return found


def phases(circuit: Circuit, series: Log | None) -> Collection[str] | None:
    """Phases whose load is stated or logged; None where any phase has one, or none has."""
    columns = () if series is None else tuple(series.series)
    if _COLUMN in columns or isinstance(circuit.load_a, float) or not (columns or circuit.load_a is not None):
        return None
    stated = circuit.load_a if isinstance(circuit.load_a, dict) else {}
    return [*stated, *(name.removeprefix(f"{_COLUMN}_") for name in columns)]


def load_at(circuit: str, series: Log, phase: str | None, taken: datetime | None) -> Load:
    """What the log of a circuit tells of the load of a phase at the moment a frame was taken."""
    column = next((name for name in (f"{_COLUMN}_{phase}", _COLUMN) if name in series.series), None)
    if column is None:
        return Load()
    if taken is None:
        return Load(notice=f"time not stated: {series.name} not used")
    of, moment = f"{column} of circuit {circuit}", taken.timestamp()
    if not series.reaches(column, taken):
        span = series.span(column)
        return Load(notice=f"{series.name} does not reach to this time: {of} not taken from it, {span}")
    near = Column(series, column, 0).until(moment)
    gap = history.longest_gap(near[0], moment, moment)
    if gap is not None and gap[1] - gap[0] > LONGEST_GAP:
        return Load(notice=f"{series.name} has no {column} from {series.between(*gap)}: {of} not taken from it")
    amperes = float(np.interp(moment, *near))
    steady = history.steady(near, moment, STEADY * amperes, LONGEST_GAP).seconds
    return Load(amperes, steady if isfinite(steady) else None)


def by_circuit(document: Document) -> Mapping[str, Circuit]:
    """Circuits by id."""
    return {circuit.id: circuit for circuit in document.circuit}
