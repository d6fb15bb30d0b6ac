"""What a reader's hands do on a page: bring a picture into view, point, drag, choose a tool."""

from __future__ import annotations

from typing import Any

from live.browser import Browser
from selenium.webdriver.common.action_chains import ActionChains
from selenium.webdriver.common.by import By


def figure_of(browser: Browser, frame: str) -> Any:
    return browser.one(f'article[data-frame="{frame}"]')


def canvas_of(browser: Browser, frame: str) -> Any:
    canvas = figure_of(browser, frame).find_element(By.CSS_SELECTOR, ".live-ink")
    browser.driver.execute_script("arguments[0].scrollIntoView({block: 'center', behavior: 'instant'})", canvas)
    browser.run("await Live.sheets.get(given[0]).open();", frame)
    return canvas


def point(browser: Browser, frame: str, x: int, y: int) -> tuple[int, int]:
    """Where the middle of a pixel lies in the window; a pixel is wider than rounding may move it."""
    body = """
    const { ink, data } = Live.sheets.get(given[0]);
    const box = ink.getBoundingClientRect();
    const scale = box.width / data.picture.width * data.picture.factor;
    return [box.left + (given[1] + 0.5) * scale, box.top + (given[2] + 0.5) * scale];
    """
    across, down = browser.run(body, frame, x, y)
    return round(across), round(down)


def mouse(browser: Browser, *steps: tuple[int, int] | str) -> None:
    """Move through places of the window, the button pressed and released in between."""
    actions = ActionChains(browser.driver, duration=20)
    pointer = actions.w3c_actions.pointer_action
    for step in steps:
        if step == "press":
            pointer.pointer_down()
        elif step == "release":
            pointer.pointer_up()
        else:
            pointer.move_to_location(*step)
    actions.perform()


def choose(browser: Browser, frame: str, tool: str) -> None:
    figure_of(browser, frame).find_element(By.CSS_SELECTOR, f'input[value="{tool}"]').click()
