"""How the documents of a survey write: units, decimal mark and days as its file asks, in every word for people."""

from __future__ import annotations

import re
from collections.abc import Mapping
from datetime import date
from functools import partial
from inspect import isfunction, signature
from types import ModuleType, SimpleNamespace
from typing import Any

from irsurvey.model import Report
from irsurvey.numbers import SI, Style

LONG = 140
"""Letters of a free text that the summary and the tables show; the sheet of its frame has it all."""

_DIRECTIVE = re.compile("%[dmYy]")
_TIME = re.compile(r"(\d{4}-\d\d-\d\d)(?:T(\d\d:\d\d)(?::\d\d(?:\.\d+)?)?(.*))?")


def asked(report: Report) -> Style:
    """The style that [survey] asks for, as far as it is one there is."""
    return asked_by(report.survey)


def asked_by(survey: Mapping[str, Any]) -> Style:
    """The same of a survey file as it was read."""
    said = survey.get("survey")
    said = said if isinstance(said, dict) else {}
    written = said.get("date_format")
    return Style(
        units="us" if said.get("display_units") == "us" else SI.units,
        decimal_comma=said.get("decimal_comma") is True,
        date_format=written if isinstance(written, str) and written else SI.date_format,
    )


def spoken(module: ModuleType, style: Style) -> SimpleNamespace:
    """The public names of a module, its functions that take a style bound to this one."""
    return SimpleNamespace(
        **{name: _bound(value, style) for name, value in vars(module).items() if not name.startswith("_")}
    )


def day(when: date, *, style: Style = SI) -> str:
    """A day in figures: "2026-01-18", "18.01.2026"; the language of the machine plays no part."""
    parts = {"%d": f"{when.day:02}", "%m": f"{when.month:02}", "%Y": f"{when.year:04}", "%y": f"{when.year % 100:02}"}
    return _DIRECTIVE.sub(lambda found: parts[found[0]], style.date_format)


def moment(taken: str, *, style: Style = SI) -> str:
    """A day, or a time to the minute: "2026-01-18 07:12 +01:00"; what is neither stays as it is."""
    match = _TIME.fullmatch(taken)
    if not match:
        return taken
    written, *behind = match.groups()
    try:
        first = day(date.fromisoformat(written), style=style)
    except ValueError:
        return taken
    return " ".join(part for part in (first, *behind) if part)


def short(text: str, length: int = LONG) -> str:
    """A text cut to so many letters."""
    return text if len(text) <= length else f"{text[: length - 1].rstrip()}…"


def _bound(value: Any, style: Style) -> Any:
    return partial(value, style=style) if isfunction(value) and "style" in signature(value).parameters else value
