"""What the first page tells of the sample surveys: what matters most, and counts that agree with what they count."""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from report.pages import Page

from irsurvey.model import Report
from irsurvey.report import condition_rows, facts, season_table
from irsurvey.report.html import page
from irsurvey.report.kept import kept
from irsurvey.report.open_points import beside_repairs

Runs = dict[str, tuple[Report, Path]]


def text_of(runs: Runs, name: str) -> str:
    report, out = runs[name]
    return Page(page(report, kept(out), out)).text.replace("\u00a0", " ")


def test_where_mould_is_likely_stands_at_the_top(sample_runs: Runs) -> None:
    # the corner of the bathroom was made for it: tests/test_house_truth.py holds its margin against the truth
    report, _ = sample_runs["house"]
    assert [frame.id for frame in facts.mouldy(report)] == ["bathroom-corner"]
    text = text_of(sample_runs, "house")
    assert "Mould conditions are likely at: bathroom-corner" in text[: text.index("What was found")]
    (probability,) = re.findall(r"Consistent with [^;]*; mould conditions likely at its coldest spot \(([^)]*)\)", text)
    assert probability == "probability 99 %"


def test_heat_is_told_in_short_only_where_numbers_may_be_relied_on(sample_runs: Runs) -> None:
    report, _ = sample_runs["house"]
    frame = next(frame for frame in report.frames if frame.id == "landing-slab")
    finding = frame.findings[0]
    assert "excess heat 10.9 ± 3.3 W" in facts.meaning(finding, frame, "").replace("\u00a0", " ")
    for changed, doubtful in (
        (finding, replace(frame, claim="qualitative")),
        (replace(finding, flags=("automatic reference",)), frame),
    ):
        assert "excess heat" not in facts.meaning(changed, doubtful, "")


@pytest.mark.parametrize("name", ["house", "pump_station"])
def test_the_figures_count_each_result_once(name: str, sample_runs: Runs) -> None:
    report, _ = sample_runs[name]
    found = Counter(item.outcome for frame in report.frames for item in (*frame.findings, *frame.components))
    text = text_of(sample_runs, name)
    told = re.search(r"(\d+) to act on (\d+) not cleared(?: (\d+) cleared)?", text)
    assert told
    assert [int(number or 0) for number in told.groups()] == [found["act"], found["not cleared"], found["cleared"]]


def test_conditions_are_counted_as_the_table_lists_them(sample_runs: Runs) -> None:
    report, _ = sample_runs["house"]
    rows = Counter(row.check.verdict for row in condition_rows.rows(report.conditions_review))
    told = f"{rows['met']} met, {rows['not met']} not met, {rows['not recorded']} not recorded"
    assert f"Conditions: {told}" in text_of(sample_runs, "house")


def test_what_the_repair_list_names_is_not_listed_as_open_again(sample_runs: Runs) -> None:
    report, _ = sample_runs["pump_station"]
    listed = {(item.frame, item.key) for item in report.repairs}
    assert len(listed) > 40
    assert all((frame.id, point.key) not in listed for point in beside_repairs(report) for frame in point.frames)
    assert any("pixels" in point.what for point in beside_repairs(report))


def test_what_has_no_row_in_the_season_is_named(sample_runs: Runs) -> None:
    report, _ = sample_runs["house"]
    counted = {row.of for season in report.seasons for row in season.findings}
    left = [finding.id for frame in report.frames for finding in frame.findings if finding.id not in counted]
    assert left
    text = text_of(sample_runs, "house")
    note = text[text.index("anomalies have no row") - 4 : text.index("their sheets tell")]
    assert all(name in note for name in left)
    assert f"{len(left)} anomalies have no row" in note
    assert not any(name in note for name in counted)


def test_a_part_of_the_building_measured_where_something_stays_open_says_so(sample_runs: Runs) -> None:
    report, _ = sample_runs["house"]
    notes: dict[str, Any] = {
        line.frame: line.note for table in season_table.tables(report) for line in table.parts[1].lines if line.frame
    }
    assert notes["porch-glass"] == "measured in porch-glass, where something could not be cleared"
    assert [note for frame, note in notes.items() if frame != "porch-glass" and note] == []


def test_the_map_of_frames_follows_what_was_found(sample_runs: Runs) -> None:
    report, out = sample_runs["house"]
    html = page(report, kept(out), out)
    places = [html.index(f'<section id="{name}"') for name in ("summary", "frames", "season", "conditions")]
    assert places == sorted(places)


def test_a_reason_is_called_an_exception_only_where_some_frames_may_claim_less(sample_runs: Runs) -> None:
    report, _ = sample_runs["house"]
    sure = replace(report, frames=tuple(frame for frame in report.frames if frame.claim == "quantitative"))
    doubtful = replace(report, claim="qualitative", claim_reason="wind not recorded")
    assert [facts.why(one) for one in (report, sure, doubtful)] == ["exceptions", "why_claimed", "why_claimed"]
    assert "Exceptions: east-wall-sun not valid" in text_of(sample_runs, "house")
