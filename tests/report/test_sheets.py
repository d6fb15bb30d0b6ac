"""Sheets and tables on page and paper: what decides, what is told once, what is folded away and what is not."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

import pytest
from pypdf import PdfReader
from report.pages import Page, section
from report.test_pdf import outline

from irsurvey import numbers, texts
from irsurvey.model import Assessment, ConditionCheck, FrameReport, FrameTask, Input, Maps, Report
from irsurvey.numbers import Style
from irsurvey.report import condition_rows, facts, frame_files, results
from irsurvey.report.html import page
from irsurvey.report.kept import kept
from irsurvey.report.pdf import write
from irsurvey.report.pdf.blocks import space
from irsurvey.report.pdf.layout import LENGTH, Layout
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


def pages_of(report: Report, tasks: Tasks, out: Path) -> list[tuple[str, str]]:
    """Each page of the paper: what stands at its head, and all of its text."""
    texts_ = (page.extract_text() for page in PdfReader(write(report, tasks, out)).pages)
    return [(text.partition("\n")[0], bare(text)) for text in texts_]


def with_inputs(frame: FrameReport) -> FrameReport:
    """The frame with as many inputs as a building has, seven of them but assumed."""
    assumed = (
        "total_emissivity view_angle_deg tilt_deg mean_radiant_c convection_factor atmosphere_relative size_of_source"
    )
    given = (
        "emissivity air_c relative_humidity_percent pressure_hpa distance_m indoor_air_c outdoor_air_c wind_m_s"
        " indoor_humidity_percent hours_since_sun hours_since_rain hours_furniture_clear irradiance_w_m2 u_value_w_m2k"
        " outdoor_24h_low_c outdoor_24h_high_c ifov_mrad camera_offset_k camera_gain reflected_c"
    )
    inputs = {key: Input(20.0 + place, 0.5, "default") for place, key in enumerate(assumed.split())}
    inputs |= {key: Input(40.0 + place, 0.5, "group") for place, key in enumerate(given.split())}
    return replace(frame, inputs=inputs)


def test_a_frame_with_nothing_found_is_one_page_with_all_its_inputs(
    report: Report, tasks: Tasks, wall_maps: Maps, tmp_path: Path
) -> None:
    clean = with_inputs(report.frames[1])
    frame_files.write(clean, wall_maps, tmp_path)
    shown = replace(report, frames=(clean,), checklist=(), seasons=())
    own = [text for _, text in pages_of(shown, tasks, tmp_path) if bare("Origin") in text or bare("How sure") in text]
    assert len(own) == 1
    assert bare("What it shows") in own[0]
    for key, entry in clean.inputs.items():
        assert bare(f"{texts.name(key)} {numbers.with_unit(numbers.stated(entry, key), key)}") in own[0], key
    assert bare("* its ± is assumed") in own[0]
    assert own[0].count(bare("assumed (default):")) == 1
    assert own[0].count(bare("stated (group)")) == 20


def test_in_the_sample_house_a_frame_with_nothing_found_is_one_page(
    sample_runs: dict[str, tuple[Report, Path]],
) -> None:
    """A picture is made smaller where that saves a page."""
    report, out = sample_runs["house"]
    reader = PdfReader(write(report, kept(out), out))
    starts = [(title, number) for level, title, number in outline(reader)]
    for frame in report.frames:
        if frame.status == "failed" or frame.findings or frame.components:
            continue
        place = next(at for at, (title, _) in enumerate(starts) if title.split("\u2002")[0] == frame.id)
        assert starts[place + 1][1] == starts[place][1] + 1, frame.id
    assert len(reader.pages) < 72


def test_only_a_value_that_somebody_gave_has_the_sign_of_an_assumed_uncertainty(
    report: Report, tasks: Tasks, tmp_path: Path
) -> None:
    inputs = {
        "emissivity": Input(0.93, 0.02, "survey", "default"),
        "air_c": Input(21.0, 0.5, "log", "log"),
        "distance_m": Input(2.0, 0.5, "default", "default"),
    }
    paper = on_paper(replace(report, frames=(replace(report.frames[1], inputs=inputs),)), tasks, tmp_path)
    assert bare("0.930 ± 0.040 * stated (survey)") in paper
    assert bare("21.0 ± 1.0 °C measured (logger)") in paper
    assert bare("2.0 ± 1.0 m assumed (default)") in paper


def test_a_short_section_stands_below_the_one_before() -> None:
    """As many mm as are left are enough for what needs no more."""
    layout = Layout()
    layout.turn("a")
    layout.add([space(LENGTH - 30)])
    assert layout.reach([space(29)]) == (0, pytest.approx(LENGTH - 1))
    assert layout.reach([space(20), space(20)]) == (1, pytest.approx(20))
    assert layout.pages[0].placed[1:] == []
    assert len(layout.pages) == 1


def test_assets_follow_the_table_before_them_where_they_fit(report: Report, tasks: Tasks, tmp_path: Path) -> None:
    told = [text for _, text in pages_of(report, tasks, tmp_path)]
    (assets,) = [text for text in told if bare("Every asset of the round") in text]
    assert any(bare(words) in assets for words in ("All components, the most", "All anomalies, the most"))
