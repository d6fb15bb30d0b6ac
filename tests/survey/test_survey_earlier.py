"""The history file: earlier values of components, oldest first."""

from __future__ import annotations

from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path
from zoneinfo import ZoneInfo

import pytest

from irsurvey.errors import Fault
from irsurvey.model import Earlier, Survey
from irsurvey.survey.load import Known, load

Load = Callable[..., Survey]
Faults = Callable[..., tuple[Fault, ...]]

HEADER = "date,asset,component,delta_ambient_k,delta_similar_k,load_a,rated_a,u_k"
FILE = "history[h.csv]"


@pytest.fixture
def round_(minimal: str) -> str:
    """A survey of one lug of the asset A1."""
    lug = '[[frame.component]]\nname = "lug"\npolygon = [[0, 0], [9, 0], [9, 9]]\n'
    text = minimal.replace('"building"', '"electrical"\ntimezone = "Europe/Vienna"')
    return f'history = "h.csv"\n{text}asset = "A1"\n{lug}'


def file(*rows: str, header: str = HEADER) -> dict[str, str]:
    return {"h.csv": "\n".join([header, *rows])}


def told(survey: Survey) -> list[str]:
    return [notice for notice in survey.notices if notice.startswith("history")]


def test_earlier_values_are_carried_the_oldest_first(round_: str, load_text: Load) -> None:
    rows = ("2025-03-11,A1,lug,12.5,4,180,400,0.8", "2024-03-12T09:30:00+00:00,A1,lug,,3.5,,,")
    survey = load_text(round_, file(*rows))
    assert survey.history == (
        Earlier(datetime(2024, 3, 12, 9, 30, tzinfo=UTC), "A1", "lug", None, 3.5),
        Earlier(datetime(2025, 3, 11, 12, tzinfo=ZoneInfo("Europe/Vienna")), "A1", "lug", 12.5, 4.0, 180, 400, 0.8),
    )
    assert told(survey) == []


def test_names_that_look_like_numbers_are_names(round_: str, load_text: Load) -> None:
    survey = load_text(round_, file("2025-03-11,007,1,3", header="date,asset,component,delta_similar_k"))
    assert (survey.history[0].asset, survey.history[0].component) == ("007", "1")


def test_a_history_may_be_named_in_the_survey_s_own_table_and_as_a_spreadsheet_writes_it(
    round_: str, load_text: Load
) -> None:
    text = round_.replace('history = "h.csv"\n', "").replace('title = "T"', 'title = "T"\nhistory = "h.csv"')
    (value,) = load_text(text, {"h.csv": "date;component;delta_ambient_k\n2025-03-11;lug;3,5\n"}).history
    assert (value.asset, value.delta_ambient) == ("", 3.5)


def test_without_a_history_there_is_none(minimal: str, load_text: Load) -> None:
    assert load_text(minimal).history == ()


def test_what_is_drawn_no_more_has_no_trend_and_that_is_told(round_: str, load_text: Load) -> None:
    rows = ("2025-03-11,A1,lug,3,,,,", "2025-03-11,A2,lug,3,,,,", "2025-03-11,,bar,3,,,,", "2024-03-11,,bar,3,,,,")
    assert told(load_text(round_, file(*rows))) == ["history: no component drawn now is bar, lug of A2: no trend"]
    searched = round_.replace('asset = "A1"', 'asset = "A2"\nfind_components = true')  # their names come later
    assert told(load_text(searched, file(rows[1]))) == []


def test_columns_and_rows_that_tell_nothing_are_told(round_: str, load_text: Load) -> None:
    rows = ("2025-03-11,A1,lug,3,dull", "2024-03-11,A1,lug,,missing", "2023-03-11,A1,lug,,")
    survey = load_text(round_, file(*rows, header="date,asset,component,delta_ambient_k,remark"))
    assert len(survey.history) == 1
    assert [notice.split(";")[0] for notice in told(survey)] == [
        f"{FILE}: column remark not used",
        f"{FILE}: 2 rows without a difference passed over",
    ]


@pytest.mark.parametrize(
    ("rows", "where", "got"),
    [
        (("11.03.2025,A1,lug,3,,,,",), f"{FILE}.date, line 2", '"11.03.2025"'),
        ((",A1,lug,3,,,,",), f"{FILE}.date, line 2", "nothing"),
        (("0025-03-11,A1,lug,3,,,,",), f"{FILE}.date, line 2", '"0025-03-11"'),
        (("2025-03-11,A1,,3,,,,",), f"{FILE}.component, line 2", "nothing"),
        (("2025-03-11,A1,lug,hot,,,,",) * 2, f"{FILE}.delta_ambient_k, line 2", '"hot" and 1 more'),
        (("2025-03-11,A1,lug,3,,-1,,",), f"{FILE}.load_a, line 2", "-1"),
        (("2025-03-11,A1,lug,3,,,0,",), f"{FILE}.rated_a, line 2", "0"),
        (("2025-03-11,A1,lug,3,,,,-0.1",), f"{FILE}.u_k, line 2", "-0.1"),
        (("2025-10-26T02:30,A1,lug,3,,,,",), f"{FILE}.date, line 2", None),  # an hour that happens twice
        (("2025-03-11,A1,lug,3,,,,", "2025-03-11,A1,lug,4,,,,"), f"{FILE}, line 2", "lug again and 1 more"),
    ],
)
def test_a_wrong_row_is_a_fault_with_its_line(
    rows: tuple[str, ...], where: str, got: str | None, round_: str, faults_of: Faults
) -> None:
    (fault,) = faults_of(round_, file(*rows))
    assert fault.where == where
    assert got in (None, fault.got)


@pytest.mark.parametrize(
    ("header", "remedy"),
    [
        ("date,component,delta_ambient", "delta_ambient: did you mean delta_ambient_k?"),
        ("day,component,u_k", "day: did you mean date?"),
    ],
)
def test_a_file_without_the_columns_of_a_history_is_a_fault(
    header: str, remedy: str, round_: str, faults_of: Faults
) -> None:
    (fault,) = faults_of(round_, file("2025-03-11,lug,3", header=header))
    assert (fault.where, fault.got, fault.remedy) == (FILE, ", ".join(header.split(",")), remedy)


def test_a_history_that_is_not_there_is_a_fault_but_not_before_going_out(
    round_: str, folder: Path, faults_of: Faults
) -> None:
    assert [fault.where for fault in faults_of(round_)] == [FILE]
    assert [fault.where for fault in faults_of(round_.replace("h.csv", "../h.csv"))] == ["history"]
    (folder / "survey.toml").write_text(round_, "utf-8")
    survey = load(folder / "survey.toml", known=Known((), (), {}), ahead=True)
    assert survey.history == ()
    assert any(notice.startswith(FILE) for notice in survey.notices)
