"""The report in windows of several widths: numbers stay whole, tables use the room there is."""

from __future__ import annotations

from collections.abc import Callable, Iterator

import pytest
from live.browser import Browser
from live.runs import Run

pytestmark = pytest.mark.browser

BROKEN = r"""
for (const one of document.querySelectorAll("details")) one.open = true;
const broken = [];
let whole = 0;
const nodes = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
while (nodes.nextNode()) {
  const { data, parentElement: around } = nodes.currentNode;
  if (around.closest("script, style, svg") || !around.checkVisibility()) continue;
  const numbers = /[≥≤−]?\u00a0?\d[\d.,\u202f]*(\u00a0±\u00a0\d[\d.,]*)?(\u00a0[^\s\u00a0]+)?/g;
  for (const number of data.matchAll(numbers)) {
    const range = document.createRange();
    range.setStart(nodes.currentNode, number.index);
    range.setEnd(nodes.currentNode, number.index + number[0].length);
    const lines = new Set([...range.getClientRects()].filter((box) => box.width).map((box) => Math.round(box.top)));
    if (lines.size > 1) broken.push(number[0]); else whole += 1;
  }
}
return [broken, whole, document.documentElement.scrollWidth];
"""
DISPLAYS = "return [...document.querySelectorAll(given[0])].map((one) => getComputedStyle(one).display)"
IN_ONE_ROW = """
return [...document.querySelectorAll(".repairs .facts")].map((list) =>
  [list.children.length, new Set([...list.children].map((one) => Math.round(one.getBoundingClientRect().top))).size])
"""


@pytest.fixture
def wide(browser: Browser) -> Iterator[Callable[[int], None]]:
    """Sets the width of the window [px]."""

    def set_(width: int) -> None:
        metrics = {"width": width, "height": 800, "deviceScaleFactor": 1, "mobile": width < 600}
        browser.driver.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", metrics)

    yield set_
    browser.driver.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})


@pytest.mark.parametrize("width", [320, 700])
@pytest.mark.parametrize("survey", ["house", "pumps"])
def test_no_measured_number_breaks(
    browser: Browser, wide: Callable[[int], None], survey: str, width: int, request: pytest.FixtureRequest
) -> None:
    run: Run = request.getfixturevalue(survey)
    wide(width)
    browser.open(run.out / "report.html")
    broken, whole, needed = browser.run(BROKEN)
    assert broken == []
    assert whole > 1000
    assert needed == width


def test_a_window_of_middling_width_keeps_narrow_tables_and_sets_wide_ones_in_two_columns(
    browser: Browser, wide: Callable[[int], None], pumps: Run
) -> None:
    browser.open(pumps.out / "report.html")
    for width, few, many in ((700, "table-row", "grid"), (320, "block", "block"), (1180, "table-row", "table-row")):
        wide(width)
        assert set(browser.run(DISPLAYS, ".inputs tbody tr")) == {few}
        assert set(browser.run(DISPLAYS, "#components tbody tr")) == {many}


def test_the_facts_of_a_repair_stand_in_one_row_of_a_wide_window(
    browser: Browser, wide: Callable[[int], None], pumps: Run
) -> None:
    wide(1280)
    browser.open(pumps.out / "report.html")
    rows = browser.run(IN_ONE_ROW)
    assert max(facts for facts, _ in rows) == 5
    assert {lines for _, lines in rows} == {1}


def test_on_paper_nothing_is_folded_away(browser: Browser, house: Run) -> None:
    browser.open(house.out / "report.html")
    folded = "return [...document.querySelectorAll('.folded')].map((one) => one.lastElementChild.checkVisibility())"
    browser.driver.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "print"})
    try:
        on_paper = browser.run(folded)
    finally:
        browser.driver.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": ""})
    assert set(on_paper) == {True}
    assert set(browser.run(folded)) == {False}
