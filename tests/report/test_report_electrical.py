"""What report.html tells a maintenance crew: what to repair first, limits, load, wind, joints, trends, what is open."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import replace
from itertools import pairwise
from pathlib import Path

import jsonschema
import numpy as np
import pytest
from PIL import Image
from report.pages import Page, section
from report.test_report_html import HOSTILE, hostile, words

from irsurvey import texts
from irsurvey.model import ComponentReport, Estimate, FrameTask, Maps, Report
from irsurvey.report import component_facts, frame_files
from irsurvey.report.html import page
from irsurvey.report.json import plain, report_schema, text
from irsurvey.report.results import is_bound, load

Shown = Callable[[Report], str]


@pytest.fixture
def show(tasks: tuple[FrameTask, ...], board_maps: Maps, switch_room: Report, tmp_path: Path) -> Shown:
    """The page of a report as its text of HTML; frame S01 has its thermal picture and a photograph."""
    frame_files.write(switch_room.frames[0], board_maps, tmp_path)
    photo = tmp_path / "photo.jpg"
    Image.fromarray(np.full((300, 400, 3), 120, np.uint8)).save(photo)
    own = tuple(replace(task, photo_path=str(photo)) if task.id == "S01" else task for task in tasks)
    return lambda shown: page(shown, own, tmp_path)


def with_lug(report: Report, **changes: object) -> Report:
    """The report with its hot lug changed."""
    board = report.frames[0]
    first, hot, last = board.components
    hot = replace(hot, **changes)  # type: ignore[arg-type]
    return replace(report, frames=(replace(board, components=(first, hot, last)),))


def spaces(text: str) -> str:
    return text.replace("\u00a0", " ")


def test_what_to_repair_first_is_the_first_result_of_the_page(switch_room: Report, show: Shown) -> None:
    html = show(switch_room)
    headings = re.findall(r"<h[23][^>]*>(.*?)</h[23]>", html, re.DOTALL)
    assert [re.sub(r"<[^>]+>", "", heading).split("\n")[0].strip() for heading in headings[:2]] == [
        "Summary",
        "Repair list",
    ]
    assert "Repair first: phase 2 lug, Switch room, ground floor at once" in section(html, "summary").text
    assert "2 on the list, 1 more to look at again" in section(html, "summary").text
    assert re.findall(r'<li id="repair-(\d+)" value="(\d+)"', html) == [("1", "1"), ("2", "2")]


def test_an_item_tells_what_where_how_urgent_how_sure_and_what_to_do(switch_room: Report, show: Shown) -> None:
    text = spaces(section(show(switch_room), "repairs").text)
    assert "phase 2 lug at once Switch room, ground floor · asset FB-2 · frame S01, marked B" in text
    assert (
        "ΔT 36.4 ± 1.8 K above a similar part, phase 1 lug Spot maximum 71.5 ± 2.8 °C "
        "Load 200 A of 400 A rated (50 %) Class major discrepancy How sure > 99 % "
        "To do: Have the joint opened, cleaned and made again. "
        "Inspect again: after the repair, at 40 % of its rating or more" in text
    )
    assert "ΔT ≥ 47.2 K against its reference area" in text  # saturated: only a bound


def test_a_load_is_asked_for_only_where_it_is_what_heats_a_part(switch_room: Report) -> None:
    part = replace(switch_room.frames[0].components[1], flags=())
    assert spaces(load(part, 200.0, 400.0)) == "200 A of 400 A rated (50 %)"
    assert spaces(load(part, 200.0, None)) == "200 A, rating not recorded"
    assert spaces(load(part, None, 400.0)) == "not recorded; rated 400 A"
    assert load(part, None, None) == ""  # a module or an arrester
    assert load(replace(part, flags=("load unknown",)), None, None) == "not recorded"
    assert load(None, None, None) == "not recorded"


def test_what_is_only_not_cleared_stands_below_in_a_table_of_its_own(switch_room: Report, show: Shown) -> None:
    html = show(switch_room)
    text = spaces(section(html, "repairs").text)
    below = text[text.index("To look at again") :]
    assert "3 phase 3 bare bar cannot be classed frame S01, marked C – not recorded; rated 400 A" in below
    assert "Look again with matt tape on it." in below
    assert "phase 2 lug" not in below.split("What is not on this list")[0]
    only = show(replace(switch_room, repairs=switch_room.repairs[2:]))
    assert "Nothing that could be seen asks for repair." in section(only, "repairs").text
    assert "Repair first" not in only


def test_the_list_itself_says_who_may_act_on_it_and_what_it_does_not_say(switch_room: Report, show: Shown) -> None:
    text = section(show(switch_room), "repairs").text
    assert text.index("qualified persons only") < text.index("phase 2 lug")
    assert "arc-flash" in text
    assert "What is not on this list is not thereby sound" in text


def test_an_item_that_asks_for_nothing_but_is_not_cleared_is_never_labelled_no_action(
    switch_room: Report, show: Shown
) -> None:
    last = replace(switch_room.repairs[2], urgency=0)
    html = show(replace(switch_room, repairs=(last,)))
    assert "look again" in section(html, "repairs").text
    assert "no action" not in section(html, "repairs").text


def test_items_have_both_pictures_and_words_for_them(switch_room: Report, show: Shown) -> None:
    pictures = section(show(switch_room), "repairs").all("img")
    assert [picture["alt"] for picture in pictures[:2]] == [
        "Thermal picture of phase 2 lug, marked B, in frame S01",
        "Photograph of frame S01",
    ]
    assert len(pictures) == 4  # what is only to be looked at again has none
    assert all((picture["src"] or "").startswith("data:image/jpeg;base64,") for picture in pictures)


def test_what_is_on_the_list_is_not_listed_again(switch_room: Report, show: Shown) -> None:
    assert "Beside the repair list" not in show(switch_room)
    less = show(replace(switch_room, repairs=switch_room.repairs[:1]))
    beside = section(less, "open").text
    assert beside.index("S01-1") < beside.index("phase 3 bare bar")
    assert "phase 2 lug" not in beside.split("What may be claimed")[0]


def test_an_item_of_nothing_that_is_in_the_report_is_shown_without_a_link(switch_room: Report, show: Shown) -> None:
    lost = replace(switch_room.repairs[0], key="gone", frame="gone")
    html = show(replace(switch_room, repairs=(lost,)))
    assert "phase 2 lug" in section(html, "repairs").text
    assert section(html, "repairs").all("a") == []


def test_what_was_not_inspected_stands_in_figures_in_words_and_in_the_table(switch_room: Report, show: Shown) -> None:
    html = show(switch_room)
    assert "1 not inspected" in section(html, "summary").text
    assert "FB-3, Feeder board 3, Switch room: blocked by scaffolding" in section(html, "open").text
    assert "not inspected blocked by scaffolding" in section(html, "assets").text


def test_a_component_tells_its_limit_what_is_allowed_now_and_both_margins(switch_room: Report, show: Shown) -> None:
    text = spaces(section(show(switch_room), "component-S01-B").text)
    assert "Load 200 A of 400 A rated (50 %) Rise at rated load 110 to 150 K above a similar part; 140 to 180 K" in text
    assert "Absolute limit 90 °C, invented/bolted-bare 50 K above ambient air at rated load; invented for" in text
    assert "Allowed now 32.1 to 35.9 °C At this load" in text
    assert "Spot maximum minus its limit −18.5 ± 2.8 K Below it at this moment" in text
    assert "Spot maximum minus what is allowed now 35.6 ± 3.2 K Above it" in text


@pytest.mark.parametrize(
    ("margin", "flags", "told"),
    [
        (Estimate(5.0, 1.0), (), "above"),
        (Estimate(1.9, 1.0), (), "near"),
        (Estimate(-1.9, 1.0), (), "near"),
        (Estimate(-5.0, 1.0), (), "below"),
        (Estimate(-5.0, None), (), "near"),  # how far it may lie from its reading is not known
        (Estimate(-5.0, 1.0), ("saturated",), "bound"),
        (Estimate(-5.0, 1.0), ("size-limited",), "bound"),
        (Estimate(5.0, 1.0), ("size-limited",), "above"),
    ],
)
def test_a_margin_below_a_limit_is_called_that_only_where_it_surely_is(
    switch_room: Report, margin: Estimate, flags: tuple[str, ...], told: str
) -> None:
    part = replace(switch_room.frames[0].components[1], above_limit_k=margin, flags=flags)
    (fact,) = [fact for fact in component_facts.of_component(part) if fact.name == texts.name("above_limit_k")]
    assert fact.note == texts.remark(told) != ""
    assert fact.text.startswith("≥") == bool(flags)


def test_wind_shows_both_numbers_and_that_it_may_only_raise(switch_room: Report, show: Shown) -> None:
    text = spaces(section(show(switch_room), "component-S01-B").text)
    assert (
        "ΔT over similar, brought to 1 m/s of wind 59.7 ± 8.8 K 36.4 ± 1.8 K as measured; "
        "a correction for wind may raise a class, never lower it." in text
    )
    assert "ΔT over ambient air, brought to 1 m/s of wind 75 ± 10 K 45.5 ± 2.8 K as measured" in text


def test_the_heat_of_a_joint_is_an_estimate_and_its_resistance_a_lower_bound(switch_room: Report, show: Shown) -> None:
    text = spaces(section(show(switch_room), "component-S01-B").text)
    heat = text[text.index("Heat of the joint") : text.index("Trend")]
    assert "Taken for a cylinder" in heat
    assert "Excess resistance at least 42 ± 13 µΩ, an estimate" in heat
    assert "at least 16.9 ± 5.0 mV, an estimate" in heat
    assert "at least 59 ± 18 kWh, an estimate" in heat
    assert "Heat given off by its surface 8.6 ± 2.2 W, an estimate" in heat
    assert heat.count("±") == heat.count("an estimate") == 6
    bound = with_lug(switch_room, flags=("saturated",)).frames[0].components[1]
    told = {fact.name: fact.text for fact in component_facts.of_joint(bound)}
    assert told["Heat given off by its surface"].startswith("at least 8.6")
    assert told["Film coefficient of convection"].startswith("7.2")


def test_a_trend_has_a_drawing_a_slope_with_its_interval_and_whether_it_is_real(
    switch_room: Report, show: Shown
) -> None:
    html = show(switch_room)
    text = spaces(section(html, "component-S01-B").text)
    assert "Slope of its rise 24.6 ± 8.2 K/year 17 to 33 K/year (95 %): it rises." in text
    assert "Change since the last survey 62 ± 19 K More than its uncertainty explains." in text
    assert html.count('<circle class="point"') == 4
    part = switch_room.frames[0].components[1]
    assert part.trend
    html = show(with_lug(switch_room, trend=replace(part.trend, is_significant=False, points=())))
    assert "does not prove that there is none" in section(html, "component-S01-B").text
    assert "<circle" not in html


@pytest.mark.parametrize(
    ("low", "high", "told"), [(0.1, 3.0, "rises"), (-3.0, -0.1, "falls"), (-0.1, 3.0, "may be none"), (None, None, "")]
)
def test_a_slope_says_which_way_only_where_its_interval_does(
    switch_room: Report, low: float | None, high: float | None, told: str
) -> None:
    found = switch_room.frames[0].components[1].trend
    assert found
    slope = component_facts.of_trend(replace(found, slope_low_k_per_year=low, slope_high_k_per_year=high))[0]
    assert told in slope.note
    assert bool(slope.note) == bool(told)


def test_what_a_component_is_consistent_with_and_its_neighbours_are_told(switch_room: Report, show: Shown) -> None:
    text = spaces(section(show(switch_room), "component-S01-B").text)
    assert "Indication. Consistent with a joint of high resistance. Verify by a resistance test." in text
    assert "ΔT over its neighbours, brought to 1000 W/m² 18.6 ± 1.7 K" in text
    assert "Relative difference 80.0 ± 4.2 %" in text


def test_a_component_nobody_drew_is_marked_wherever_it_stands(switch_room: Report, show: Shown) -> None:
    html = show(switch_room)
    assert html.count('<span class="chip weak">found, not drawn</span>') == 3  # table of all, of the frame, its sheet
    assert "nobody has said what it is" in section(html, "component-S01-C").text


def test_populations_tell_from_where_on_a_part_stands_out(switch_room: Report, show: Shown) -> None:
    populations = section(show(switch_room), "populations")
    assert "feeder lugs 12 14.8 median and spread S01 phase 2 lug" in populations.text
    assert "links 6 8.88 mean and spread none" in populations.text
    assert [link["href"] for link in populations.all("a")] == ["#component-S01-B"]


def test_where_nothing_applies_nothing_is_shown(report: Report, tasks: tuple[FrameTask, ...], tmp_path: Path) -> None:
    body = page(report, tasks, tmp_path).split("</style>")[1]
    for word in (
        "repairs",
        "Repair",
        "populations",
        "Heat of the joint",
        "Trend",
        "Absolute limit",
        "brought to 1 m/s",
    ):
        assert word not in body
    assert not [part for frame in report.frames for part in frame.components if component_facts.of_joint(part)]
    assert component_facts.of_component(report.frames[3].components[0]) == ()


@pytest.mark.parametrize(
    "said",
    [
        "For qualified persons only",
        "arc-flash",
        "Covers are opened",
        "moment of the examination only",
        "normal picture does not prove",
        "Local codes and licensed practice decide",
        "skin temperature of a closed enclosure",
        "looked at again under load",
    ],
)
def test_every_electrical_report_carries_its_cautions_once(switch_room: Report, show: Shown, said: str) -> None:
    # with and without the same list in report.json
    for told in ((), texts.cautions_for(switch_room.frames, has_season=False)):
        text = section(show(replace(switch_room, cautions=told)), "cautions").text
        assert text.count(said) == 1


def test_cautions_of_joints_and_trends_come_where_they_are_told_of(switch_room: Report, report: Report) -> None:
    told = texts.cautions_for(switch_room.frames, has_season=False)
    assert any("resistance is a lower bound" in caution for caution in told)
    assert any("A trend compares" in caution for caution in told)
    less = texts.cautions_for((report.frames[3],), has_season=False)
    assert set(told) - set(less) == set(texts.cautions(["joint", "trend"])) - set(texts.cautions([]))
    assert set(texts.cautions_for(report.frames, has_season=True)) >= set(texts.cautions(["moisture", "season"]))


def test_the_page_of_a_switch_room_is_whole_and_can_be_heard(switch_room: Report, show: Shown) -> None:
    html = show(switch_room)
    whole = Page(html)
    assert whole.open == []
    ids = [attributes["id"] for _, attributes in whole.elements if "id" in attributes]
    assert len(ids) == len(set(ids))
    own = {link["href"] for link in whole.all("a")} - {"#frame-F01"}  # an asset seen in a frame this report has not
    assert own <= {f"#{identifier}" for identifier in ids}
    levels = [int(tag[1]) for tag, _ in whole.elements if re.fullmatch(r"h[1-6]", tag)]
    assert all(after <= before + 1 for before, after in pairwise(levels))
    assert all(picture["alt"] for picture in whole.all("img"))


@pytest.mark.parametrize("attack", HOSTILE, ids=lambda text: text[:20])
def test_whatever_is_written_into_a_repair_list_is_shown_as_text(switch_room: Report, show: Shown, attack: str) -> None:
    expected = {tag for tag, _ in Page(show(switch_room)).elements}
    attacked = Page(show(hostile(switch_room, attack)))
    assert attacked.open == []
    assert {tag for tag, _ in attacked.elements} <= expected
    assert words(re.sub(r"[\x00-\x08\x1b]", "\ufffd", attack)).strip()[:100] in attacked.text
    for tag, attributes in attacked.elements:
        assert not [name for name in attributes if name.startswith("on")], tag


def test_a_report_of_a_switch_room_is_valid_under_the_schema(switch_room: Report) -> None:
    validator = jsonschema.Draft202012Validator(report_schema())
    contents = plain(switch_room)
    validator.validate(contents)
    assert contents["repairs"][0]["class"] == "major discrepancy"
    contents["repairs"][0]["delta_basis"] = "guess"
    contents["populations"][0]["how"] = "mode"
    assert len(list(validator.iter_errors(contents))) == 2
    assert text(switch_room) == text(switch_room)


def test_every_number_of_a_switch_room_has_its_meaning_in_the_schema() -> None:
    definitions = report_schema()["$defs"]
    for record in ("RepairItem", "PopulationAlarm", "LimitReport", "JointHeat", "TrendReport"):
        numbers = [key for key in definitions[record]["properties"] if key.rpartition("_")[2] in ("k", "w", "c", "mv")]
        for key in numbers:
            assert definitions[record]["properties"][key].get("description"), (record, key)
    assert definitions["JointHeat"]["properties"]["excess_resistance_uohm"]["description"].endswith("in µΩ")
    assert definitions["TrendReport"]["properties"]["slope_k_per_year"]["description"].endswith("in K/year")


def test_of_a_part_too_small_every_number_of_its_spot_is_a_bound(switch_room: Report) -> None:
    part: ComponentReport = replace(switch_room.frames[0].components[1], flags=("size-limited",))
    of_twins = ("delta_similar_k", "delta_similar_in_calm_k", "relative_difference_percent")
    for key in ("max_c", "delta_ambient_k", "delta_ambient_in_calm_k", "above_limit_k", "above_allowed_k", *of_twins):
        assert is_bound(part, key), key
    both = replace(part, flags=("size-limited", "twin size-limited"))
    assert not [key for key in of_twins if is_bound(both, key)]
