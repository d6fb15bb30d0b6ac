"""The tables of all results in a browser: put in order, narrowed, by mouse and by keyboard, whole on paper."""

from __future__ import annotations

import json
from base64 import b64decode
from io import BytesIO
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from live.browser import Browser
from live.runs import Run
from pypdf import PdfReader
from selenium.webdriver.common.action_chains import ActionChains
from selenium.webdriver.common.keys import Keys
from selenium.webdriver.support.ui import Select

pytestmark = pytest.mark.browser

SHOWN = "return [...document.querySelectorAll(given[0])].filter((row) => row.checkVisibility())"
NARROW = {"width": 320, "height": 640, "deviceScaleFactor": 1, "mobile": True}
TABLES = {"findings": "#anomalies", "components": "#components"}
KEYS = {"findings": "finding", "components": "component"}
IDS = {"findings": "id", "components": "key"}


def stored(out: Path, kind: str) -> list[dict[str, Any]]:
    """All findings or components as report.json has them."""
    frames = json.loads((out / "report.json").read_text("utf-8"))["frames"]
    return [item for frame in frames for item in frame[kind]]


def shown(browser: Browser, kind: str) -> list[str]:
    """The rows that can be seen, from the top."""
    rows = f"{TABLES[kind]} tr[data-{KEYS[kind]}]"
    found = browser.run(f"{SHOWN}.map((row) => row.dataset.{KEYS[kind]})", rows)
    return [str(name) for name in found]


def number(item: dict[str, Any], key: str) -> float:
    return float(item[key]["value"]) if item[key] else np.nan


def in_numpy_order(items: list[dict[str, Any]], kind: str, key: str, first: list[str], sign: int) -> list[str]:
    """By number, what has none last, equal ones in the order of the report."""
    by_name = {item[IDS[kind]]: item for item in items}
    values = np.array([number(by_name[name], key) for name in first])
    return [first[at] for at in np.argsort(sign * values, kind="stable")]  # numpy sorts NaN last


def heading(browser: Browser, kind: str, name: str) -> Any:
    buttons = browser.driver.find_elements("css selector", f"{TABLES[kind]} thead button")
    return next(one for one in buttons if one.text.startswith(name))


def direction(browser: Browser, kind: str) -> list[str | None]:
    body = "return [...document.querySelectorAll(given[0])].map((head) => head.getAttribute('aria-sort'))"
    return list(browser.run(body, f"{TABLES[kind]} thead th"))


def count(browser: Browser, kind: str) -> str:
    return browser.one(f"{TABLES[kind]} [aria-live]").text


def opened(browser: Browser, run: Run) -> None:
    browser.open(run.out / "report.html")


def is_quiet(browser: Browser, run: Run) -> None:
    assert browser.messages() == []
    assert browser.requests() == [(run.out / "report.html").as_uri()]


@pytest.mark.parametrize(
    ("fixture", "kind", "name", "key"),
    [
        ("house", "findings", "Mean ΔT", "mean_delta_k"),
        ("house", "findings", "Area", "area_m2"),
        ("house", "findings", "Excess heat", "excess_heat_w"),
        ("pumps", "components", "ΔT over similar", "delta_similar_k"),
        ("pumps", "components", "Spot maximum", "max_c"),
    ],
)
def test_a_heading_sorts_by_the_unrounded_number_both_ways(
    browser: Browser, request: pytest.FixtureRequest, fixture: str, kind: str, name: str, key: str
) -> None:
    run: Run = request.getfixturevalue(fixture)
    items = stored(run.out, kind)
    opened(browser, run)
    first = shown(browser, kind)
    assert sorted(first) == sorted(item[IDS[kind]] for item in items)
    button = heading(browser, kind, name)
    for sign, word in ((1, "ascending"), (-1, "descending"), (1, "ascending")):
        button.click()
        assert shown(browser, kind) == in_numpy_order(items, kind, key, first, sign)
        assert [one for one in direction(browser, kind) if one] == [word]
    assert button.find_element("xpath", "..").get_attribute("aria-sort") == "ascending"
    assert browser.driver.switch_to.active_element == button
    browser.one(f"{TABLES[kind]} .live-rows button").click()
    assert shown(browser, kind) == first
    assert set(direction(browser, kind)) == {None}
    is_quiet(browser, run)


