"""Sheets and tables on page and paper: what decides, what is told once, what is folded away and what is not."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

import pytest
from pypdf import PdfReader
from report.pages import Page, section

from irsurvey.model import Assessment, ConditionCheck, FrameTask, Report
from irsurvey.numbers import Style
from irsurvey.report import condition_rows, facts, results
from irsurvey.report.html import page
from irsurvey.report.pdf import write
from irsurvey.report.pdf.parts import urgency
from irsurvey.report.pdf.runs import PAPER

Tasks = tuple[FrameTask, ...]


def bare(text: str) -> str:
    """A text without white space: where a line ends is for the paper to decide."""
    return re.sub(r"\s+", "", text)


def on_paper(report: Report, tasks: Tasks, out: Path) -> str:
    return bare("".join(page.extract_text() for page in PdfReader(write(report, tasks, out)).pages))


def result(html: str, place: str) -> Page:
    """One finding or component on its sheet."""
    match = re.search(rf'<section id="{place}".*?</section>', html, re.DOTALL)
    assert match, place
    return Page(match[0])


@pytest.fixture
def judged(switch_room: Report) -> Report:
    """One lug that the air would have repaired and its twins leave alone: the twins decide."""
    board = switch_room.frames[0]
    air = Assessment("of-air", "hot", 2, "Hot.", {}, "invented for this test", quantity="delta_ambient_k")
    twins = replace(air, criterion="of-twins", class_="alike", urgency=0, governs=True, quantity="delta_similar_k")
    lug = replace(board.components[0], assessments=(air, twins), urgency=0)
    return replace(switch_room, frames=(replace(board, components=(lug,), findings=()),), repairs=())


def test_what_does_not_decide_stands_below_what_does_and_is_an_outline(
    judged: Report, tasks: Tasks, tmp_path: Path
) -> None:
    told = result(page(judged, tasks, tmp_path), "component-S01-A")
    first, second = (
        "Decides of-twins: alike no action",
        "of-air: hot repair as time permits does not decide here: twins decide",
    )
    assert told.text.index(first) < told.text.index(second)
    asking = [one["class"] for one in told.all("span") if "u2" in (one.get("class") or "").split()]
    assert asking == ["chip u2 aside"]
    paper = on_paper(judged, tasks, tmp_path)
    assert paper.index(bare(first)) < paper.index(bare(second))
    filled, outline = urgency(2), urgency(2, aside=True)
    assert filled.box
    assert outline.box == replace(filled.box, fill=PAPER) != filled.box


def bounds(*requirements: str, verdict: str = "met", check: str = "air difference") -> tuple[ConditionCheck, ...]:
    return tuple(ConditionCheck("east", check, one, 20.0, verdict, "invented [M]") for one in requirements)


def test_bounds_of_several_elements_are_one_row_and_an_unmet_one_is_another() -> None:
    review = bounds("≥ 3/U = 14.3 K", "≥ 3/U = 8.57 K", "≥ 3/U = 1.07 K") + bounds("≥ 3/U = 25 K", verdict="not met")
    required = [(row.is_met, row.check.requirement, row.groups) for row in condition_rows.rows(review)]
    assert required == [(False, "≥ 3/U = 25 K", "east"), (True, "≥ 3/U = 1.07 to 14.3 K", "east")]
    us = Style(units="us", decimal_comma=True)
    assert condition_rows.rows(review, style=us)[1].check.requirement == "≥ 1,93 to 25,7\u00a0°F"
    apart = bounds("≥ 5 K", "≥ 2 K") + bounds("≥ 3 τ = 2 h") + bounds("≥ 3 τ = 6 h", check="steady air")
    assert len(condition_rows.rows(apart)) == 4


def test_what_is_met_is_folded_away_on_the_page_and_small_on_paper(
    report: Report, tasks: Tasks, tmp_path: Path
) -> None:
    review = (*bounds("≥ 10 K"), *bounds("≤ 5 m/s", verdict="not met", check="wind"))
    shown = replace(report, conditions_review=review)
    html = page(shown, tasks, tmp_path)
    told = section(html, "conditions")
    folded = re.search(r'<details class="folded met">.*?</details>', html, re.DOTALL)
    assert folded
    assert "Requirements that are met: 1" in folded[0]
    assert "air difference" in folded[0]
    assert "wind" not in folded[0]
    assert "wind east ≤ 5 m/s" in told.text
    paper = on_paper(shown, tasks, tmp_path)
    assert paper.index(bare("wind east ≤ 5 m/s")) < paper.index(bare("Requirements that are met: 1"))
    assert paper.index(bare("Requirements that are met: 1")) < paper.index(bare("air difference east ≥ 10 K"))


def test_the_marks_behind_sources_are_explained(report: Report, tasks: Tasks, tmp_path: Path) -> None:
    told = Page(page(report, tasks, tmp_path)).text
    paper = on_paper(report, tasks, tmp_path)
    for mark in ("[P] published", "[S] as a secondary", "[M] from memory", "[C] computed", "[house] a rule of our own"):
        assert mark in told
        assert bare(mark) in paper


def test_the_coolest_twin_is_called_the_reference(switch_room: Report, tasks: Tasks, tmp_path: Path) -> None:
    coolest, hot, _ = switch_room.frames[0].components
    assert results.is_coolest(coolest)
    assert not results.is_coolest(hot)
    assert not results.is_coolest(replace(coolest, similar_to="phase 2 lug"))  # alike to the last digit, by chance
    assert results.reading(coolest, "delta_similar_k", unit=False) == "is the reference"
    item = replace(switch_room.repairs[2], key=coolest.key, delta_k=coolest.delta_similar_k, urgency=0)
    shown = replace(switch_room, repairs=(item,))
    html = page(shown, tasks, tmp_path)
    paper = on_paper(shown, tasks, tmp_path)
    assert "is the reference" in section(html, "repairs").text
    assert "is the reference" in section(html, "components").text
    assert "above a similar part" not in section(html, "repairs").text
    assert paper.count(bare("is the reference")) == 4  # to look again, all components, its sheet; of neighbours


def test_a_table_of_modules_has_no_column_of_loads(switch_room: Report, tasks: Tasks, tmp_path: Path) -> None:
    board = switch_room.frames[0]
    modules = tuple(
        replace(part, load_a=None, rated_a=None, at_rated_load=None, delta_ambient_k=None, flags=())
        for part in board.components
    )
    assert results.columns(modules) == ("max_c", "mean_c", "delta_similar_k")
    assert results.columns(board.components)[0] == "load_a"
    assert results.columns(board.components)[-1] == "at_rated_load"
    shown = replace(switch_room, frames=(replace(board, components=modules, findings=()),), repairs=())
    sheet = page(shown, tasks, tmp_path).partition('<article id="frame-S01"')[2]
    table = re.search(r"Components in this frame</h3>.*?</table>", sheet, re.DOTALL)
    assert table
    heads = re.sub(r"<[^>]+>", " ", table[0].partition("</thead>")[0])
    assert "Spot maximum" in heads
    assert not any(word in heads for word in ("Load", "At rated load", "ambient,"))
    paper = on_paper(shown, tasks, tmp_path)
    assert bare("Group, phase Spot maximum, °C") in paper


@pytest.mark.parametrize(
    ("value", "told"), [(0.00018, "< 0.01"), (0.0, "0"), (0.0123, "0.012"), (0.98765, "0.99"), (-0.4, "−0.4")]
)
def test_a_cue_has_two_digits_and_nothing_below_a_hundredth(value: float, told: str) -> None:
    assert [cue.text for cue in facts.cues({"raggedness": value})] == [told]
    comma = facts.cues({"raggedness": value}, style=Style(decimal_comma=True))
    assert [cue.text for cue in comma] == [told.replace(".", ",")]


def test_cues_are_folded_on_the_page_and_a_small_line_on_paper(report: Report, tasks: Tasks, tmp_path: Path) -> None:
    html = page(report, tasks, tmp_path)
    folded = re.findall(r'<details class="folded cues">.*?</details>', html, re.DOTALL)
    found = report.frames[0].findings[0].indication
    assert found
    cues = facts.cues(found.evidence)
    assert cues
    assert "What it was read from" in folded[0]
    assert all(bare(f"{cue.name} {cue.text}") in bare(Page(folded[0]).text) for cue in cues)
    assert "Read from" not in html
    paper = on_paper(report, tasks, tmp_path)
    assert bare("Read from: " + "; ".join(f"{cue.name} {cue.text}" for cue in cues)) in paper
