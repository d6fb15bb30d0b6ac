"""The report as a run writes it, in a browser: tools and review on one page or on many, quiet, narrow, in its units."""

from __future__ import annotations

import shutil
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import tifffile
from live.browser import Browser
from live.pages import sheets
from live.runs import Run

from irsurvey.constants import ZERO_CELSIUS
from irsurvey.model import FrameReport, FrameTask, Report
from irsurvey.report import html
from irsurvey.report.html import IN_ONE_FILE

EXACT = 0.01  # K, what the page promises
PIXELS = """
const sheet = Live.sheets.get(given[0]);
await sheet.open();
return given[1].map((pixel) => sheet.readingAt(pixel).temperature);
"""
TEXT_AT = """
const sheet = Live.sheets.get(given[0]);
await sheet.open();
sheet.keep(given[1]);
return sheet.readout.textContent;
"""
UNITS = {"display_units": "us", "decimal_comma": True}


@pytest.fixture(params=["house", "pumps"])
def made(request: pytest.FixtureRequest) -> Run:
    """The run of either sample survey."""
    found: Run = request.getfixturevalue(request.param)
    return found


def stored(out: Path, frame: str) -> np.ndarray[Any, Any]:
    return np.asarray(tifffile.imread(out / "frames" / frame / "temperature.tif"), float)


def readings_are_those_of_the_map(browser: Browser, out: Path, frame: str, count: int = 20) -> None:
    t = stored(out, frame)
    rng = np.random.default_rng(len(frame))
    rows, columns = rng.integers(0, t.shape[0], count), rng.integers(0, t.shape[1], count)
    found = np.array(browser.run(PIXELS, frame, np.stack([columns, rows], axis=1).tolist()), float)
    assert found - ZERO_CELSIUS == pytest.approx(t[rows, columns], abs=EXACT, rel=0, nan_ok=True), frame


def reviewed(browser: Browser) -> int:
    """Begin the review; how many results have a form with all choices."""
    browser.one("#review-desk button").click()
    count = browser.run(
        "return [...document.querySelectorAll('.review[data-review]')]"
        ".filter((one) => one.querySelectorAll('input[type=radio]').length >= 4).length"
    )
    assert browser.one(".review-main").is_displayed()
    return int(count)


def results(frames: tuple[FrameReport, ...]) -> int:
    return sum(len(frame.findings) + len(frame.components) for frame in frames)


def many(run: Run, id_: str, out: Path) -> tuple[Report, tuple[FrameTask, ...]]:
    """The same frame so often that each has a page of its own."""
    frame, task = run.frame(id_), run.task(id_)
    ids = [f"{id_}.{number}" for number in range(IN_ONE_FILE + 1)]
    shutil.copytree(run.out / "frames" / id_, out / "frames" / ids[1])
    frames = tuple(
        replace(
            frame,
            id=one,
            findings=tuple(replace(f, id=f"{one}-{f.label}", key=f"{f.key}.{one}") for f in frame.findings),
            components=tuple(replace(c, key=f"{c.key}.{one}") for c in frame.components),
            pair=None,
        )
        for one in ids
    )
    shown = replace(run.report, frames=frames, assets=(), next_visit=(), repairs=(), seasons=(), review_status=())
    return shown, tuple(replace(task, id=one) for one in ids)


def in_units(run: Run, folder: Path) -> Path:
    """The report of a run in the units of the United States, with a decimal comma."""
    out = Path(shutil.copytree(run.out, folder / "out"))
    survey = run.report.survey["survey"]
    assert isinstance(survey, dict)
    return html.write(replace(run.report, survey={**run.report.survey, "survey": {**survey, **UNITS}}), run.tasks, out)


def test_the_report_reads_its_maps_is_reviewed_and_stays_quiet(browser: Browser, made: Run) -> None:
    page = made.out / "report.html"
    browser.open(page)
    analysed = [frame for frame in made.report.frames if frame.status != "failed"]
    assert browser.run("return [...Live.sheets.keys()]") == [frame.id for frame in analysed]
    for frame in analysed:
        readings_are_those_of_the_map(browser, made.out, frame.id)
    assert reviewed(browser) == results(made.report.frames) > 0
    assert browser.messages() == []
    assert browser.requests() == [page.as_uri()]
    browser.run("localStorage.clear()")