def test_what_has_no_number_comes_last_both_ways(browser: Browser, pumps: Run) -> None:
    items = {item["key"]: item for item in stored(pumps.out, "components")}
    without = {key for key, item in items.items() if item["delta_similar_k"] is None}
    assert 0 < len(without) < len(items)
    opened(browser, pumps)
    for _ in range(2):
        heading(browser, "components", "ΔT over similar").click()
        assert set(shown(browser, "components")[-len(without) :]) == without


def test_text_sorts_by_its_letters_and_by_the_numbers_in_it(browser: Browser, pumps: Run) -> None:
    opened(browser, pumps)
    heading(browser, "components", "Component").click()
    modules = [name for name in shown(browser, "components") if name.startswith("pv-row")]
    ranks = [int(name.rsplit(" ", 1)[1]) for name in modules]
    assert len(ranks) >= 10  # so that text alone would put 10 before 2
    assert ranks == sorted(ranks)


def test_words_keep_the_rows_that_have_all_of_them(browser: Browser, house: Run) -> None:
    opened(browser, house)
    everything = shown(browser, "findings")
    field = browser.one("#anomalies input[type=search]")
    field.send_keys("HALL-window colder")
    kept = [name for name in everything if name.startswith("hall-window")]
    assert 0 < len(kept) < len(everything)
    assert shown(browser, "findings") == kept
    assert count(browser, "findings") == f"{len(kept)} of {len(everything)} shown"
    field.send_keys(" nowhere")
    assert shown(browser, "findings") == []
    assert count(browser, "findings") == f"0 of {len(everything)} shown"
    field.send_keys(Keys.CONTROL, "a", Keys.NULL, Keys.DELETE)
    assert shown(browser, "findings") == everything
    is_quiet(browser, house)


@pytest.mark.parametrize(("fixture", "kind"), [("house", "findings"), ("pumps", "components")])
def test_every_urgency_and_outcome_can_be_chosen(
    browser: Browser, request: pytest.FixtureRequest, fixture: str, kind: str
) -> None:
    run: Run = request.getfixturevalue(fixture)
    items = {item[IDS[kind]]: item for item in stored(run.out, kind)}
    urgencies = {0: "no action", 1: "investigate", 2: "repair as time permits", 3: "watch closely until repaired"}
    urgencies |= {4: "at once"}

    def asks(item: dict[str, Any]) -> str:
        if item["urgency"] == 0 and item["outcome"] == "not cleared":
            return "look again"
        return "cannot be classed" if item["urgency"] is None else urgencies[item["urgency"]]

    opened(browser, run)
    everything = shown(browser, kind)
    select = Select(browser.one(f"{TABLES[kind]} .live-rows select"))
    offered = [option.text for option in select.options]
    assert set(offered) == {"any"} | {asks(item) for item in items.values()} | {
        item["outcome"] for item in items.values()
    }
    assert len(offered) >= 4
    for text in offered[1:]:
        select.select_by_visible_text(text)
        kept = [name for name in everything if text in (asks(items[name]), items[name]["outcome"])]
        assert shown(browser, kind) == kept
        assert count(browser, kind) == f"{len(kept)} of {len(everything)} shown"
    is_quiet(browser, run)


def test_all_of_it_works_by_keyboard(browser: Browser, house: Run) -> None:
    opened(browser, house)
    items, first = stored(house.out, "findings"), shown(browser, "findings")
    browser.run("document.querySelector('#anomalies input[type=search]').focus()")

    def press(*keys: str) -> None:
        ActionChains(browser.driver).send_keys(*keys).perform()

    press("hall-window")
    kept = [name for name in first if name.startswith("hall-window")]
    assert shown(browser, "findings") == kept
    press(Keys.ESCAPE)
    assert shown(browser, "findings") == first
    press(Keys.TAB, "not")  # the choice, by its first letters
    assert browser.run("return document.activeElement.value") == "outcome:not cleared"
    assert 0 < len(shown(browser, "findings")) < len(first)
    press(Keys.TAB, Keys.SPACE)  # all rows again
    assert shown(browser, "findings") == first
    press(Keys.TAB, Keys.TAB, Keys.TAB, Keys.ENTER)  # the third heading
    assert browser.driver.switch_to.active_element == heading(browser, "findings", "Mean ΔT")
    assert shown(browser, "findings") == in_numpy_order(items, "findings", "mean_delta_k", first, 1)
    press(Keys.SPACE)
    assert shown(browser, "findings") == in_numpy_order(items, "findings", "mean_delta_k", first, -1)
    assert browser.run("return getComputedStyle(document.activeElement).outlineStyle") == "solid"
    assert count(browser, "findings").endswith("shown, by “Mean ΔT, K”, falling")
    is_quiet(browser, house)


