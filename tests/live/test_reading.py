"""Readings in the page: none before somebody points, how sure one is, its profile, colour scale and fields."""

from __future__ import annotations

from dataclasses import replace
from math import hypot
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import tifffile
from live.browser import Browser
from live.hands import canvas_of, choose, figure_of, mouse, point
from live.pages import sheets
from live.runs import Run
from selenium.webdriver.common.action_chains import ActionChains
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys

from irsurvey import numbers
from irsurvey.assess.severity import LEAST_EMISSIVITY
from irsurvey.report import scale
from irsurvey.report.live.items import sureness

DRAWN = """
const { ink } = Live.sheets.get(given[0]);
const { data } = ink.getContext("2d").getImageData(0, 0, ink.width, ink.height);
return data.filter((value, k) => k % 4 === 3 && value > 0).length;
"""
SAID = """
const sheet = Live.sheets.get(given[0]);
await sheet.open();
return [sheet.readout.textContent.trim(), sheet.sure.textContent.trim()];
"""
AT = "const s = Live.sheets.get(given[0]); await s.open(); s.keep(given[1]); return s.sure.textContent.trim();"
RANGE = """
const sheet = Live.sheets.get(given[0]);
await sheet.open();
const texts = [];
const proto = CanvasRenderingContext2D.prototype;
const { fillText } = proto;
proto.fillText = function (text, ...rest) { texts.push(text); return fillText.call(this, text, ...rest); };
given[1].forEach((value, end) => { sheet.ends[end].value = value; });
sheet.rerange(sheet.ends, sheet.sliders);
await sheet.open();
proto.fillText = fillText;
return [texts, [...sheet.scale.node.querySelectorAll(".live-numbers span")].map((one) => one.textContent)];
"""
UNITS = {"display_units": "us", "decimal_comma": True}


def asked(run: Run, folder: Path) -> Path:
    """The page of the sheets of a run in °F with a decimal comma."""
    survey = run.report.survey["survey"]
    assert isinstance(survey, dict)
    shown = replace(run.report, survey={**run.report.survey, "survey": {**survey, **UNITS}})
    page = folder / "page.html"
    page.write_text(sheets(shown, run.tasks, run.out), encoding="utf-8")
    return page


def aside(browser: Browser) -> tuple[int, int]:
    """A place of the window beside the picture."""
    left, top = browser.run(
        "const box = document.querySelector('.live-ink').getBoundingClientRect(); return [box.left, box.top];"
    )
    return max(1, round(left) - 8), max(1, round(top) + 40)


