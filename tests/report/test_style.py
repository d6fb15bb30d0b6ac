"""How a survey asks documents to write: read leniently, days without the language of the machine."""

from __future__ import annotations

import locale
from dataclasses import replace
from datetime import date

import pytest

from irsurvey import numbers
from irsurvey.model import Estimate, Report
from irsurvey.numbers import SI, Style
from irsurvey.report.style import asked, day, moment, spoken

GERMAN = Style(decimal_comma=True, date_format="%d.%m.%Y")


def with_keys(report: Report, **keys: object) -> Report:
    return replace(report, survey={**report.survey, "survey": {**report.survey["survey"], **keys}})  # type: ignore[dict-item]


def test_a_survey_gets_the_style_it_asks_for(report: Report) -> None:
    assert asked(report) == SI
    asking = with_keys(report, display_units="us", decimal_comma=True, date_format="%d.%m.%Y")
    assert asked(asking) == Style("us", True, "%d.%m.%Y")


@pytest.mark.parametrize(
    "survey", [{}, {"survey": []}, {"survey": {"display_units": 1, "date_format": 2}}, {"survey": 3}]
)
def test_a_survey_that_says_nothing_sensible_gets_si(report: Report, survey: dict[str, object]) -> None:
    assert asked(replace(report, survey=survey)) == SI


@pytest.mark.parametrize(
    ("pattern", "written"),
    [
        ("%d.%m.%Y", "03.02.2026"),
        ("%m/%d/%y", "02/03/26"),
        ("%Y-%m-%d", "2026-02-03"),
        ("%Y年%m月%d日", "2026年02月03日"),
    ],
)
def test_days_are_written_as_strftime_writes_them(pattern: str, written: str) -> None:
    # date.strftime of the standard library, whose figures depend on no language
    assert locale.setlocale(locale.LC_TIME)
    assert day(date(2026, 2, 3), style=Style(date_format=pattern)) == written == date(2026, 2, 3).strftime(pattern)


@pytest.mark.parametrize(
    ("taken", "shown"),
    [
        ("2026-01-18T07:12:00+01:00", "18.01.2026 07:12 +01:00"),
        ("2026-01-18T07:12:59.5", "18.01.2026 07:12"),
        ("2026-01-18", "18.01.2026"),
        ("2026-02-30T07:12", "2026-02-30T07:12"),
        ("in the morning", "in the morning"),
    ],
)
def test_a_moment_is_a_day_and_a_time_to_the_minute(taken: str, shown: str) -> None:
    assert moment(taken, style=GERMAN) == shown


def test_a_module_speaks_in_a_style_wherever_its_words_depend_on_one() -> None:
    said = spoken(numbers, GERMAN)
    assert said.shown(Estimate(3.14, 0.14)) == "3,14\u00a0±\u00a00,28"
    assert said.percent(0.5) == numbers.percent(0.5)
    assert said.NOTHING == numbers.NOTHING
    assert numbers.shown(Estimate(3.14, 0.14)) == "3.14\u00a0±\u00a00.28"  # and nowhere else
