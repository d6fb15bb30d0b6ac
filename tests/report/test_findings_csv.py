"""findings.csv: every number of report.json, and nothing a spreadsheet would run."""

from __future__ import annotations

import csv
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from irsurvey.model import FrameTask, Report
from irsurvey.report.csv_table import as_text
from irsurvey.report.findings_csv import COLUMNS, write
from irsurvey.report.json import plain

Rows = list[dict[str, str]]


def written(report: Report, folder: Path) -> Rows:
    with write(report, (), folder).open(encoding="utf-8", newline="") as stream:
        return list(csv.DictReader(stream))


def numbers(item: dict[str, Any]) -> dict[str, float]:
    """The numbers of a finding or component of report.json under the names of the columns."""
    found = {}
    for key, value in item.items():
        if key in ("shape", "at_rated_load"):
            continue
        if isinstance(value, dict) and {"value", "u"} <= set(value):
            found |= {key: value["value"], f"u_{key}": value["u"]}
        elif isinstance(value, int | float) and not isinstance(value, bool):
            found[key] = value
    return {key: value for key, value in found.items() if value is not None}


def test_one_row_per_finding_and_per_component(report: Report, tmp_path: Path) -> None:
    rows = written(report, tmp_path)
    assert [(row["frame"], row["kind"], row["id"] or row["name"]) for row in rows] == [
        ("F01", "finding", "F01-1"),
        ("F01", "finding", "F01-2"),
        ("S01", "finding", "S01-1"),
        ("S01", "component", "phase 1 lug"),
        ("S01", "component", "phase 2 lug"),
        ("S01", "component", "phase 3 bare bar"),
    ]


def test_every_number_equals_report_json(report: Report, tmp_path: Path) -> None:
    items = [item for frame in plain(report)["frames"] for item in frame["findings"] + frame["components"]]
    for row, item in zip(written(report, tmp_path), items, strict=True):
        filled = {name: cell for name, cell in row.items() if cell}
        expected = numbers(item)
        assert expected.keys() <= filled.keys()
        assert {name: float(filled[name]) for name in expected} == expected
        for name in ("elongation", "edge_sharpness_per_pixel"):
            assert filled.get(name) == (str(item["shape"][name]) if "shape" in item else None)


def test_the_rise_at_rated_load_is_a_band(report: Report, tmp_path: Path) -> None:
    row = next(row for row in written(report, tmp_path) if row["name"] == "phase 2 lug")
    assert (row["at_rated_load_delta_similar_k_low"], row["at_rated_load_delta_similar_k_high"]) == ("110.3", "145.5")
    assert (row["at_rated_load_delta_ambient_k_low"], row["at_rated_load_delta_ambient_k_high"]) == ("137.9", "182.0")


def test_limit_joint_and_trend_of_a_component_have_columns_of_their_own(switch_room: Report, tmp_path: Path) -> None:
    row = next(row for row in written(switch_room, tmp_path) if row["name"] == "phase 2 lug")
    told = {
        "limit_name": "invented/bolted-bare",
        "limit_max_c": "90.0",
        "limit_rise_k": "50.0",
        "limit_allowed_now_c_low": "32.13",
        "limit_allowed_now_c_high": "35.94",
        "joint_excess_resistance_uohm": "42.25",
        "u_joint_excess_resistance_uohm": "6.3",
        "trend_slope_k_per_year": "24.6",
        "trend_slope_low_k_per_year": "17.1",
        "trend_slope_high_k_per_year": "33.2",
        "above_allowed_k": "35.56",
        "relative_difference_percent": "79.95",
        "delta_ambient_in_calm_k": "74.6",
        "indication": "hot joint",
    }
    assert {name: row[name] for name in told} == told


def test_the_governing_assessment_and_the_flags_are_named(report: Report, tmp_path: Path) -> None:
    rows = {row["id"] or row["name"]: row for row in written(report, tmp_path)}
    assert [rows["F01-1"][name] for name in ("criterion", "class", "urgency")] == [
        "building-delta",
        "marked deviation",
        "2",
    ]
    assert [rows["phase 3 bare bar"][name] for name in ("criterion", "class", "urgency")] == ["twins", "", ""]
    assert rows["S01-1"]["flags"] == "saturated;size-limited"


def test_how_sure_a_decision_is_stands_beside_it(report: Report, tmp_path: Path) -> None:
    rows = {row["id"] or row["name"]: row for row in written(report, tmp_path)}
    assert [rows["F01-1"][name] for name in ("verdict", "outcome", "exceeds_threshold")] == ["fail", "act", "0.9991"]
    assert [rows["phase 1 lug"][name] for name in ("verdict", "outcome", "exceeds_threshold")] == [
        "pass",
        "cleared",
        "",
    ]
    assert [rows["phase 3 bare bar"][name] for name in ("verdict", "outcome")] == ["", "not cleared"]
    assert [rows["S01-1"][name] for name in ("verdict", "outcome")] == ["", "act"]  # no assessment, yet an outcome


