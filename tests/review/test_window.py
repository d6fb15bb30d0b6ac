"""The reviewer's desk in small windows, by keyboard there, and decisions that lack a reason."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager

import pytest
from click.testing import CliRunner
from review.conftest import Desk
from review.test_desk import begin, choose, form, write
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys
from selenium.webdriver.support.ui import Select

from irsurvey.cli import main

ROOM = 96  # px that the bar may take of a window 640 px high: 15 %
BOX = "const box = document.querySelector('.review-bar').getBoundingClientRect(); return [box.top, box.bottom];"
FILLED = "document.querySelector('.sheet:last-of-type').style.minHeight = '4000px'; scrollTo(0, given[0]);" + (
    "await new Promise((done) => setTimeout(done, 50));"
)


@contextmanager
def window(desk: Desk, width: int, height: int) -> Iterator[None]:
    """A window of this size."""
    metrics = {"width": width, "height": height, "deviceScaleFactor": 1, "mobile": width < 600}
    desk.browser.driver.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", metrics)
    try:
        desk.open()
        yield
    finally:
        desk.browser.driver.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})


def is_there(desk: Desk, width: int, count: str) -> None:
    """Far down the page the bar is at the top of the window, whole and low."""
    desk.browser.run(FILLED, 2500)
    top, bottom = desk.browser.run(BOX)
    assert top == pytest.approx(0, abs=1)
    assert 0 < bottom <= ROOM
    assert desk.browser.one('.review-bar [data-count="open"]').text == count
    buttons = desk.browser.driver.find_elements(By.CSS_SELECTOR, ".review-bar button")
    assert [one.text for one in buttons] == ["Next open one", "Export decisions"]
    assert desk.browser.run("return document.documentElement.scrollWidth") <= width


@pytest.mark.parametrize(("width", "height"), [(320, 640), (390, 640), (768, 640), (900, 640), (1280, 560)])
def test_the_bar_stays_in_a_small_window_and_leaves_it_to_the_report(desk: Desk, width: int, height: int) -> None:
    """Far down the page: how many are open, the next one and the export are there, whatever was said last."""
    with window(desk, width, height):
        begin(desk)
        choose(desk, 0, "rejected")
        choose(desk, 1, "reclassified")
        is_there(desk, width, "2 open")
        desk.browser.one(".review-main").click()
        assert desk.message().startswith("Choose a class or an urgency")
        is_there(desk, width, "2 open")
        Select(form(desk, 1).find_element(By.TAG_NAME, "select")).select_by_index(1)
        desk.browser.run(FILLED, 2500)
        desk.export()
        assert desk.message().startswith("2 exported as decisions-2026-02-03.json.")
        assert "2 rejected or reclassified without a reason." in desk.message()
        is_there(desk, width, "1 open")
        assert "irsurvey review apply OUT decisions-2026-02-03.json" in desk.browser.one(".review-note").text


def test_a_long_message_does_not_make_the_bar_grow(desk: Desk) -> None:
    with window(desk, 320, 640):
        begin(desk)
        desk.browser.run(FILLED, 2500)
        desk.browser.run("document.querySelector('.review-message').textContent = 'word '.repeat(300);")
        _, bottom = desk.browser.run(BOX)
        assert 0 < bottom <= ROOM


def test_a_window_magnified_fourfold_is_left_to_the_report(desk: Desk) -> None:
    with window(desk, 320, 256):
        begin(desk)
        desk.browser.run(FILLED, 2500)
        assert desk.browser.run(BOX)[1] < 0


def test_all_counts_stand_at_the_top_where_the_bar_has_no_room_for_them(desk: Desk) -> None:
    with window(desk, 320, 640):
        begin(desk)
        choose(desk, 0, "accepted")
        assert " ".join(desk.browser.one(".review-tally").text.split()) == "2 open 1 accepted 0 rejected 0 reclassified"
        in_bar = desk.browser.driver.find_elements(By.CSS_SELECTOR, ".review-bar [data-count]")
        assert [one.is_displayed() for one in in_bar] == [True, False, False, False]
    desk.open()
    assert not desk.browser.one(".review-tally").is_displayed()


def test_by_keyboard_the_name_comes_first_and_then_the_bar(desk: Desk) -> None:
    with window(desk, 320, 640):
        desk.press(Keys.TAB, Keys.ENTER)
        found = []
        for _ in range(12):
            desk.press(Keys.TAB)
            if desk.focused() not in found[-1:]:
                found.append(desk.focused())
            if desk.focused() == "Export decisions":
                break
        assert found == ["Your name", "Date", "Only what is open", "Next open one", "Export decisions"]


def test_what_has_the_focus_is_not_under_the_bar(desk: Desk) -> None:
    """WCAG 2.2, 2.4.11."""
    with window(desk, 320, 640):
        begin(desk)
        desk.browser.run(FILLED, 0)
        for _ in range(3):
            desk.browser.run(
                "const next = [...document.querySelectorAll('.review-bar button')][0]; scrollTo(0, 3000); next.click();"
                "await new Promise((done) => setTimeout(done, 50));"
            )
            under, inside = desk.browser.run(
                "const box = document.activeElement.getBoundingClientRect();"
                "return [box.top - document.querySelector('.review-bar').getBoundingClientRect().bottom,"
                " innerHeight - box.bottom];"
            )
            assert under >= 0
            assert inside >= 0


def test_a_form_asks_why_until_it_is_said_and_keeps_nobody_from_going_on(desk: Desk) -> None:
    begin(desk)
    asks = [form(desk, place).find_element(By.CSS_SELECTOR, ".review-why") for place in range(3)]
    assert {one.get_attribute("role") for one in asks} == {"status"}
    assert [one.text for one in asks] == ["", "", ""]
    choose(desk, 0, "accepted")
    choose(desk, 1, "rejected")
    choose(desk, 2, "reclassified")
    assert [one.text for one in asks] == ["", "Say why.", "Say why."]
    write(desk, 1, "  ")
    assert asks[1].text == "Say why."
    write(desk, 1, "A reflection.")
    assert asks[1].text == ""
    choose(desk, 2, "")
    assert asks[2].text == ""
    write(desk, 1, "")
    desk.browser.reload()
    assert form(desk, 1).find_element(By.CSS_SELECTOR, ".review-why").text == "Say why."
    assert [made["decision"] for made in desk.exported()["decisions"]] == ["accepted", "rejected"]


def test_an_export_counts_what_has_no_reason_and_so_does_the_command(desk: Desk) -> None:
    begin(desk)
    choose(desk, 0, "accepted")
    desk.export()
    assert "reason" not in desk.message()
    choose(desk, 1, "rejected")
    path = desk.export()
    assert "1 rejected or reclassified without a reason." in desk.message()
    told = CliRunner().invoke(main, ["review", "apply", str(desk.out), str(path)])
    assert told.exit_code == 0
    assert "without a reason: 1 rejected or reclassified" in told.output
    write(desk, 1, "A reflection.")
    path = desk.export()
    assert "reason" not in desk.message()
    told = CliRunner().invoke(main, ["review", "apply", str(desk.out), str(path)])
    assert "reason" not in told.output
