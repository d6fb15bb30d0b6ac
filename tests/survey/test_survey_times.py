"""Local times across a clock change, and logs read between their rows; against UTC arithmetic and zoneinfo."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable
from datetime import UTC, datetime, timedelta
from zoneinfo import ZoneInfo

import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.errors import Fault, SurveyError
from irsurvey.model import Survey
from irsurvey.survey.log import Log
from irsurvey.survey.times import instant

VIENNA = ZoneInfo("Europe/Vienna")
Load = Callable[..., Survey]
Faults = Callable[..., tuple[Fault, ...]]


@pytest.mark.parametrize("day", [datetime(2026, 3, 28, tzinfo=UTC), datetime(2026, 10, 24, tzinfo=UTC)])
def test_a_local_time_is_an_instant_exactly_when_one_instant_has_it(day: datetime) -> None:
    """Both clock changes of 2026 in Vienna (29 March, 25 October), every ten minutes of three days."""
    instants = [day + timedelta(minutes=10 * step) for step in range(3 * 144)]
    with_this_time = defaultdict(list)
    for moment in instants:
        with_this_time[moment.astimezone(VIENNA).replace(tzinfo=None)].append(moment)
    start, end = min(with_this_time), max(with_this_time)
    local, outcomes = start, set()
    while local <= end:
        found = with_this_time.get(local, [])
        outcomes.add(len(found))
        if len(found) == 1:
            resolved = instant(local, VIENNA, "here")
            assert resolved.astimezone(UTC) == found[0]
        else:
            with pytest.raises(SurveyError) as caught:
                instant(local, VIENNA, "here")
            assert ("twice" if found else "does not exist") in caught.value.faults[0].got
        local += timedelta(minutes=10)
    assert outcomes in ({1, 0}, {1, 2})


def test_a_time_with_its_own_offset_is_taken_as_it_is() -> None:
    moment = datetime.fromisoformat("2026-10-25T02:30:00+01:00")
    assert instant(moment, VIENNA, "here") is moment


def logged(minimal: str, taken: str, zone: str = "Europe/Vienna") -> str:
    survey = minimal.replace('kind = "building"', f'kind = "building"\ntimezone = "{zone}"')
    return survey.replace("air_c = 20", 'log = "log.csv"') + f"taken = {taken}\n"


@pytest.mark.parametrize(
    ("rows", "taken", "expected"),
    [
        # spring: 01:30+01:00 = 00:30Z and 03:30+02:00 = 01:30Z, one hour; 03:00+02:00 = 01:00Z is its middle
        ("2026-03-29T01:30,10\n2026-03-29T03:30,20\n", "2026-03-29T03:00:00", 15.0),
        # autumn: 01:30+02:00 = 23:30Z and 03:30+01:00 = 02:30Z, three hours
        ("2026-10-25T01:30,10\n2026-10-25T03:30,40\n", "2026-10-25T02:30:00+02:00", 20.0),
        ("2026-10-25T01:30,10\n2026-10-25T03:30,40\n", "2026-10-25T02:30:00+01:00", 30.0),
        # a log in UTC, a frame in local time, the day after
        ("2026-10-26T00:00Z,10\n2026-10-26T01:00Z,20\n", "2026-10-26T01:30:00", 15.0),
        # rows need not be in order, and a row is met exactly
        ("2026-01-18T08:00,3\n2026-01-18T07:00,1\n", "2026-01-18T08:00:00", 3.0),
    ],
)
def test_a_log_is_read_by_elapsed_time_not_by_the_clock_on_the_wall(
    rows: str, taken: str, expected: float, minimal: str, load_text: Load
) -> None:
    survey = load_text(logged(minimal, taken), {"log.csv": "time,air_c\n" + rows})
    air = survey.tasks[0].scene["air"]
    # 1e-9 K: the seconds of two dates near 1.8e9 are exact in a double, the rest is rounding at 300 K
    assert (air.value, air.source) == (pytest.approx(273.15 + expected, abs=1e-9), "log")


@pytest.mark.parametrize(
    ("time", "happens"), [("2026-10-25T02:30:00", "happens twice"), ("2026-03-29T02:30:00", "does not exist")]
)
def test_a_time_that_a_clock_change_repeats_or_skips_is_a_fault_in_frame_and_log(
    time: str, happens: str, minimal: str, faults_of: Faults
) -> None:
    files = {"log.csv": f"time,air_c\n{time},10\n"}
    frame_fault, log_fault = sorted(faults_of(logged(minimal, time), files), key=lambda fault: -len(fault.where))[::-1]
    assert frame_fault.where == "frame[F01].taken"
    assert log_fault.where == "conditions.log[log.csv], line 2"
    for fault in (frame_fault, log_fault):
        assert happens in fault.got
        assert "+0" in fault.remedy


def test_outside_its_span_a_log_is_not_extrapolated(minimal: str, load_text: Load, faults_of: Faults) -> None:
    files = {"log.csv": "time,air_c,wind_m_s\n2026-01-18T07:00,10,1\n2026-01-18T08:00,12,2\n"}
    late = logged(minimal, "2026-01-18T08:00:01")
    fault = faults_of(late, files)[0]
    span = "2026-01-18T07:00:00+01:00 to 2026-01-18T08:00:00+01:00"
    got = f"nothing: log.csv, {span}, does not reach to 2026-01-18T08:00:01+01:00"
    assert (fault.where, fault.got) == ("conditions.air_c", got)
    survey = load_text(late.replace("reflected_c", "air_c = 20\nreflected_c"), files)
    assert survey.tasks[0].scene["air"].source == "survey"
    assert "wind" not in survey.tasks[0].scene
    told = f"log.csv does not reach to this time: air_c, wind_m_s not taken from it, {span} (all frames)"
    assert told in survey.notices


def test_a_gap_in_one_column_is_bridged_by_that_column_s_own_rows(minimal: str, load_text: Load) -> None:
    rows = "time;air_c;wind_m_s\n2026-01-18T07:00;10;\n2026-01-18T08:00;;2,5\n2026-01-18T09:00;14;3\n"
    scene = load_text(logged(minimal, "2026-01-18T08:00:00"), {"log.csv": rows}).tasks[0].scene
    assert scene["air"].value == pytest.approx(285.15, abs=1e-9)  # rounding at 300 K
    assert scene["wind"].value == 2.5  # a decimal comma where cells are separated by semicolons


def test_a_required_condition_that_a_frame_without_a_time_cannot_have_from_its_log_says_so(
    minimal: str, faults_of: Faults
) -> None:
    text = minimal.replace("air_c = 20", 'log = "log.csv"')
    (fault,) = faults_of(text, {"log.csv": "time,air_c\n2026-01-18T07:00,10\n"})
    assert fault.where == "conditions.air_c"
    assert fault.got == "nothing: log.csv is not used, as the frame states no time"


@pytest.mark.parametrize(
    ("hours", "value", "told"),
    [
        # the frame is in the middle between two readings, 10 and 20 °C; one hour apart is continuous (house rule)
        (1.0, 15.0, None),
        (1.1, 15.0, "straight lines assumed"),
        (6.0, 15.0, "straight lines assumed"),
        (6.1, None, "air_c not taken from it"),
    ],
)
def test_a_gap_over_an_hour_is_told_and_one_over_six_is_not_bridged(
    hours: float, value: float | None, told: str | None, minimal: str, load_text: Load
) -> None:
    middle = datetime(2026, 1, 18, 12, tzinfo=UTC)
    before, after = (middle + timedelta(hours=sign * hours / 2) for sign in (-1, 1))
    rows = f"time,air_c\n{before.isoformat()},10\n{after.isoformat()},20\n"
    text = f'{minimal}taken = {middle.isoformat()}\nconditions = {{ log = "log.csv" }}\n'
    survey = load_text(text.replace("air_c = 20", "air_c = 5"), {"log.csv": rows})
    expected = 5.0 if value is None else value
    # 1e-9 K: rounding at 300 K
    assert survey.tasks[0].scene["air"].value == pytest.approx(273.15 + expected, abs=1e-9)
    notices = [notice for notice in survey.notices if "log.csv" in notice]
    gap = f"log.csv has no air_c from {before.isoformat()} to {after.isoformat()}: {told} (all frames)"
    assert notices == ([gap] if told else [])


def test_without_a_time_zone_local_times_are_utc_and_that_is_listed(minimal: str, load_text: Load) -> None:
    survey = load_text(minimal + "taken = 2026-10-25T02:30:00\n")
    assert survey.tasks[0].taken == datetime(2026, 10, 25, 2, 30, tzinfo=UTC)
    assert "survey.timezone not stated: local times read as UTC (all frames)" in survey.notices


def test_a_log_without_a_column_of_times_is_told_its_name(minimal: str, faults_of: Faults) -> None:
    (fault,) = faults_of(logged(minimal, "2026-01-18T08:00:00"), {"log.csv": "Date;air_c\n2026-01-18 07:00;1\n"})
    assert fault.remedy == "name the column of times time"


@pytest.mark.parametrize(("name", "remedy"), [("Europe/Wien", "did you mean Europe/Vienna?"), ("+01:00", "a region")])
def test_only_a_time_zone_that_is_nearly_the_one_written_is_suggested(
    name: str, remedy: str, minimal: str, faults_of: Faults
) -> None:
    # of zones, the nearest by letters may be half a world away: Etc/GMT+10 for +01:00
    text = minimal.replace('kind = "building"', f'kind = "building"\ntimezone = "{name}"')
    assert faults_of(text)[0].remedy.startswith(remedy)


def test_a_frame_without_a_time_cannot_use_a_log(minimal: str, load_text: Load) -> None:
    text = minimal.replace("air_c = 20", 'air_c = 20\nlog = "log.csv"')
    survey = load_text(text, {"log.csv": "time,air_c\n2026-01-18T07:00,10\n"})
    assert survey.tasks[0].scene["air"].source == "survey"
    assert "time not stated: log.csv not used (all frames)" in survey.notices


@pytest.mark.parametrize(
    ("log", "where", "got"),
    [
        ("time,air_c\n2026-01-18T07:00,warm\n", "conditions.log[log.csv].air_c, line 2", '"warm"'),
        ("time,air_c\n2026-01-18T07:00,1\n2026-01-18T08:00,999\n", "conditions.log[log.csv].air_c, line 3", "999.0"),
        ("time,air_c\n18.01.2026 07:00,1\n", "conditions.log[log.csv], line 2", '"18.01.2026 07:00"'),
        ("time,air_c\n,1\n", "conditions.log[log.csv], line 2", "nothing"),
        ("when,air_c\n2026-01-18T07:00,1\n", "conditions.log[log.csv]", "when, air_c"),
        ("time,air\n2026-01-18T07:00,1\n", "conditions.log[log.csv]", "time, air"),
        ("", "conditions.log[log.csv]", "nothing"),
        (
            "time,air_c\n2026-01-18T07:00Z,1\n2026-01-18T08:00+01:00,2\n",
            "conditions.log[log.csv], line 2",
            "2026-01-18T07:00Z",
        ),
    ],
)
def test_a_log_that_cannot_be_read_says_where(log: str, where: str, got: str, minimal: str, faults_of: Faults) -> None:
    fault = faults_of(logged(minimal, "2026-01-18T07:00:00"), {"log.csv": log})[0]
    assert (fault.where, fault.got) == (where, got)


@given(
    values=st.lists(st.floats(-50, 50), min_size=2, max_size=20),
    position=st.floats(0, 1),
)
def test_an_interpolated_value_lies_between_its_neighbours(values: list[float], position: float) -> None:
    seconds = tuple(1.8e9 + 600.0 * step for step in range(len(values)))
    moment = datetime.fromtimestamp(seconds[0] + position * (seconds[-1] - seconds[0]), UTC)
    value = Log("log.csv", {"air_c": (seconds, tuple(values))}, ()).at(moment)["air_c"]
    before = min(int((moment.timestamp() - seconds[0]) // 600), len(values) - 2)
    low, high = sorted(values[before : before + 2])
    assert low - 1e-9 <= value <= high + 1e-9  # rounding of one product and sum
