"""Other assumptions in the page give what a run with them gives, are marked, and leave no trace."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import tifffile
from live.browser import Browser
from live.pages import reduced
from live.runs import Run
from samples import HOUSE, PUMP_STATION
from selenium.webdriver.common.by import By

from irsurvey import pipeline, texts
from irsurvey.assess.criteria import class_of, criteria
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.model import FrameReport, FrameTask
from irsurvey.readers import read
from irsurvey.report.ranking import governing
from irsurvey.run import run

WITHIN = 0.02
"""Kelvin.  A temperature travels to half a hundredth, which a lower emissivity magnifies up to twice; merging the
values of an area costs less than 1 mK, the equations less than 1 mK; the rest is reserve, still below 0.05 K."""

ASSUME = """
const [id, changes] = given;
const sheet = Live.sheets.get(id);
await sheet.open();
for (const { assumption, input, text } of sheet.panel.fields) {
  input.value = assumption.name in changes ? String(changes[assumption.name]) : text;
}
sheet.panel.assume();
await sheet.open();
const word = (value) => (value === undefined || Number.isNaN(value) ? null : value);
return Assumptions.consequences(sheet.view).map((one) => ({ id: one.item.id, class: one.class, urgency: one.urgency,
  numbers: Object.fromEntries(Object.entries(one.numbers).map(([key, value]) => [key, word(value)])) }));
"""
MAP = """
const sheet = Live.sheets.get(given[0]);
const { rows, columns } = sheet.data;
const t = [];
for (let y = 0; y < rows; y += 1) for (let x = 0; x < columns; x += 1) t.push(Frames.temperatureAt(sheet.frame, x, y));
return t.map((value) => (Number.isNaN(value) ? null : value));
"""

OTHERWISE = (
    ("emissivity = 0.93", "emissivity = 0.72"),
    ("distance_m = 2.5\nreflected_c = 19.5", "distance_m = 25.0\nreflected_c = 12.0"),
    (
        "air_c = 20.0\nrelative_humidity_percent = 50\nindoor_relative",
        "air_c = 30.0\nrelative_humidity_percent = 85\nindoor_relative",
    ),
)
ASSUMED = {"emissivity": 0.72, "distance": 25.0, "reflected": 12.0, "air": 30.0, "relative_humidity": 85}
FRAMES = ("kitchen-bays", "bedroom-gable")


def analysed(run_: Run, id_: str, **values: float) -> FrameReport:
    """The frame analysed anew, some values of its scene [SI] being others."""
    task: FrameTask = run_.task(id_)
    others = [replace(task.scene[name], value=value) for name, value in values.items()]
    return pipeline.analyse(read(Path(task.path), task.read), replace(task, scene=task.scene.with_(*others)))[0]


@pytest.fixture(scope="module")
def otherwise(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The folder of a run of the house with other inputs in its survey file."""
    folder = tmp_path_factory.mktemp("otherwise")
    survey = reduced(HOUSE, folder / "survey", (*FRAMES, "living-foil", "north-foil"), *OTHERWISE)
    run(survey, folder / "out")
    return folder / "out"


@pytest.mark.parametrize("frame", FRAMES)
def test_temperatures_equal_a_run_with_these_inputs(browser: Browser, house: Run, otherwise: Path, frame: str) -> None:
    """All inputs changed at once: every pixel, and the mean over each finding's outline of the report."""
    browser.open(house.page)
    found = browser.run(ASSUME, frame, ASSUMED)
    t = np.asarray(tifffile.imread(otherwise / "frames" / frame / "temperature.tif"), float)
    page = np.array(browser.run(MAP, frame), float).reshape(t.shape) - ZERO_CELSIUS
    assert page == pytest.approx(t, abs=WITHIN, rel=0, nan_ok=True)
    labels = tifffile.imread(house.out / "frames" / frame / "findings.tif")
    findings = house.frame(frame).findings
    assert findings
    for finding, shown in zip(findings, found, strict=True):
        before = float(stored_mean(house, frame, labels == finding.label))
        mean = float(t[labels == finding.label].mean())
        assert abs(mean - before) > 0.3  # a what-if that changed nothing would prove nothing
        assert shown["numbers"]["mean_c"] == pytest.approx(mean, abs=WITHIN, rel=0)


def stored_mean(run_: Run, frame: str, inside: np.ndarray[Any, Any]) -> float:
    return float(tifffile.imread(run_.out / "frames" / frame / "temperature.tif")[inside].mean())