def test_probabilities_and_the_indication_stand_in_columns_of_their_own(report: Report, tmp_path: Path) -> None:
    rows = {row["id"] or row["name"]: row for row in written(report, tmp_path)}
    columns = ("condensation_probability", "mould_probability", "indication")
    assert [rows["F01-1"][name] for name in columns] == ["0.0", "0.0131", "missing or displaced insulation"]
    assert [rows["F01-2"][name] for name in columns] == ["0.0", "0.0131", ""]
    assert [rows["phase 1 lug"][name] for name in columns] == ["", "", ""]


def test_a_pattern_that_would_run_is_shown_instead(report: Report, tmp_path: Path) -> None:
    wall = report.frames[0]
    assert wall.findings[0].indication
    attack = replace(wall.findings[0], indication=replace(wall.findings[0].indication, pattern="=1+1"))
    assert written(replace(report, frames=(replace(wall, findings=(attack,)),)), tmp_path)[0]["indication"] == "'=1+1"


def test_every_new_number_of_an_envelope_has_its_columns_and_dicts_have_none() -> None:
    for name in (
        "excess_heat_w_k",
        "u_value_w_m2k",
        "u_value_increase_w_m2k",
        "u_value_from_contrast_w_m2k",
        "temperature_factor_at_0_25",
        "dew_point_margin_k",
        "mould_margin_k",
        "pressure_change_k",
    ):
        assert {name, f"u_{name}"} <= set(COLUMNS)
    assert not {"heat_flux_terms_w_m2", "refusals", "budgets"} & set(COLUMNS)


def test_the_columns_are_those_of_the_specification() -> None:
    assert COLUMNS[:6] == ("frame", "id", "key", "kind", "name", "sense")
    judged = COLUMNS.index("criterion")
    assert COLUMNS[judged : judged + 6] == ("criterion", "class", "urgency", "verdict", "outcome", "flags")
    assert all(column.startswith("review") for column in COLUMNS[judged + 6 :])
    assert len(set(COLUMNS)) == len(COLUMNS)


def test_control_characters_do_not_reach_the_table() -> None:
    # NUL ends the file for many readers of CSV; ESC and BEL act on a terminal
    assert as_text("a\x00b\x1b[31mc\x07") == "a\ufffdb\ufffd[31mc\ufffd"
    assert as_text("two\nlines\tand a tab") == "two\nlines\tand a tab"


# What spreadsheets take for a formula: OWASP, "CSV Injection"
@pytest.mark.parametrize("start", ["=", "+", "-", "@", "\t", "\r", "\n", "＝", "＋", "－", "＠"])
def test_a_text_that_would_run_is_shown_instead(report: Report, tmp_path: Path, start: str) -> None:
    board = report.frames[3]
    attack = f'{start}HYPERLINK("x","y")'
    component = replace(board.components[0], name=attack, flags=(attack,))
    row = written(replace(report, frames=(replace(board, findings=(), components=(component,)),)), tmp_path)[0]
    assert row["name"] == row["flags"] == f"'{attack}"


def test_a_negative_number_stays_a_number(report: Report, tmp_path: Path) -> None:
    assert written(report, tmp_path)[0]["delta_k"] == "-3.1275"


def test_an_ordinary_text_is_left_alone() -> None:
    assert as_text("phase 2 = left") == "phase 2 = left"


@pytest.mark.parametrize("words", ['a "quoted", text', "two\nlines", "x" * 10_000, "שלום; مرحبا; 测试", "<b>&amp;</b>"])
def test_any_text_comes_back_as_it_was(report: Report, tmp_path: Path, words: str) -> None:
    board = report.frames[3]
    component = replace(board.components[0], name=words)
    rows = written(replace(report, frames=(replace(board, findings=(), components=(component,)),)), tmp_path)
    assert [row["name"] for row in rows] == [words]


def test_lines_end_as_rfc_4180_says(report: Report, tmp_path: Path) -> None:
    data = write(report, (), tmp_path).read_bytes()
    assert data.count(b"\r\n") == data.count(b"\n") == 7


def test_the_same_report_gives_the_same_bytes(report: Report, tasks: tuple[FrameTask, ...], tmp_path: Path) -> None:
    first = write(report, tasks, tmp_path / "a").read_bytes()
    assert write(report, tasks, tmp_path / "b").read_bytes() == first
    assert b"secret" not in first
