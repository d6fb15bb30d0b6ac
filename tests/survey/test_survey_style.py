"""How people are to read numbers and days: what a survey may ask for, and that nothing else of it moves."""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import replace

import pytest

from irsurvey.errors import Fault
from irsurvey.model import Survey

Load = Callable[..., Survey]
Faults = Callable[..., tuple[Fault, ...]]


def asking(minimal: str, keys: str) -> str:
    return minimal.replace("[survey]\n", f"[survey]\n{keys}\n", 1)


@pytest.mark.parametrize("written", ["%d.%m.%Y", "%m/%d/%y", "%Y-%m-%d", "%d %m %Y", "year %Y, month %m, day %d"])
def test_days_may_be_asked_for_in_any_order(minimal: str, load_text: Load, written: str) -> None:
    survey = load_text(asking(minimal, f'date_format = "{written}"'))
    assert json.loads(survey.as_read)["survey"]["date_format"] == written


@pytest.mark.parametrize(
    ("keys", "where"),
    [
        ('display_units = "imperial"', "survey.display_units"),
        ("display_units = true", "survey.display_units"),
        ('decimal_comma = ","', "survey.decimal_comma"),
        ("decimal_comma = 1", "survey.decimal_comma"),
        ('date_format = "%d.%m"', "survey.date_format"),  # no year
        ('date_format = "%d.%m.%Y %H"', "survey.date_format"),  # no day has hours
        ('date_format = "%d. %B %Y"', "survey.date_format"),  # a month by name needs a language
        ('date_format = "%d.%m.%Y %d"', "survey.date_format"),
        ('date_format = "%d.%m.%Y %"', "survey.date_format"),
        ('date_format = ""', "survey.date_format"),
        (f'date_format = "%d.%m.%Y{" " * 40}"', "survey.date_format"),
        ("date_format = 2026-01-18", "survey.date_format"),
    ],
)
def test_what_there_is_not_is_a_fault(minimal: str, faults_of: Faults, keys: str, where: str) -> None:
    assert [fault.where for fault in faults_of(asking(minimal, keys))] == [where]


def test_a_survey_measures_the_same_however_it_is_read(minimal: str, load_text: Load) -> None:
    # the file's own keys keep their units: distance_m stays metres
    plain = load_text(minimal)
    asked = load_text(asking(minimal, 'display_units = "us"\ndecimal_comma = true\ndate_format = "%m/%d/%Y"'))
    assert replace(asked, as_read=plain.as_read) == plain