def test_components_equal_a_run_with_these_inputs(browser: Browser, pumps: Run, tmp_path: Path) -> None:
    """Outlines of components are drawn, so that all their numbers are those of the other run's report.json."""
    changes = (
        ("emissivity = 0.90", "emissivity = 0.80"),
        ("reflected_c = 22.0", "reflected_c = 27.0"),
        ("air_c = 20.0  ", "air_c = 16.0  "),
    )
    frames = ("pump-one", "incomer", "window-plate", "window-plate-through")
    survey = reduced(PUMP_STATION, tmp_path / "survey", frames, *changes)
    other = run(survey, tmp_path / "out")
    browser.open(pumps.page)
    checked = 0
    for id_ in ("pump-one", "incomer"):
        names = [one["name"] for one in browser.run("return Live.sheets.get(given[0]).data.assumptions", id_)]
        own = {name: 0.80 for name in names if name.startswith("emissivity:")}
        found = {one["id"]: one for one in browser.run(ASSUME, id_, own | {"reflected": 27.0, "air": 16.0})}
        frame = next(frame for frame in other.frames if frame.id == id_)
        for component in frame.components:
            shown = found[component.key]
            for key in ("max_c", "mean_c", "delta_similar_k", "delta_ambient_k"):
                estimate = getattr(component, key)
                if estimate is not None:
                    assert shown["numbers"][key] == pytest.approx(estimate.value, abs=WITHIN, rel=0), (id_, key)
                    checked += 1
            told = governing(component.assessments)
            assert shown["class"] == (told.class_ if told else None)
            assert shown["urgency"] == component.urgency
    assert checked >= 20


@pytest.mark.parametrize(
    ("id_", "emissivity", "reflected"),
    [("pump-one", 0.75, 26.0), ("heating", 0.94, 20.0), ("terminals", 0.75, 26.0), ("yard-isolator", 0.78, -6.0)],
)
def test_every_number_of_a_component_moves_as_in_the_package(
    browser: Browser, pumps: Run, id_: str, emissivity: float, reflected: float
) -> None:
    """Twins at other loads, limits, wind, spots too small: all that a component is judged by, and its class; while the
    coolest twin stays the same one, as the page says it does."""
    browser.open(pumps.page)
    own = dict.fromkeys({component.emissivity for component in pumps.task(id_).components}, emissivity)
    frame, before = analysed(pumps, id_, **own, reflected=reflected + ZERO_CELSIUS), pumps.frame(id_)
    assert [one.similar_to for one in frame.components] == [one.similar_to for one in before.components]
    found = browser.run(ASSUME, id_, own | {"reflected": reflected})
    for component, shown in zip(frame.components, found, strict=True):
        for key, value in shown["numbers"].items():
            estimate = getattr(component, key)
            if value is not None:  # of a rise of some kelvin 20 mK are some tenths of a percent
                within = 1.0 if key == "relative_difference_percent" else 2 * WITHIN
                assert value == pytest.approx(estimate.value, abs=within, rel=0), (component.name, key)
        told = governing(component.assessments)
        assert (shown["class"], shown["urgency"]) == (told.class_ if told else None, component.urgency)
    was = [component.max_c.value for component in before.components if component.max_c]
    assert np.abs(np.subtract(was, [shown["numbers"]["max_c"] for shown in found])).max() > 0.5


def test_classes_change_at_the_edge_where_the_package_changes_them(browser: Browser, house: Run) -> None:
    """The contrast of a cold bay grows as its emissivity is taken lower; each time the class by the page is that of the
    package, whose own edge lies between two of the values."""
    browser.open(house.page)
    name, seen = "kitchen-bays", []
    for emissivity in (0.98, 0.93, 0.85, 0.75, 0.65):
        finding = analysed(house, name, emissivity=emissivity, total_emissivity=emissivity).findings[-1]
        shown = browser.run(ASSUME, name, {"emissivity": emissivity})[-1]
        assert finding.delta_k is not None
        assert shown["numbers"]["delta_k"] == pytest.approx(finding.delta_k.value, abs=2 * WITHIN, rel=0)
        by_contrast = next(one for one in finding.assessments if one.criterion == "building-contrast")
        body = """
        const criterion = Live.shared.criteria["building-contrast"];
        return Assumptions.classOf(Math.abs(given[0]), criterion).name;
        """
        assert browser.run(body, shown["numbers"]["delta_k"]) == by_contrast.class_
        seen.append(by_contrast.class_)
    assert len(set(seen)) > 1, seen