def test_each_control_has_a_name_and_can_be_read(browser: Browser, house: Run) -> None:
    """Contrast by the equations of WCAG 2.2 (relative luminance, 4.5 to 1 for text)."""
    opened(browser, house)
    heading(browser, "findings", "Area").click()
    for selector, name in (("input[type=search]", "Rows with the words"), ("select", "Urgency or outcome")):
        assert browser.one(f"#anomalies .live-rows {selector}").accessible_name == name
    assert heading(browser, "findings", "Area").accessible_name == "Area, m²"  # without its arrow
    body = """
    const seen = document.querySelectorAll(given[0]);
    return [...seen].map((node) => [getComputedStyle(node).color, node.getBoundingClientRect().height]);
    """
    found = browser.run(body, "#anomalies thead button, #anomalies .live-rows :is(label, input, select, button, p)")
    assert len(found) == 9 + 6
    for colour, height in found:
        channels = np.array([float(part) for part in colour.removeprefix("rgb(").rstrip(")").split(",")]) / 255
        linear = np.where(channels <= 0.04045, channels / 12.92, ((channels + 0.055) / 1.055) ** 2.4)
        assert 1.05 / (linear @ [0.2126, 0.7152, 0.0722] + 0.05) >= 4.5  # on white
        assert height >= 20
    buttons = browser.run(body, "#anomalies :is(thead button, .live-rows :is(input, select, button))")
    assert min(height for _, height in buttons) >= 24  # WCAG 2.2, target size


def test_it_fits_a_window_of_320_pixels(browser: Browser, house: Run, pumps: Run) -> None:
    """Where rows are blocks, the headings still stand above them."""
    browser.driver.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", NARROW)
    try:
        for run, kind, key in ((house, "findings", "mean_delta_k"), (pumps, "components", "max_c")):
            opened(browser, run)
            first = shown(browser, kind)
            button = heading(browser, kind, {"findings": "Mean ΔT", "components": "Spot maximum"}[kind])
            button.click()
            assert shown(browser, kind) == in_numpy_order(stored(run.out, kind), kind, key, first, 1)
            browser.one(f"{TABLES[kind]} input[type=search]").send_keys(first[0].split(":")[0])
            assert 0 < len(shown(browser, kind)) < len(first)
            assert browser.run("return document.documentElement.scrollWidth") == 320
            edges = "return [...document.querySelectorAll(given[0])].map((node) => node.getBoundingClientRect())"
            boxes = browser.run(edges, f"{TABLES[kind]} :is(thead button, .live-rows *)")
            assert all(box["left"] >= 0 and box["right"] <= 320 for box in boxes)
    finally:
        browser.driver.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})


def printed(browser: Browser) -> str:
    data = browser.driver.execute_cdp_cmd("Page.printToPDF", {"printBackground": True})["data"]
    return "\n".join(page.extract_text() for page in PdfReader(BytesIO(b64decode(data))).pages)


def test_paper_has_the_whole_table_in_the_order_of_the_report(browser: Browser, house: Run) -> None:
    opened(browser, house)
    untouched = printed(browser)
    heading(browser, "findings", "Area").click()
    browser.one("#anomalies input[type=search]").send_keys("hall-window")
    narrowed = shown(browser, "findings")
    assert printed(browser) == untouched
    assert shown(browser, "findings") == narrowed  # and the screen is as before
    for word in ("Rows with the words", "shown, by", "↕", "↑"):
        assert word not in untouched
    assert "Mean ΔT, K" in untouched


def test_without_the_script_there_is_the_plain_table(browser: Browser, house: Run) -> None:
    browser.driver.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": True})
    try:
        browser.driver.get((house.out / "report.html").as_uri())
        assert browser.driver.find_elements("css selector", "#anomalies button, #anomalies input") == []
        rows = browser.driver.find_elements("css selector", "#anomalies tbody tr")
        assert len(rows) == len(stored(house.out, "findings"))
        assert all(row.is_displayed() for row in rows)
    finally:
        browser.driver.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": False})
        browser.driver.get("about:blank")
