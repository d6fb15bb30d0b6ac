"""repairs.csv: one row for each item in its order, nothing a spreadsheet would run, nothing where it does not apply."""

from __future__ import annotations

import csv
from dataclasses import replace
from pathlib import Path

import pytest

from irsurvey.model import Report
from irsurvey.report.repairs_csv import COLUMNS, write


def written(report: Report, folder: Path) -> list[dict[str, str]]:
    path = write(report, (), folder)
    assert path
    with path.open(encoding="utf-8", newline="") as stream:
        return list(csv.DictReader(stream))


def test_there_is_one_row_for_each_item_in_the_order_of_the_list(switch_room: Report, tmp_path: Path) -> None:
    rows = written(switch_room, tmp_path)
    assert [(row["rank"], row["component"]) for row in rows] == [
        ("1", "phase 2 lug"),
        ("2", "warm area beside the lugs"),
        ("3", "phase 3 bare bar"),
    ]
    assert rows[0] == {
        "rank": "1",
        "asset": "FB-2",
        "location": "Switch room, ground floor",
        "frame": "S01",
        "component": "phase 2 lug",
        "urgency": "4",
        "asks_for": "at once",
        "class": "major discrepancy",
        "confidence": "0.9987",
        "delta_k": "36.38",
        "u_delta_k": "0.9",
        "basis": "similar",
        "load_a": "200.0",
        "rated_a": "400.0",
        "action": "Have the joint opened, cleaned and made again.",
        "inspect_again": "after the repair, at 40 % of its rating or more",
        "taken": "2026-01-18T07:12:00+01:00",
        "key": "S01@319,179",
    }


def test_what_does_not_exist_is_an_empty_cell_and_never_a_zero(switch_room: Report, tmp_path: Path) -> None:
    last = written(switch_room, tmp_path)[2]
    empty = {name for name, cell in last.items() if cell == ""}
    assert empty == {
        *("asset", "location", "urgency", "class", "confidence"),
        *("delta_k", "u_delta_k", "basis", "load_a", "inspect_again"),
    }
    assert last["asks_for"] == "cannot be classed"


# What spreadsheets take for a formula: OWASP, "CSV Injection"
@pytest.mark.parametrize("start", ["=", "+", "-", "@", "\t", "\r", "＝", "＋", "－", "＠"])
def test_a_text_that_would_run_is_shown_instead(switch_room: Report, tmp_path: Path, start: str) -> None:
    attack = f'{start}HYPERLINK("x","y")'
    item = replace(
        switch_room.repairs[0],
        what=attack,
        asset=attack,
        location=attack,
        action=attack,
        inspect_again=attack,
        class_=attack,
    )
    (row,) = written(replace(switch_room, repairs=(item,)), tmp_path)
    for name in ("component", "asset", "location", "action", "inspect_again", "class"):
        assert row[name] == f"'{attack}"


def test_an_electrical_survey_with_nothing_to_repair_has_the_columns_and_no_row(
    switch_room: Report, tmp_path: Path
) -> None:
    path = write(replace(switch_room, repairs=()), (), tmp_path)
    assert path
    assert path.read_bytes() == (",".join(COLUMNS) + "\r\n").encode()


def test_a_survey_of_a_building_has_no_repair_list_not_even_one_of_an_earlier_run(
    switch_room: Report, report: Report, tmp_path: Path
) -> None:
    write(switch_room, (), tmp_path)
    house = replace(report, frames=report.frames[:2])
    assert write(house, (), tmp_path) is None
    assert list(tmp_path.iterdir()) == []
