"""Seasons of a survey file: degree days as stated, or summed from a year's temperatures by the function handed in."""

from __future__ import annotations

from collections.abc import Callable
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest

from irsurvey.errors import Fault, SurveyError
from irsurvey.model import Season, Survey
from irsurvey.survey.load import Known, load

Load = Callable[..., Survey]
Faults = Callable[..., tuple[Fault, ...]]

START = datetime(2025, 1, 1, tzinfo=UTC)


def days(count: int, of: Callable[[int], float], step: int = 1) -> str:
    """A temperature a day."""
    rows = [f"{(START + timedelta(days=day)).date().isoformat()},{of(day)}" for day in range(0, count, step)]
    return "\n".join(["time,outdoor_air_c", *rows])


def season(minimal: str, *, heating: str = "", cooling: str = "") -> str:
    tables = {"heating": heating, "cooling": cooling}
    return f"{minimal}[season]\n" + "".join(f"{name} = {{ {of} }}\n" for name, of in tables.items() if of)


def test_a_stated_season_is_carried_as_it_is(minimal: str, load_text: Load) -> None:
    stated = 'degree_days_kd = 3000, efficiency = 0.9, price_per_kwh = 0.12, currency = "EUR"'
    full = "degree_days_kd = 200, degree_days_fraction = 0.2, efficiency = 3, efficiency_fraction = 0.3"
    assert load_text(season(minimal, heating=stated, cooling=full)).seasons == (
        Season("heating", 3000.0, 0.10, "as stated", 0.9, 0.05, 0.12, 0.10, "EUR"),
        Season("cooling", 200.0, 0.2, "as stated", 3.0, 0.3, None, 0.10, ""),
    )


def test_without_seasons_there_are_none(minimal: str, load_text: Load) -> None:
    assert load_text(minimal).seasons == ()


@pytest.mark.parametrize(
    ("sense", "base", "expected"),
    # 100 days of 5.5 °C, the rest 20.5 °C, base 15.5: 100 × 10 K d to heat; base 18: 264 × 2.5 K d to cool (the last
    # of 365 readings ends the year)
    [("heating", 15.5, 1000.0), ("cooling", 18.0, 660.0)],
)
def test_degree_days_are_summed_from_a_year_of_temperatures(
    sense: str, base: float, expected: float, minimal: str, load_text: Load
) -> None:
    files = {"y.csv": days(365, lambda day: 5.5 if day < 100 else 20.5)}
    survey = load_text(season(minimal, **{sense: f'base_c = {base}, temperatures = "y.csv"'}), files)
    (found,) = survey.seasons
    # 1e-9: sums of 365 doubles
    assert (found.sense, found.degree_days) == (sense, pytest.approx(expected, rel=1e-9))
    assert found.how == f"y.csv, 2025-01-01 to 2025-12-31, 364 days, base {base:g} °C"
    assert not [notice for notice in survey.notices if "season" in notice]


def test_a_part_of_a_year_says_which(minimal: str, load_text: Load) -> None:
    files = {"y.csv": days(182, lambda _: 5.5)}
    survey = load_text(season(minimal, heating='base_c = 15.5, temperatures = "y.csv"'), files)
    assert survey.seasons[0].how == "y.csv, 2025-01-01 to 2025-07-01, 181 days, base 15.5 °C, a part of the year"
    told = "181 days, 2025-01-01 to 2025-07-01: degree days of that part of the year only"
    assert f"season.heating.temperatures: {told}" in survey.notices


@pytest.mark.parametrize(("count", "is_part"), [(301, False), (300, True)])  # 301 readings span 300 days
def test_a_year_may_miss_two_months(count: int, is_part: bool, minimal: str, load_text: Load) -> None:
    survey = load_text(
        season(minimal, heating='base_c = 15.5, temperatures = "y.csv"'), {"y.csv": days(count, lambda _: 5.5)}
    )
    assert ("a part of the year" in survey.seasons[0].how) == is_part


def test_two_years_are_not_one(minimal: str, faults_of: Faults) -> None:
    files = {"y.csv": days(730, lambda _: 5.5)}
    (fault,) = faults_of(season(minimal, heating='base_c = 15.5, temperatures = "y.csv"'), files)
    assert (fault.where, fault.got) == ("season.heating.temperatures", "729 days, 2025-01-01 to 2026-12-31")


def test_days_without_readings_are_told(minimal: str, load_text: Load) -> None:
    rows = days(365, lambda _: 5.5).splitlines()
    survey = load_text(
        season(minimal, heating='base_c = 15.5, temperatures = "y.csv"'), {"y.csv": "\n".join(rows[:100] + rows[110:])}
    )
    longest = "2025-04-09T00:00:00+00:00 to 2025-04-20T00:00:00+00:00"
    told = f"11.0 days without readings, the longest {longest}: straight lines assumed"
    assert f"season.heating.temperatures: {told}" in survey.notices


def test_local_times_of_a_year_cross_a_clock_change(minimal: str, load_text: Load) -> None:
    """02:30 happens twice on 26 October in Vienna, and not at all on 30 March: an hour more or less is no matter."""
    rows = days(365, lambda _: 5.5) + "\n2025-03-30T02:30:00,5.5\n2025-10-26T02:30:00,5.5\n"
    text = minimal.replace('kind = "building"', 'kind = "building"\ntimezone = "Europe/Vienna"')
    survey = load_text(season(text, heating='base_c = 15.5, temperatures = "y.csv"'), {"y.csv": rows})
    assert survey.seasons[0].degree_days == pytest.approx(3640, rel=1e-9)  # sums of 365 doubles


@pytest.mark.parametrize(
    ("content", "where"),
    [
        (None, "season.heating.temperatures[y.csv]"),
        ("time,air_c\n2025-01-01,3\n", "season.heating.temperatures"),
        ("time,outdoor_air_c\n2025-01-01,hot\n", "season.heating.temperatures[y.csv].outdoor_air_c, line 2"),
        ("when,outdoor_air_c\n2025-01-01,3\n", "season.heating.temperatures[y.csv]"),
    ],
)
def test_a_file_that_is_no_year_of_temperatures_is_a_fault(
    content: str | None, where: str, minimal: str, faults_of: Faults
) -> None:
    files = {} if content is None else {"y.csv": content}
    (fault,) = faults_of(season(minimal, heating='base_c = 15.5, temperatures = "y.csv"'), files)
    assert fault.where == where


def test_before_going_out_the_year_s_file_need_not_be_there(minimal: str, tmp_path: Path) -> None:
    (tmp_path / "survey.toml").write_text(season(minimal, heating='base_c = 15.5, temperatures = "y.csv"'), "utf-8")
    survey = load(tmp_path / "survey.toml", known=Known((), (), {}), ahead=True)
    assert survey.seasons == ()
    assert any(notice.startswith("season.heating.temperatures") for notice in survey.notices)


def test_where_nothing_can_sum_temperatures_degree_days_are_to_be_stated(minimal: str, tmp_path: Path) -> None:
    (tmp_path / "survey.toml").write_text(season(minimal, heating='base_c = 15.5, temperatures = "y.csv"'), "utf-8")
    (tmp_path / "y.csv").write_text(days(365, lambda _: 5.5), "utf-8")
    with pytest.raises(SurveyError, match="expected degree_days_kd"):
        load(tmp_path / "survey.toml", known=Known((), (), {}))


def test_a_season_without_degree_days_is_told(minimal: str, load_text: Load) -> None:
    survey = load_text(season(minimal, cooling="degree_days_kd = 0"))
    assert "season.cooling: no degree days, so that nothing costs anything" in survey.notices