def test_every_edge_of_every_criterion_is_on_the_side_the_package_has_it(
    browser: Browser, house: Run, pumps: Run
) -> None:
    for run_ in (house, pumps):
        browser.open(run_.page)
        own = tuple(dict.fromkeys(one for task in run_.tasks for one in task.own_criteria))
        for name in browser.run("return Object.keys(Live.shared.criteria)"):
            criterion = criteria(own)[name]
            values = [edge + step for edge in criterion.edges for step in (-1e-9, 0.0, 1e-9)]
            body = "return given[1].map((v) => Assumptions.classOf(v, Live.shared.criteria[given[0]]).name)"
            expected = [kind.name for value in values if (kind := class_of(value, criterion))]
            assert browser.run(body, name, values) == expected


def test_the_temperature_factor_equals_the_package(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    for values, changes in (
        ({"reflected": 283.15}, {"reflected": 10.0}),
        ({"emissivity": 0.8, "total_emissivity": 0.8}, {"emissivity": 0.8}),
    ):
        finding = analysed(house, "bedroom-gable", **values).findings[0]
        shown = browser.run(ASSUME, "bedroom-gable", changes)[0]
        for key in ("temperature_factor", "temperature_factor_at_0_25"):
            estimate = getattr(finding, key)
            assert shown["numbers"][key] == pytest.approx(
                estimate.value, abs=WITHIN / 20, rel=0
            )  # 20 K across the wall


def test_a_shiny_wall_may_be_a_mirror_and_gets_neither_class_nor_urgency(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    finding = analysed(house, "bedroom-gable", emissivity=0.55, total_emissivity=0.55).findings[0]
    told = governing(finding.assessments)
    assert told is None or told.class_ is None
    shown = browser.run(ASSUME, "bedroom-gable", {"emissivity": 0.55})[0]
    assert (shown["class"], shown["urgency"]) == (None, finding.urgency) == (None, None)


def test_a_shiny_component_gets_no_class_and_keeps_its_urgency(browser: Browser, pumps: Run) -> None:
    browser.open(pumps.page)
    names = {component.emissivity for component in pumps.task("pump-one").components}
    shiny = dict.fromkeys(names, 0.5)
    component = analysed(pumps, "pump-one", **shiny).components[1]
    shown = browser.run(ASSUME, "pump-one", shiny)[1]
    assert (shown["class"], shown["urgency"]) == (None, component.urgency)
    assert component.urgency == 4
    row = browser.one(f'article[data-frame="pump-one"] tr[data-item="{component.key}"]').get_attribute("textContent")
    assert "too reflective" in row


def test_modules_are_held_against_their_neighbours_as_the_package_does(browser: Browser, pumps: Run) -> None:
    browser.open(pumps.page)
    frame = analysed(pumps, "pv-row", reflected=263.15)
    found = browser.run(ASSUME, "pv-row", {"reflected": -10})
    checked = 0
    for component, shown in zip(frame.components, found, strict=True):
        if component.delta_neighbours_k is not None:
            value = component.delta_neighbours_k.value
            assert shown["numbers"]["delta_neighbours_k"] == pytest.approx(value, abs=2 * WITHIN, rel=0)
            checked += 1
    assert checked > 5


def test_what_is_not_worked_out_again_gets_no_class(browser: Browser, house: Run) -> None:
    """A criterion of a survey's own may judge any number; one that the page does not follow leaves the class open."""
    browser.open(house.page)
    body = """
    const { findings } = Live.sheets.get("bedroom-gable").data;
    findings[0].judged.forEach((one) => { one.quantity = "excess_heat_w"; one.magnitude = false; });
    findings[0].by.key = "excess_heat_w";
    findings[0].reported.excess_heat_w = 12;
    """
    browser.run(body)
    shown = browser.run(ASSUME, "bedroom-gable", {"emissivity": 0.8})[0]
    assert (shown["class"], shown["urgency"]) == (None, None)
    row = browser.one('article[data-frame="bedroom-gable"] tr[data-item="bedroom-gable-1"]')
    assert row.get_attribute("textContent").count("not worked out here") == 2
    assert browser.driver.find_elements(By.CSS_SELECTOR, ".live-changed") == []


def test_the_mark_of_a_what_if_covers_neither_the_hottest_nor_the_coldest_pixel(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    body = """
    const { ink, badge, frame, data } = Live.sheets.get(given[0]);
    const [stage, mark] = [ink, badge].map((node) => node.getBoundingClientRect());
    const scale = stage.width / data.picture.width * data.picture.factor;
    return [mark.width, Frames.extremes(frame).map(([x, y]) => {
      const [left, top] = [stage.left + x * scale, stage.top + y * scale];
      return left + scale > mark.left && left < mark.right && top + scale > mark.top && top < mark.bottom;
    })];
    """
    for frame in house.report.frames:
        browser.run(ASSUME, frame.id, {"emissivity": 0.8})
        width, covered = browser.run(body, frame.id)
        assert width > 20
        assert covered == [False, False]


def test_a_reference_nobody_confirmed_gives_no_class_under_any_assumption(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    assert house.frame("north-cavity").findings
    for shown in browser.run(ASSUME, "north-cavity", {"emissivity": 0.7}):
        assert (shown["class"], shown["urgency"]) == (None, None)


def test_a_what_if_is_marked_and_back_to_the_report_restores_everything(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    figure = browser.one('article[data-frame="bedroom-gable"]')
    browser.run("await Live.sheets.get('bedroom-gable').open();")
    figure.find_element(By.CSS_SELECTOR, "summary").click()
    before = (figure.text, *frozen(browser))
    field = figure.find_element(By.CSS_SELECTOR, ".live-fields input")
    field.clear()
    field.send_keys("0.7")
    browser.run("await Live.sheets.get('bedroom-gable').open();")
    told = figure.text
    assert "What if: these are not the results of the report." in told
    assert "Emissivity: 0.7 instead of 0.93" in told
    assert "clears nothing" in told
    assert figure.find_element(By.CSS_SELECTOR, ".live-badge").is_displayed()
    assert "live-what-if" in figure.find_element(By.CSS_SELECTOR, ".live").get_attribute("class")
    finding = house.frame("bedroom-gable").findings[0]
    assert finding.mean_c is not None
    cell = figure.find_element(By.CSS_SELECTOR, f'tr[data-item="{finding.id}"] td[data-column="temperature"]').text
    assert f"{finding.mean_c.value:.2f}" in cell
    assert frozen(browser) != before[1:]
    figure.find_element(By.CSS_SELECTOR, ".live-back").click()
    browser.run("await Live.sheets.get('bedroom-gable').open();")
    assert (figure.text, *frozen(browser)) == before


def frozen(browser: Browser) -> tuple[str, str]:
    """All temperatures and results of a frame as the page has them."""
    rows = "return JSON.stringify(Assumptions.consequences(Live.sheets.get('bedroom-gable').view))"
    return json.dumps(browser.run(MAP, "bedroom-gable")), browser.run(rows)


@pytest.mark.parametrize(
    ("name", "value"), [("emissivity", "1.2"), ("emissivity", "0"), ("relative_humidity", "130"), ("distance", "-3")]
)
def test_what_no_input_can_be_is_refused_and_changes_nothing(
    browser: Browser, house: Run, name: str, value: str
) -> None:
    browser.open(house.page)
    browser.run(ASSUME, "bedroom-gable", {name: value})
    state = browser.run(
        "const s = Live.sheets.get('bedroom-gable'); return [s.view.isStored, s.panel.faults.textContent];"
    )
    assert state[0] is True
    assert "a number" in state[1]
    invalid = browser.run(
        "return Live.sheets.get('bedroom-gable').panel.fields.filter((one) => one.input.getAttribute('aria-invalid'))"
        ".map((one) => one.assumption.name)"
    )
    assert invalid == [name]


def test_pixels_without_a_solution_are_counted_and_not_invented(browser: Browser, house: Run) -> None:
    """Surroundings taken as hot as 60 °C before a shiny wall leave nothing for the wall itself."""
    browser.open(house.page)
    browser.run(ASSUME, "bedroom-gable", {"emissivity": 0.15, "reflected": 60})
    assert np.isnan(np.array(browser.run(MAP, "bedroom-gable"), float)).all()
    told = browser.one('article[data-frame="bedroom-gable"] .live-banner').get_attribute("textContent")
    assert f"{240 * 320} more pixels" in told
    shown = browser.run("return Assumptions.consequences(Live.sheets.get('bedroom-gable').view)[0]")
    assert shown["class"] is None


def test_a_what_if_leaves_the_other_frames_and_the_data_alone(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    data = "return [...document.querySelectorAll('script[type=\"application/json\"]')].map((one) => one.textContent)"
    before = browser.run(data)
    browser.run(ASSUME, "bedroom-gable", {"emissivity": 0.5})
    assert browser.run(data) == before
    assert browser.run("const other = Live.sheets.get('kitchen-bays'); await other.open(); return other.view.isStored")


def test_emissivity_is_told_apart_from_that_of_parts_which_have_their_own(browser: Browser, pumps: Run) -> None:
    """Its field says what it changes, and a row that it leaves alone says why; nothing else does."""
    browser.open(pumps.page)
    sheet = "Live.sheets.get('pump-one')"
    labels = dict(browser.run(f"return {sheet}.panel.fields.map((one) => [one.assumption.name, one.assumption.label])"))
    assert labels["emissivity"] == "Emissivity, where a part has none of its own"
    assert labels["emissivity:pump 1 lugs"] == "Emissivity, pump 1 lugs"
    assert labels["reflected"] == "Reflected apparent temperature"
    notes = f"return [...{sheet}.panel.table.querySelectorAll('tbody tr')].map((row) => " + (
        "[row.dataset.item, row.querySelector('.live-own')?.textContent ?? null])"
    )
    own = "unchanged: an emissivity of its own"
    keys = [component.key for component in pumps.frame("pump-one").components]
    browser.run(ASSUME, "pump-one", {"emissivity": 0.7})
    assert dict(browser.run(notes)) == {**dict.fromkeys(keys, own), "reference": None}
    browser.run(ASSUME, "pump-one", {"emissivity": 0.7, "distance": 9})  # then something has changed
    assert set(dict(browser.run(notes)).values()) == {None}
    browser.run(ASSUME, "pump-one", {"emissivity:pump 1 lugs": 0.7})
    assert set(dict(browser.run(notes)).values()) == {None}


def test_a_frame_of_one_emissivity_asks_for_it_by_its_name(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    body = "return Live.sheets.get('bedroom-gable').panel.fields.map((one) => one.assumption.label)"
    assert browser.run(body)[0] == "Emissivity"


@pytest.mark.parametrize(("id_", "emissivity", "reflected"), [("busbars", 1.0, 22.0), ("pump-one", 0.8, 0.0)])
def test_beside_a_class_stands_what_its_urgency_asks_for_and_nothing_is_cleared(
    browser: Browser, pumps: Run, id_: str, emissivity: float, reflected: float
) -> None:
    """As the report says it, then as it follows; urgency 0 is to look again unless the report has cleared the part."""
    browser.open(pumps.page)
    chips = """
    const rows = Live.sheets.get(given[0]).panel.table.querySelectorAll("tbody tr[data-item]");
    return [...rows].map((row) => [row.dataset.item,
      [...row.querySelectorAll("td[data-column=class] .chip")].map((one) => [one.textContent, one.className])]);
    """
    components = pumps.frame(id_).components
    browser.run("await Live.sheets.get(given[0]).open();", id_)
    before = dict(browser.run(chips, id_))
    for component in components:
        assert [words for words, _ in before[component.key]] == [texts.to_do(component.urgency, component.outcome)]
    own = dict.fromkeys({component.emissivity for component in pumps.task(id_).components}, emissivity)
    found = {one["id"]: one for one in browser.run(ASSUME, id_, own | {"reflected": reflected})}
    after = dict(browser.run(chips, id_))
    moved = []
    for component in components:
        urgency = found[component.key]["urgency"]
        is_open = urgency == 0 and component.outcome != "cleared"
        kind = "weak" if is_open else f"u{urgency}"
        words = "look again" if is_open else texts.urgency(urgency)
        assert after[component.key][1] == [words, f"chip {kind}"]
        moved.append(urgency != component.urgency)
    assert any(moved)


def test_what_stays_as_in_the_report_is_said_while_a_what_if_holds(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    browser.run("const s = Live.sheets.get('bedroom-gable'); await s.open(); s.panel.node.open = true;")
    told = "stays as in the report, its histogram"
    figure = browser.one('article[data-frame="bedroom-gable"]')
    assert told not in figure.text
    browser.run(ASSUME, "bedroom-gable", {"emissivity": 0.8})
    assert told in figure.text
    browser.run("const s = Live.sheets.get('bedroom-gable'); s.reset(); await s.open();")
    assert told not in figure.text