def test_the_report_fits_a_window_of_320_pixels(browser: Browser, made: Run) -> None:
    """With the tools open and a review begun."""
    metrics = {"width": 320, "height": 640, "deviceScaleFactor": 1, "mobile": True}
    browser.driver.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", metrics)
    try:
        browser.open(made.out / "report.html")
        body = """
        for (const sheet of Live.sheets.values()) {
          await sheet.open();
          sheet.tools.querySelector("details").open = true;
        }
        document.querySelector("#review-desk button").click();
        const root = document.documentElement;
        return [root.scrollWidth, root.classList.contains("reviewing")];
        """
        assert browser.run(body) == [320, True]
    finally:
        browser.driver.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})
        browser.run("localStorage.clear()")


def test_of_many_frames_each_page_has_its_own_tools_and_forms(browser: Browser, pumps: Run, tmp_path: Path) -> None:
    shown, tasks = many(pumps, "pump-one", tmp_path)
    first = html.write(shown, tasks, tmp_path)
    browser.open(first)
    assert browser.run("return Live.sheets.size") == 0
    assert browser.driver.find_elements("css selector", "script.live-data") == []
    assert browser.messages() == []
    one = shown.frames[1]
    page = tmp_path / "frames" / one.id / "sheet.html"
    browser.open(page)
    assert browser.run("return [...Live.sheets.keys()]") == [one.id]
    readings_are_those_of_the_map(browser, tmp_path, one.id)
    assert reviewed(browser) == results((one,)) > 0
    assert browser.messages() == []
    assert browser.requests() == [page.as_uri()]
    browser.run("localStorage.clear()")


def test_a_reading_is_in_the_units_of_the_survey(browser: Browser, house: Run, tmp_path: Path) -> None:
    browser.open(in_units(house, tmp_path))
    t = stored(house.out, "hall-window")
    for x, y in ((40, 30), (160, 120), (300, 200)):
        temperature, delta, *_ = browser.run(TEXT_AT, "hall-window", [x, y]).split(" · ")
        number, unit = temperature.split("\u00a0")
        assert unit == "°F"
        assert float(number.replace(",", ".").replace("−", "-")) == pytest.approx(1.8 * t[y, x] + 32, abs=0.015)
        assert delta.startswith("ΔT ")
        assert "°F to the reference" in delta
    assert "Btu/(h·ft²) leaving" in browser.run(TEXT_AT, "hall-window", [40, 30])
    assert browser.messages() == []


def test_a_what_if_in_other_units_is_the_same_what_if(browser: Browser, house: Run, tmp_path: Path) -> None:
    """An air temperature set in °F gives the temperatures that the same one in °C gives."""
    survey = house.report.survey["survey"]
    assert isinstance(survey, dict)
    asked = replace(house.report, survey={**house.report.survey, "survey": {**survey, **UNITS}})
    page = tmp_path / "page.html"
    page.write_text(sheets(asked, house.tasks, house.out), encoding="utf-8")
    body = """
    const sheet = Live.sheets.get("hall-window");
    await sheet.open();
    const field = sheet.panel.fields.find(({ assumption }) => assumption.name === "reflected");
    field.input.value = given[0];
    sheet.panel.assume();
    await sheet.open();
    return [sheet.readingAt([100, 100]).temperature, field.assumption.unit, field.assumption.reported,
      sheet.panel.banner.textContent, sheet.panel.table.textContent];
    """
    browser.open(house.page)
    celsius = browser.run(body, "15.25")
    browser.open(page)
    fahrenheit = browser.run(body, "59.45")  # 15.25 · 1.8 + 32
    assert fahrenheit[0] == pytest.approx(celsius[0], abs=1e-6)
    assert (celsius[1], fahrenheit[1]) == ("°C", "°F")
    assert fahrenheit[2].endswith("°F")
    assert "59,45 °F instead of" in fahrenheit[3]
    assert "°C" in celsius[4]
    assert "°C" not in fahrenheit[4]
    assert "°F" in fahrenheit[4]