def test_nothing_is_marked_and_nothing_read_before_somebody_points(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    frame = "hall-window"
    canvas_of(browser, frame)
    assert browser.run(SAID, frame) == ["", ""]
    assert browser.run(DRAWN, frame) == 0
    hint = figure_of(browser, frame).find_element(By.CSS_SELECTOR, ".live-hint").text
    assert hint.startswith("Point at the picture")
    mouse(browser, point(browser, frame, 40, 30))
    assert "column 40, row 30" in browser.run(SAID, frame)[0]
    assert browser.run(DRAWN, frame) > 0
    mouse(browser, aside(browser))  # gone again, and with it what it read
    assert browser.run(SAID, frame) == ["", ""]
    assert browser.run(DRAWN, frame) == 0


def test_what_was_pressed_is_kept_until_it_is_cleared(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    frame = "hall-window"
    canvas_of(browser, frame)
    mouse(browser, point(browser, frame, 40, 30), "press", "release")
    mouse(browser, point(browser, frame, 80, 60))
    assert "column 80, row 60" in browser.run(SAID, frame)[0]
    mouse(browser, aside(browser))
    assert "column 40, row 30" in browser.run(SAID, frame)[0]
    assert browser.run(DRAWN, frame) > 0
    buttons = figure_of(browser, frame).find_elements(By.CSS_SELECTOR, ".live-bar button")
    next(one for one in buttons if one.text == "Clear").click()
    assert browser.run(SAID, frame) == ["", ""]
    assert browser.run(DRAWN, frame) == 0


def test_the_focus_reads_and_leaves_with_what_the_keys_read(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    frame = "hall-window"
    canvas = canvas_of(browser, frame)
    browser.run("arguments; Live.sheets.get(given[0]).ink.focus();", frame)
    assert "column 160, row 120" in browser.run(SAID, frame)[0]
    browser.run("document.activeElement.blur();")
    assert browser.run(SAID, frame) == ["", ""]
    canvas.send_keys(Keys.ARROW_LEFT)
    browser.run("document.activeElement.blur();")
    assert "column 159, row 120" in browser.run(SAID, frame)[0]


def test_tools_are_called_by_what_they_draw(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    tools = figure_of(browser, "hall-window").find_elements(By.CSS_SELECTOR, ".live-choice")
    assert [one.text for one in tools] == ["Read", "Rectangle", "Outline", "Along a line"]
    choose(browser, "hall-window", "box")
    assert "rectangle" in figure_of(browser, "hall-window").find_element(By.CSS_SELECTOR, ".live-hint").text


def test_a_flux_has_three_significant_digits_at_most(browser: Browser, house: Run) -> None:
    """Rounded by Python's format of so many significant digits."""
    browser.open(house.page)
    values = [0.0, 0.04321, 4.4449, 9.996, -12.345, 99.96, 453.21, 1234.5, -98765.4]
    shown = browser.run("return given[0].map((value) => Page.rounded('flux', value, 3));", values)
    numbers_shown = [text.replace("−", "-").split("\u00a0")[0] for text in shown]
    for value, text in zip(values, numbers_shown, strict=True):
        assert float(text) == pytest.approx(float(f"{value:.3g}"), abs=0.05)  # no more than one place either
        assert len(text.strip("-").replace(".", "").lstrip("0").rstrip("0")) <= 3
    sheet = "const s = Live.sheets.get('hall-window'); await s.open(); s.keep([40, 30]); return s.readout.textContent;"
    flux = browser.run(sheet).split(" · ")[2].replace("−", "-").split("\u00a0")[0]
    exact = browser.run("return Live.sheets.get('hall-window').readingAt([40, 30]).flux")
    assert float(flux) == float(f"{exact:.3g}")


def test_how_sure_a_reading_is_is_what_the_report_says_of_the_likest_result(browser: Browser, pumps: Run) -> None:
    """Within a component, its own U (k = 2); far from every result in temperature or in emissivity, nothing."""
    browser.open(pumps.page)
    checked = 0
    for frame in (one for one in pumps.report.frames if one.claim == "quantitative"):
        for component in frame.components:
            if component.mean_c is None or component.mean_c.u is None or "saturated" in component.flags:
                continue
            data = browser.run("return Live.sheets.get(given[0]).data", frame.id)
            item = next(one for one in data["components"] if one["id"] == component.key)
            if not item["areas"] or len(item["areas"]["whole"]) > 1:
                continue
            t = tifffile.imread(pumps.out / "frames" / frame.id / "temperature.tif")
            x, y = (round(value) for value in item["areas"]["whole_at"])
            alike = abs(float(t[y, x]) - component.mean_c.value)
            told = browser.run(AT, frame.id, [x, y])
            likest = browser.run(
                "const s = Live.sheets.get(given[0]);"
                "return Frames.likest(s.view, s.readingAt(given[1]).temperature, given[2])?.name ?? null",
                frame.id,
                [x, y],
                item["areas"]["whole"][0]["optics"],
            )
            emissivity = data["scene"][data["optics_names"][item["areas"]["whole"][0]["optics"]]["emissivity"]]
            if emissivity < LEAST_EMISSIVITY:
                assert told == ""  # too reflective for a claim
            elif alike < 5 and likest == component.name:
                expected = numbers.number(2 * component.mean_c.u, 2)
                assert told.startswith(f"±\u00a0{expected}\u00a0K is what the report states for {component.name},")
                checked += 1
    assert checked > 5


def test_nothing_is_said_of_how_sure_where_nothing_fits(browser: Browser, pumps: Run) -> None:
    browser.open(pumps.page)
    body = """
    const sheet = Live.sheets.get("pump-one");
    await sheet.open();
    const zero = Live.shared.constants.zero_celsius;
    const { name, reported, areas } = sheet.data.components[1];
    const [{ optics }] = areas.whole;
    const at = (t, of) => Frames.likest(sheet.view, t + zero, of)?.name ?? "nothing";
    const t = reported.mean_c;
    sheet.keep(areas.whole_at.map(Math.round));
    const told = [sheet.sure.textContent];
    sheet.panel.fields[0].input.value = "0.8";
    sheet.panel.assume();
    await sheet.open();
    told.push(sheet.sure.textContent);
    return [name, at(t, optics), at(t + 40, optics), at(t, 99), told];
    """
    name, found, far, elsewhere, told = browser.run(body)
    assert (found, far, elsewhere) == (name, "nothing", "nothing")
    assert "±" in told[0]
    assert told[1].strip() == ""  # under other assumptions the report says nothing


def test_where_numbers_may_not_be_relied_on_none_is_said_to_be_sure(house: Run) -> None:
    frame = house.frame("bedroom-gable")
    mean = frame.findings[0].mean_c
    assert sureness(mean, replace(frame, claim="quantitative"), numbers.SI)["expanded"]
    assert sureness(mean, replace(frame, claim="qualitative"), numbers.SI) == {"expanded": None}
    assert sureness(None, frame, numbers.SI) == {"expanded": None}


def test_the_profile_has_a_start_a_length_and_the_reference(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    frame = "bedroom-gable"
    canvas_of(browser, frame)
    choose(browser, frame, "line")
    start, end = (30, 200), (250, 35)
    mouse(browser, point(browser, frame, *start), "press", point(browser, frame, *end), "release")
    plot = figure_of(browser, frame).find_element(By.CSS_SELECTOR, ".live-profile svg")
    ticks = plot.find_elements(By.CSS_SELECTOR, ".live-length")
    lengths = [float(one.text) for one in ticks]
    places = [float(one.get_attribute("x")) for one in ticks]
    assert lengths == [0, 100, 200]
    left, right = 62, 330
    length = hypot(end[0] - start[0], end[1] - start[1])
    assert places == pytest.approx([left + (right - left) * one / length for one in lengths], abs=0.06)
    dot = plot.find_element(By.CSS_SELECTOR, ".live-start")
    assert float(dot.get_attribute("cx")) == left
    words = [one.text for one in plot.find_elements(By.CSS_SELECTOR, "text")]
    assert "start" in words
    assert "pixels along the line" in words
    reading = browser.run("return Live.sheets.get(given[0]).reading()", frame)
    at = "const s = Live.sheets.get(given[0]); return [given[1], given[2]].map(([x, y]) => s.reference.at(x, y));"
    assert [reading["level"][0], reading["level"][-1]] == pytest.approx(browser.run(at, frame, start, end), abs=1e-9)
    level = plot.find_element(By.CSS_SELECTOR, ".live-level").get_attribute("d")
    drawn = [tuple(map(float, pair.split())) for pair in level.removeprefix("M").split("L")]
    values = np.array(reading["along"] + reading["level"])
    heights = 98 - (98 - 12) * (np.array(reading["level"]) - values.min()) / np.ptp(values)
    assert [y for _, y in drawn] == pytest.approx(heights.tolist(), abs=0.06)


def test_a_line_where_there_is_no_reference_has_none_drawn(browser: Browser, pumps: Run) -> None:
    browser.open(pumps.page)
    body = """
    const sheet = Live.sheets.get("pump-one");
    sheet.data.reference = null;
    await sheet.open();
    await sheet.refresh();
    sheet.chooseTool("line");
    sheet.points = [[5, 5], [30, 5]];
    sheet.isClosed = true;
    sheet.tell();
    return [".live-curve", ".live-level"].map((one) => sheet.profile.querySelectorAll(one).length);
    """
    assert browser.run(body) == [1, 0]


def test_the_start_of_a_line_is_marked_in_the_picture(browser: Browser, house: Run) -> None:
    """The word is written beside it, and the ink is where the line begins, not where it ends."""
    browser.open(house.page)
    body = """
    const sheet = Live.sheets.get("bedroom-gable");
    await sheet.open();
    const words = [];
    const proto = CanvasRenderingContext2D.prototype;
    const { fillText } = proto;
    proto.fillText = function (text, x, y) { words.push([text, x, y]); return fillText.call(this, text, x, y); };
    sheet.chooseTool("line");
    sheet.points = [[100, 120], [200, 120]];
    sheet.isClosed = true;
    sheet.tell();
    proto.fillText = fillText;
    const { factor } = sheet.data.picture;
    const pen = sheet.ink.getContext("2d");
    const dark = ([x, y]) => [...pen.getImageData((x + 0.5) * factor, (y + 0.5) * factor + 3, 1, 1).data];
    return [words, sheet.points.map(dark), factor];
    """
    words, (start, end), factor = browser.run(body)
    assert [word for word, *_ in words] == ["start"]
    assert abs(words[0][1] - 100 * factor) < 80
    assert start[3] == 255
    assert sum(start[:3]) < 100
    assert end != start


@pytest.mark.parametrize("ends", [("12", "20"), ("13.4", "16.1"), ("-5", "40"), ("0", "1200")])
def test_the_scale_has_the_numbers_that_the_picture_of_the_report_would_have(
    browser: Browser, house: Run, ends: tuple[str, str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Round numbers between the ends, and ≤ or ≥ where pixels lie beyond, by what scale.py letters on its own."""
    frame = "kitchen-bays"
    t = tifffile.imread(house.out / "frames" / frame / "temperature.tif")
    low, high = map(float, ends)
    said: list[str] = []
    letter = scale.lettering
    monkeypatch.setattr(scale, "lettering", lambda text, size: said.append(text) or letter(text, size))
    browser.open(house.page)
    drawn, below = browser.run(RANGE, frame, ends)
    height = browser.run("return Live.sheets.get(given[0]).data.picture.height", frame)
    beyond = bool((t < low - 0.01).any()), bool((t > high + 0.01).any())
    scale.strip(height, low, high, beyond)
    assert sorted(drawn) == sorted(said)
    assert len(drawn) > 4
    numbers_between = [float(text) for text in below[2:]]
    assert below[:2] == drawn[1:3]  # its ends are the same, the numbers between fewer
    assert len(numbers_between) < len(drawn) - 3
    assert all(low < number < high for number in numbers_between)


def test_a_round_step_is_that_of_the_picture(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    steps = [0.0012, 0.01, 0.034, 0.1, 0.3, 0.5, 0.9, 1.0, 1.7, 3.3, 5.1, 10.0, 47.0, 250.0]
    found = browser.run("return given[0].map(Scales.roundStep)", steps)
    assert found == pytest.approx([scale.round_step(step) for step in steps], rel=1e-12)


@pytest.mark.parametrize(("width", "is_shown"), [(320, True), (500, True), (1280, False)])
def test_a_narrow_window_has_a_scale_that_can_be_read(browser: Browser, house: Run, width: int, is_shown: bool) -> None:
    """Letters of 12 px at least, none over another, its ends said to who cannot see it."""
    metrics = {"width": width, "height": 640, "deviceScaleFactor": 1, "mobile": width < 600}
    browser.driver.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", metrics)
    try:
        browser.open(house.page)
        canvas_of(browser, "kitchen-bays")
        browser.run(RANGE, "kitchen-bays", ("12", "20"))
        body = """
        const { node } = Live.sheets.get("kitchen-bays").scale;
        const spans = [...node.querySelectorAll(".live-numbers span")];
        const boxes = spans.map((one) => one.getBoundingClientRect()).sort((a, b) => a.left - b.left);
        return { isShown: node.checkVisibility(), label: node.getAttribute("aria-label"),
          size: parseFloat(getComputedStyle(spans[0]).fontSize), left: boxes[0].left, right: boxes.at(-1).right,
          gaps: boxes.slice(1).map((box, k) => box.left - boxes[k].right) };
        """
        found = browser.run(body)
        assert found["isShown"] is is_shown
        assert found["label"] == "Colours from 12.0\u00a0°C to 20.0\u00a0°C"
        if is_shown:
            assert found["size"] >= 12
            assert min(found["gaps"]) > 3
            assert (found["left"] >= 0, found["right"] <= width) == (True, True)
    finally:
        browser.driver.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})


def test_fields_show_the_mark_of_the_survey_and_understand_both(browser: Browser, house: Run, tmp_path: Path) -> None:
    browser.open(asked(house, tmp_path))
    canvas_of(browser, "kitchen-bays")
    figure = figure_of(browser, "kitchen-bays")
    low, high = figure.find_elements(By.CSS_SELECTOR, '.live-colour-bar input[inputmode="decimal"]')
    figure.find_element(By.CSS_SELECTOR, "summary").click()
    fields: list[Any] = [low, high, *figure.find_elements(By.CSS_SELECTOR, ".live-fields input")]
    values = [one.get_attribute("value") for one in fields]
    assert not any("." in value for value in values)
    assert sum("," in value for value in values) >= 3
    for text in ("60,5", "60.5"):
        low.clear()
        low.send_keys(text)
        assert low.get_attribute("aria-invalid") is None
        assert browser.run("return Live.sheets.get('kitchen-bays').sliders[0].value") == "60.5"
    low.send_keys(Keys.ARROW_UP, Keys.ARROW_UP, Keys.ARROW_DOWN)
    assert low.get_attribute("value") == "60,6"
    kept = browser.run("return Live.sheets.get('kitchen-bays').range")
    assert kept[0] == pytest.approx((60.6 - 32) / 1.8 + 273.15, abs=1e-9)
    for text in ("5a", "1.2.3", "", "1e2"):
        low.clear()
        low.send_keys(text)
        assert low.get_attribute("aria-invalid") == "true", text
    figure.find_element(By.CSS_SELECTOR, ".live-back").click()
    assert low.get_attribute("value") == values[0]


def test_a_slider_writes_the_mark_of_the_survey(browser: Browser, house: Run, tmp_path: Path) -> None:
    browser.open(asked(house, tmp_path))
    canvas_of(browser, "kitchen-bays")
    figure = figure_of(browser, "kitchen-bays")
    low = figure.find_element(By.CSS_SELECTOR, '.live-colour-bar input[inputmode="decimal"]')
    slider = figure.find_element(By.CSS_SELECTOR, 'input[type="range"]')
    before = float(low.get_attribute("value").replace(",", "."))
    slider.send_keys(Keys.ARROW_RIGHT)
    assert low.get_attribute("value") == f"{before + 0.1:.1f}".replace(".", ",")


def test_an_assumption_may_be_typed_with_either_mark(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    canvas_of(browser, "bedroom-gable")
    figure = figure_of(browser, "bedroom-gable")
    figure.find_element(By.CSS_SELECTOR, "summary").click()
    field = figure.find_element(By.CSS_SELECTOR, ".live-fields input")
    for text in ("0,7", "0.7"):
        field.clear()
        field.send_keys(text)
        browser.run("await Live.sheets.get('bedroom-gable').open();")
        assert browser.run("return Live.sheets.get('bedroom-gable').panel.changes") == {"emissivity": 0.7}
        assert "Emissivity: 0.7 instead of 0.93" in figure.text
    field.send_keys(Keys.ARROW_UP)
    assert field.get_attribute("value") == "0.71"
    ActionChains(browser.driver).send_keys(Keys.TAB).perform()
    assert browser.driver.switch_to.active_element != field
