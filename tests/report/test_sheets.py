"""Sheets and tables on page and paper: what decides, what is told once, what is folded away and what is not."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

import pytest
from pypdf import PdfReader
from report.pages import Page

from irsurvey.model import Assessment, FrameTask, Report
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
