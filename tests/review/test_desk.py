"""The reviewer's desk in a real browser: by keyboard, kept, exported, applied; texts of people stay texts."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from review.conftest import Desk
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys
from selenium.webdriver.support.ui import Select
from test_review import ACCEPT, HOSTILE, LOWER, REJECT, exported

from irsurvey.report.review.standing import identity, numbers_of, reviewable
from irsurvey.review import Applied, apply

TAB, DOWN, ENTER, SPACE = Keys.TAB, Keys.ARROW_DOWN, Keys.ENTER, Keys.SPACE
BACK = Keys.SHIFT, Keys.TAB


def begin(desk: Desk, reviewer: str = "A. Reviewer", date: str = "2026-02-03") -> None:
    """Open the desk and say who reviews."""
    desk.browser.one("#review-desk button").click()
    desk.browser.run(
        "const [name, date] = document.querySelectorAll('.review-who input');"
        "for (const [field, value] of [[name, given[0]], [date, given[1]]])"
        " { field.value = value; field.dispatchEvent(new Event('input')); }",
        reviewer,
        date,
    )


def form(desk: Desk, place: int) -> Any:
    return desk.browser.driver.find_elements(By.CSS_SELECTOR, ".review-form")[place]


def choose(desk: Desk, place: int, value: str) -> None:
    form(desk, place).find_element(By.CSS_SELECTOR, f'input[value="{value}"]').click()


def write(desk: Desk, place: int, words: str) -> None:
    """Put a comment into a form as if it were typed; quicker for long ones, and for letters no keyboard has."""
    desk.browser.run(
        "const field = document.querySelectorAll('.review-form textarea')[given[0]];"
        "field.value = given[1]; field.dispatchEvent(new Event('input'));",
        place,
        words,
    )


def put(desk: Desk, *made: dict[str, Any], **top: Any) -> Applied:
    """Apply decisions that somebody else made."""
    path = desk.out.parent / "others.json"
    path.write_text(json.dumps(exported(desk.report, *made, **top)), encoding="utf-8")
    return apply(desk.out, path)


def test_before_a_review_begins_the_page_shows_one_button_and_no_form(desk: Desk) -> None:
    assert desk.browser.one("#review").is_displayed()
    assert desk.browser.one("#review-desk button").text == "Review this report"
    assert not any(one.is_displayed() for one in desk.browser.driver.find_elements(By.CSS_SELECTOR, ".review-form"))
    assert not desk.browser.one(".review-bar").is_displayed()


def test_a_review_by_keyboard_alone_is_exported_and_applies(desk: Desk) -> None:
    desk.press(TAB)
    assert desk.focused() == "Review this report"
    desk.press(ENTER, TAB)
    assert desk.focused() == "Your name"
    desk.press("A. Reviewer", TAB)
    assert desk.focused() == "Date"
    desk.press("02032026")  # month, day, year: this browser speaks English
    for _ in range(6):  # through the parts of the date
        desk.press(TAB)
        if desk.focused() == "Only what is open":
            break
    assert desk.focused() == "Only what is open"
    desk.press(TAB, ENTER)  # the next open one
    assert desk.focused() == "Your decision on one-1:  None yet"
    desk.press(DOWN, TAB)
    assert desk.focused() == "Comment, why"
    desk.press("Seen on site.", TAB)
    assert desk.focused() == "Your decision on lug, left:  None yet"
    desk.press(DOWN, DOWN, TAB, "A reflection.", TAB)
    desk.press(DOWN, DOWN, DOWN, TAB)
    assert desk.focused() == "New class of lug, right"
    desk.press(DOWN, DOWN, TAB, "Load was falling.")
    assert desk.counts() == {"open": 0, "accepted": 1, "rejected": 1, "reclassified": 1}
    content = desk.exported()
    assert (content["reviewer"], content["date"]) == ("A. Reviewer", "2026-02-03")
    done = apply(desk.out, next(desk.saved.iterdir()))
    assert done.is_same
    assert done.open == ()
    first, left, right = done.report.reviews[0].decisions
    assert (first.decision, first.comment) == ("accepted", "Seen on site.")
    assert (left.decision, left.comment) == ("rejected", "A reflection.")
    assert (right.decision, right.comment) == ("reclassified", "Load was falling.")
    criterion = done.report.frames[1].components[1].assessments[0].criterion
    assert right.criterion == criterion
    assert right.urgency is not None


def test_the_file_holds_the_report_it_was_made_on_and_the_numbers(desk: Desk) -> None:
    begin(desk)
    choose(desk, 0, "accepted")
    content = desk.exported()
    assert content["report"] == identity(desk.report)
    assert content["tool"] == desk.report.tool
    assert content["survey"] == "Lodge"
    one = next(reviewable(desk.report))
    (made,) = content["decisions"]
    assert (made["key"], made["id"], made["frame"]) == (one.key, one.id, one.frame.id)
    numbers = numbers_of(one.item)
    assert made["on"] == {name: value and {"value": value.value, "u": value.u} for name, value in numbers.items()}
    assert desk.message().endswith("irsurvey review apply OUT decisions-2026-02-03.json")


def test_the_same_decisions_give_the_same_file(desk: Desk) -> None:
    begin(desk)
    choose(desk, 2, "rejected")
    choose(desk, 0, "accepted")
    first = desk.export().read_bytes()
    assert desk.export().read_bytes() == first


def test_decisions_are_there_again_when_the_page_is(desk: Desk) -> None:
    begin(desk)
    choose(desk, 0, "accepted")
    choose(desk, 1, "reclassified")
    Select(form(desk, 1).find_element(By.TAG_NAME, "select")).select_by_visible_text("2: repair as time permits")
    write(desk, 2, "two\nlines")
    before = desk.exported()
    desk.browser.reload()
    assert desk.counts() == {"open": 1, "accepted": 1, "rejected": 0, "reclassified": 1}
    assert form(desk, 0).is_displayed()
    chosen = Select(form(desk, 1).find_element(By.TAG_NAME, "select")).first_selected_option
    assert chosen.text == "2: repair as time permits"
    assert desk.exported() == before
    assert [made["decision"] for made in before["decisions"]] == ["accepted", "reclassified", "commented"]


def test_decisions_of_another_version_of_the_report_are_not_mixed_in(desk: Desk) -> None:
    begin(desk)
    choose(desk, 0, "accepted")
    text = (desk.out / "report.json").read_text("utf-8")
    key = next(reviewable(desk.report)).key
    (desk.out / "report.json").write_text(text.replace(key, f"{key}9"), encoding="utf-8")
    desk.open()
    assert desk.counts()["accepted"] == 0


def test_without_a_place_to_keep_them_decisions_last_as_long_as_the_page_which_says_so(desk: Desk) -> None:
    desk.browser.driver.execute_cdp_cmd("Page.enable", {})
    made = desk.browser.driver.execute_cdp_cmd(
        "Page.addScriptToEvaluateOnNewDocument",
        {"source": "Object.defineProperty(window, 'localStorage', { get() { throw new Error('none'); } });"},
    )
    try:
        desk.open()
        begin(desk)
        assert "keeps nothing" in desk.browser.one(".review-note").text
        choose(desk, 0, "rejected")
        assert desk.exported()["decisions"][0]["decision"] == "rejected"
        desk.browser.reload()
        assert desk.counts()["rejected"] == 0
    finally:
        desk.browser.driver.execute_cdp_cmd("Page.removeScriptToEvaluateOnNewDocument", made)


@pytest.mark.parametrize(
    "kept",
    ["null", "3", "[]", "{", '{"decision":"accepted"}', '{"id":"x","frame":"x","decision":"x","comment":"","on":{}}'],
)
def test_what_another_page_left_in_the_store_is_no_decision(desk: Desk, kept: str) -> None:
    key = next(reviewable(desk.report)).key
    desk.browser.run(
        "for (const name of ['who', `key/${given[1]}`]) localStorage.setItem(given[0] + name, given[2]);",
        f"irsurvey-review/{identity(desk.report)}/",
        key,
        kept,
    )
    desk.browser.reload()
    assert desk.counts()["open"] == 3
    begin(desk)
    choose(desk, 1, "accepted")
    assert len(desk.exported()["decisions"]) == 1


def test_what_is_missing_is_said_and_gets_the_focus(desk: Desk) -> None:
    begin(desk, reviewer="", date="")
    button = desk.browser.one(".review-main")
    button.click()
    assert desk.message() == "Enter your name first."
    assert desk.focused() == "Your name"
    begin_again = "A. Reviewer"
    desk.press(begin_again)
    button.click()
    assert desk.message() == "Enter the date first."
    desk.press("02032026")
    button.click()
    assert desk.message() == "There is nothing to export yet."
    choose(desk, 1, "reclassified")
    assert desk.counts()["open"] == 3  # to nothing yet
    button.click()
    assert desk.message() == "Choose a class or an urgency for lug, left first."
    assert desk.focused() == "New class of lug, left"
    assert list(desk.saved.iterdir()) == []


def test_a_decision_taken_back_before_the_export_is_not_exported(desk: Desk) -> None:
    begin(desk)
    choose(desk, 0, "accepted")
    choose(desk, 1, "accepted")
    choose(desk, 0, "")
    assert [made["id"] for made in desk.exported()["decisions"]] == ["lug, left"]


def test_only_what_is_open_hides_what_is_decided_but_not_on_paper(desk: Desk) -> None:
    begin(desk)
    choose(desk, 0, "accepted")
    desk.browser.one(".review-bar input[type=checkbox]").click()
    shown = desk.browser.driver.find_elements(By.CSS_SELECTOR, ".result")
    assert [one.is_displayed() for one in shown] == [False, True, True]
    desk.browser.driver.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "print"})
    try:
        assert all(one.is_displayed() for one in shown)
        assert not any(one.is_displayed() for one in desk.browser.driver.find_elements(By.CSS_SELECTOR, ".review-form"))
        assert desk.browser.one(".review-mine").text == "Not yet exported: accepted"
        assert not desk.browser.one(".review-bar").is_displayed()
    finally:
        desk.browser.driver.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": ""})
    choose(desk, 1, "accepted")
    assert shown[1].is_displayed()  # while one is at it
    desk.browser.one(".review-who input[type=text]").click()
    desk.browser.run("await new Promise((done) => setTimeout(done, 20));")
    assert not shown[1].is_displayed()


def test_decisions_in_the_report_are_text_and_need_no_script(desk: Desk) -> None:
    put(desk, ACCEPT, LOWER, {"decision": "commented", "comment": "Ask."}, reviewer="B. Earlier")
    desk.open(script="window.hit = true;")
    said = [one.text for one in desk.browser.driver.find_elements(By.CSS_SELECTOR, ".review-said li")]
    assert said == [
        "Accepted by B. Earlier, 2026-02-03",
        "Reclassified as urgency 1: investigate by B. Earlier, 2026-02-03: Load was falling.",
        "Comment by B. Earlier, 2026-02-03: Ask.",
    ]
    assert "1 accepted, 0 rejected, 1 reclassified, 1 open" in desk.browser.one("#review").text
    # another script does not run: its hash is not the one of the policy
    assert desk.browser.run("return window.hit ?? false") is False
    assert any("script-src" in message for message in desk.browser.messages())


def test_a_second_reviewer_sees_the_first_and_may_take_a_decision_back(desk: Desk) -> None:
    put(desk, ACCEPT, REJECT, reviewer="B. Earlier")
    desk.open()
    begin(desk, date="2026-02-09")
    assert desk.counts() == {"open": 1, "accepted": 1, "rejected": 1, "reclassified": 0}
    choose(desk, 0, "open")
    choose(desk, 1, "accepted")
    assert not form(desk, 2).find_elements(By.CSS_SELECTOR, 'input[value="open"]')  # there is nothing to take back
    assert desk.counts() == {"open": 2, "accepted": 1, "rejected": 0, "reclassified": 0}
    done = apply(desk.out, desk.export())
    assert [status.status for status in done.report.review_status] == ["open", "accepted", "open"]
    assert [review.reviewer for review in done.report.reviews] == ["B. Earlier", "A. Reviewer"]


def test_decisions_that_came_back_with_the_report_are_not_exported_again(desk: Desk) -> None:
    begin(desk)
    choose(desk, 0, "accepted")
    choose(desk, 1, "reclassified")
    Select(form(desk, 1).find_element(By.TAG_NAME, "select")).select_by_index(1)
    write(desk, 1, "why")
    apply(desk.out, desk.export())
    desk.open()
    assert desk.counts() == {"open": 1, "accepted": 1, "rejected": 0, "reclassified": 1}
    begin_button = desk.browser.one("#review-desk button")
    if begin_button.text == "Review this report":
        begin_button.click()
    desk.browser.one(".review-main").click()
    assert desk.message() == "There is nothing to export yet."


def test_what_is_asked_again_says_what_moved_and_is_open(desk: Desk) -> None:
    content = exported(desk.report, ACCEPT)
    delta = content["decisions"][0]["on"]["mean_delta_k"]
    delta["value"] -= 2.1 * delta["u"]
    path = desk.out.parent / "moved.json"
    path.write_text(json.dumps(content), encoding="utf-8")
    apply(desk.out, path)
    desk.open()
    told = desk.browser.one(".review-status").text
    assert told.startswith("Review: asked again Asked again: mean ΔT was ")
    begin(desk)
    assert desk.counts()["open"] == 3
    choose(desk, 0, "accepted")
    done = apply(desk.out, desk.export())
    assert done.report.review_status[0].status == "accepted"


def test_findings_without_a_section_of_their_own_can_be_reviewed_too(desk: Desk) -> None:
    desk.open(shown=0)
    begin(desk)
    desk.browser.one(".review-rest summary").click()
    choose(desk, 0, "accepted")
    assert desk.exported()["decisions"][0]["id"] == "one-1"


def test_a_report_of_many_pages_is_reviewed_as_one(desk: Desk) -> None:
    desk.open(frames=("one",))
    begin(desk)
    choose(desk, 0, "accepted")
    assert desk.counts() == {"open": 0, "accepted": 1, "rejected": 0, "reclassified": 0}
    desk.open(frames=("two",))
    assert desk.counts() == {"open": 2, "accepted": 0, "rejected": 0, "reclassified": 0}
    assert "1 more on other pages of this report" in desk.browser.one(".review-counts").text
    choose(desk, 1, "rejected")
    done = apply(desk.out, desk.export())
    assert [(made.frame, made.decision) for made in done.report.reviews[0].decisions] == [
        ("two", "rejected"),
        ("one", "accepted"),
    ]


def test_every_field_has_a_label_and_every_button_a_name(desk: Desk) -> None:
    begin(desk)
    unnamed = desk.browser.run(
        "return [...document.querySelectorAll('input, select, textarea, button')]"
        ".filter((node) => !(node.tagName === 'BUTTON' ? node.textContent : node.labels[0]?.textContent).trim())"
        ".map((node) => node.outerHTML)"
    )
    assert unnamed == []
    assert all(one.find_element(By.TAG_NAME, "legend").text for one in [form(desk, 0), form(desk, 2)])


def test_texts_stand_out_from_their_ground(desk: Desk) -> None:
    """WCAG 2.2, 1.4.3: at least 4.5 to 1; the relative luminance is that of its glossary."""
    begin(desk)
    choose(desk, 0, "accepted")
    ratios = desk.browser.run(
        """const channels = (colour) => colour.match(/[\\d.]+/g).map(Number);
        const luminance = (colour) => channels(colour).slice(0, 3).map((c) => c / 255)
          .map((c) => (c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4))
          .reduce((sum, c, k) => sum + c * [0.2126, 0.7152, 0.0722][k], 0);
        const ground = (node) => { while (node && (channels(getComputedStyle(node).backgroundColor)[3] ?? 1) === 0)
          node = node.parentElement; return node ? getComputedStyle(node).backgroundColor : "rgb(255, 255, 255)"; };
        return [...document.querySelectorAll("#review *, .review-bar *, .review *")]
          .filter((node) => [...node.childNodes].some((child) => child.nodeType === 3 && child.textContent.trim()))
          .map((node) => { const [a, b] = [getComputedStyle(node).color, ground(node)].map(luminance);
            return [node.className || node.tagName, (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05)]; });"""
    )
    assert len(ratios) > 20
    assert [entry for entry in ratios if entry[1] < 4.5] == []


@pytest.mark.parametrize("width", [320, 1280])
def test_nothing_sticks_out_of_the_page(desk: Desk, width: int) -> None:
    put(desk, {"decision": "rejected", "comment": "x" * 10_000}, reviewer="y" * 300)
    desk.browser.driver.execute_cdp_cmd(
        "Emulation.setDeviceMetricsOverride", {"width": width, "height": 800, "deviceScaleFactor": 1, "mobile": False}
    )
    try:
        desk.open()
        begin(desk)
        choose(desk, 1, "reclassified")
        assert desk.browser.run("return document.documentElement.scrollWidth") <= width
    finally:
        desk.browser.driver.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})


@pytest.mark.parametrize("words", HOSTILE, ids=["markup", "formula", "rtl", "braces", "surrogate", "long"])
def test_texts_of_people_do_nothing_in_the_page(desk: Desk, words: str) -> None:
    put(desk, {"decision": "accepted", "comment": words}, reviewer=words)
    shown = words.replace("\ud800", "\ufffd")
    desk.open()
    desk.browser.run("window.alert = () => { window.hit = true; };")
    begin(desk, reviewer=shown)
    assert desk.browser.run("return document.querySelector('.review-words').textContent") == on_page(shown)
    write(desk, 1, shown)
    choose(desk, 1, "rejected")
    desk.browser.reload()
    assert desk.browser.run("return window.hit ?? false") is False
    assert desk.browser.run("return document.querySelectorAll('main script, main img, main a').length") == 0
    made = desk.exported()["decisions"]
    assert [one["comment"] for one in made] == [shown]
    assert apply(desk.out, next(desk.saved.iterdir())).report.reviews[-1].decisions[0].comment == shown


def on_page(text: str) -> str:
    """A text in which control characters are shown."""
    return text.replace("\x00", "\ufffd").replace("\x1b", "\ufffd")


@pytest.mark.parametrize("name", ['<img src=x onerror="alert(1)">', "bell \x07 and \u202eturned\u202c"])
def test_hostile_names_of_results_do_nothing(desk: Desk, name: str) -> None:
    name = json.dumps(name)[1:-1]
    text = (desk.out / "report.json").read_text("utf-8").replace("lug, left", name)
    (desk.out / "report.json").write_text(text, encoding="utf-8")
    desk.open()
    begin(desk)
    assert desk.browser.run("return document.querySelectorAll('img').length") == 0
    choose(desk, 1, "accepted")
    assert apply(desk.out, desk.export()).report.review_status[1].status == "accepted"


def test_the_script_asks_for_nothing_and_never_makes_markup_of_text() -> None:
    script = (Path(__file__).parents[2] / "irsurvey" / "report" / "review" / "review.js").read_text("utf-8")
    for word in (
        "innerHTML",
        "outerHTML",
        "insertAdjacentHTML",
        "document.write",
        "eval(",
        "fetch(",
        "XMLHttp",
        "http",
    ):
        assert word not in script
