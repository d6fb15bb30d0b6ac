"""The tools of the page in a real browser: readings, shapes, colours, keyboard, a narrow window, no network."""

from __future__ import annotations

import re
from typing import Any

import numpy as np
import pytest
import tifffile
from live.browser import Browser
from live.hands import canvas_of, choose, figure_of, mouse, point
from live.pages import document, sheets
from live.runs import Run
from selenium.webdriver.common.action_chains import ActionChains
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys

from irsurvey.constants import ZERO_CELSIUS
from irsurvey.geometry.polygons import mask
from irsurvey.report import live

HALF_STEP = 0.005 + 1e-5  # K: temperatures travel in hundredths, and float32
READ = "const sheet = Live.sheets.get(given[0]); await sheet.open(); return sheet.reading();"
PIXELS = """
const sheet = Live.sheets.get(given[0]);
await sheet.open();
return given[1].map((pixel) => sheet.readingAt(pixel)).map((one) => [one.temperature, one.delta, one.flux]);
"""


def stored(run: Run, frame: str, name: str = "temperature") -> np.ndarray[Any, Any]:
    return np.asarray(tifffile.imread(run.out / "frames" / frame / f"{name}.tif"), float)


def number(text: str) -> float:
    found = re.search(r"[−+]?\d+\.\d+", text)
    assert found, text
    return float(found[0].replace("−", "-"))


def test_the_page_asks_nothing_and_the_console_is_silent(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    body = "await Promise.all([...Live.sheets.values()].map((one) => one.open())); return Live.sheets.size;"
    assert browser.run(body) == len(house.report.frames)
    choose(browser, "hall-window", "box")
    browser.run("const s = Live.sheets.get('hall-window'); s.select.value = 'magma'; s.recolour(); await s.open();")
    assert browser.requests() == [house.page.as_uri()]
    assert browser.messages() == []


def test_only_the_script_of_the_report_runs(browser: Browser, house: Run, tmp_path: Any) -> None:
    """A page whose script was changed by one character, or that got another one, runs none of it."""
    page = tmp_path / "changed.html"
    changed = live.script().replace("const CLICK = 4", "const CLICK = 5")
    assert changed != live.script()
    page.write_text(sheets(house.report, house.tasks, house.out, script=changed), encoding="utf-8")
    browser.open(page)
    assert browser.driver.find_elements(By.CSS_SELECTOR, ".live") == []
    assert any("Content Security Policy" in message for message in browser.messages())
    page.write_text(document("<p id=told>quiet</p>", "document.title = 'ran'"), encoding="utf-8")
    browser.open(page)
    assert browser.driver.title == "Frames"


def test_pointing_reads_the_temperature_of_that_pixel(browser: Browser, house: Run) -> None:
    """By the mouse, at 24 pixels drawn at random; 0.01 K is what the page promises."""
    browser.open(house.page)
    t = stored(house, "hall-window")
    canvas_of(browser, "hall-window")
    rng = np.random.default_rng(1)
    for x, y in zip(rng.integers(1, 319, 24), rng.integers(1, 239, 24), strict=True):
        mouse(browser, point(browser, "hall-window", int(x), int(y)))
        reading = browser.run(READ, "hall-window")
        assert reading["at"] == [x, y]
        text = figure_of(browser, "hall-window").find_element(By.CSS_SELECTOR, ".live-readout").text
        assert number(text) == pytest.approx(t[y, x], abs=0.01, rel=0)
        assert f"column {x}, row {y}" in text


def test_readings_of_all_frames_equal_their_maps(browser: Browser, house: Run, pumps: Run) -> None:
    """Temperature and heat flux at 40 pixels of each frame; flux to what half a step of temperature makes of it."""
    rng = np.random.default_rng(2)
    for run in (house, pumps):
        browser.open(run.page)
        for frame in run.report.frames:
            t, flux = stored(run, frame.id), stored(run, frame.id, "heat_flux")
            rows, columns = rng.integers(0, t.shape[0], 40), rng.integers(0, t.shape[1], 40)
            found = np.array(browser.run(PIXELS, frame.id, np.stack([columns, rows], axis=1).tolist()), float)
            expected = t[rows, columns]
            assert found[:, 0] - ZERO_CELSIUS == pytest.approx(expected, abs=HALF_STEP, rel=0, nan_ok=True)
            if np.isfinite(found[:, 2]).any():  # at most 25 + 7 W m⁻² K⁻¹ of film and radiation
                assert found[:, 2] == pytest.approx(flux[rows, columns], abs=32 * HALF_STEP, rel=2e-4, nan_ok=True)
            else:
                assert frame.claim == "not valid"


def test_what_is_read_is_held_against_the_reference_plane(browser: Browser, house: Run) -> None:
    """At the centre of a finding its plane is what the report subtracted: mean minus mean ΔT."""
    browser.open(house.page)
    for frame in house.report.frames:
        for finding in frame.findings:
            body = """
            const sheet = Live.sheets.get(given[0]);
            await sheet.open();
            const item = sheet.data.findings.find((one) => one.id === given[1]);
            return sheet.reference.at(...item.areas.whole_at);
            """
            level = browser.run(body, frame.id, finding.id) - ZERO_CELSIUS
            assert finding.mean_c is not None
            assert finding.mean_delta_k is not None
            assert level == pytest.approx(finding.mean_c.value - finding.mean_delta_k.value, abs=2e-3, rel=0), (
                finding.id
            )


def test_a_box_drawn_by_the_mouse_equals_numpy(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    t = stored(house, "kitchen-bays")
    canvas_of(browser, "kitchen-bays")
    choose(browser, "kitchen-bays", "box")
    start, end = point(browser, "kitchen-bays", 60, 40), point(browser, "kitchen-bays", 200, 150)
    mouse(browser, start, "press", end, "release")
    found, inside = browser.run(READ, "kitchen-bays"), t[40:151, 60:201]
    assert (found["pixels"], found["missing"]) == (inside.size, 0)
    expected = (inside.min(), inside.mean(), inside.max())
    assert [found[key] - ZERO_CELSIUS for key in ("min", "mean", "max")] == pytest.approx(
        expected, abs=HALF_STEP, rel=0
    )
    text = figure_of(browser, "kitchen-bays").find_element(By.CSS_SELECTOR, ".live-readout").text
    assert f"{inside.size} pixels" in text


def test_an_outline_clicked_corner_by_corner_holds_the_pixels_of_its_polygon(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    t = stored(house, "kitchen-bays")
    canvas_of(browser, "kitchen-bays")
    choose(browser, "kitchen-bays", "outline")
    corners = ((50, 40), (220, 60), (180, 200), (120, 90))
    for corner in (*corners, corners[0]):
        mouse(browser, point(browser, "kitchen-bays", *corner), "press", "release")
    found, inside = browser.run(READ, "kitchen-bays"), t[mask(corners, (240, 320))]
    assert found["pixels"] == inside.size
    assert found["mean"] - ZERO_CELSIUS == pytest.approx(inside.mean(), abs=HALF_STEP, rel=0)


def test_outlines_hold_the_pixels_that_the_package_says(browser: Browser, house: Run) -> None:
    """Polygons drawn at random, some of which cross themselves; corners at pixel centres, as a reader clicks them."""
    browser.open(house.page)
    rng = np.random.default_rng(3)
    for corners in (rng.integers(0, 60, (int(rng.integers(3, 8)), 2)).tolist() for _ in range(60)):
        pixels = browser.run("return Shapes.ofOutline(given[0]);", corners)
        found = np.zeros((64, 64), bool)
        found[[y for _, y in pixels], [x for x, _ in pixels]] = True
        assert np.array_equal(found, mask(tuple(map(tuple, corners)), (64, 64))), corners


def test_a_line_shows_the_temperatures_along_it(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    t = stored(house, "bedroom-gable")
    canvas_of(browser, "bedroom-gable")
    choose(browser, "bedroom-gable", "line")
    start, end = point(browser, "bedroom-gable", 30, 200), point(browser, "bedroom-gable", 250, 35)
    mouse(browser, start, "press", end, "release")
    found, steps = browser.run(READ, "bedroom-gable"), np.arange(221)
    columns, rows = 30 + steps, np.floor(200 - 165 * steps / 220 + 0.5).astype(int)
    assert np.array(found["along"]) - ZERO_CELSIUS == pytest.approx(t[rows, columns], abs=HALF_STEP, rel=0)
    drawn = figure_of(browser, "bedroom-gable").find_element(By.CSS_SELECTOR, ".live-curve").get_attribute("d")
    assert drawn.count("L") == 220


def test_the_keyboard_alone_reads_draws_and_comes_back(browser: Browser, house: Run) -> None:
    """Tab to the picture, arrows, then the tools behind it; what is read is spoken."""
    browser.open(house.page)
    t = stored(house, "living-foil")
    for _ in range(3):
        ActionChains(browser.driver).send_keys(Keys.TAB).perform()
        if "live-ink" in (browser.driver.switch_to.active_element.get_attribute("class") or ""):
            break
    keys = (Keys.ARROW_RIGHT, Keys.ARROW_RIGHT, Keys.ARROW_UP, Keys.SHIFT + Keys.ARROW_LEFT + Keys.NULL)
    for key in keys:
        browser.driver.switch_to.active_element.send_keys(key)
    frame = browser.driver.execute_script("return document.activeElement.closest('article').dataset.frame")
    assert browser.run(READ, frame)["at"] == [160 + 2 - 10, 120 - 1]
    spoken = figure_of(browser, frame).find_element(By.CSS_SELECTOR, ".live-spoken")
    assert number(spoken.get_attribute("textContent")) == pytest.approx(
        stored(house, frame)[119, 152] if frame != "living-foil" else t[119, 152], abs=0.01, rel=0
    )
    ActionChains(browser.driver).send_keys(Keys.TAB).perform()  # the tools: one stop, arrows choose
    ActionChains(browser.driver).send_keys(Keys.ARROW_RIGHT).perform()
    assert browser.run("return Live.sheets.get(given[0]).tool", frame) == "box"
    ActionChains(browser.driver).key_down(Keys.SHIFT).send_keys(Keys.TAB).key_up(Keys.SHIFT).perform()
    for key in (Keys.ENTER, *[Keys.ARROW_DOWN] * 4, *[Keys.ARROW_LEFT] * 3, Keys.ENTER):
        browser.driver.switch_to.active_element.send_keys(key)
    assert browser.run(READ, frame)["pixels"] == 5 * 4
    back = figure_of(browser, frame).find_element(By.CSS_SELECTOR, ".live-back")
    for _ in range(8):
        if browser.driver.switch_to.active_element == back:
            break
        ActionChains(browser.driver).send_keys(Keys.TAB).perform()
    assert browser.driver.switch_to.active_element == back
    ActionChains(browser.driver).send_keys(Keys.ENTER).perform()
    assert browser.run(READ, frame) is None


def test_colours_follow_range_and_map_at_once_and_leave_what_is_inked(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    figure = figure_of(browser, "kitchen-bays")
    canvas_of(browser, "kitchen-bays")
    colours = figure.find_element(By.CSS_SELECTOR, ".live-colours")
    assert not colours.is_displayed()
    ends = figure.find_elements(By.CSS_SELECTOR, '.live-colour-bar input[inputmode="decimal"]')
    for field, value in zip(ends, ("12", "20"), strict=True):
        field.clear()
        field.send_keys(value)
    figure.find_element(By.CSS_SELECTOR, 'option[value="gray"]').click()
    assert colours.is_displayed()
    body = """
    const sheet = Live.sheets.get(given[0]);
    await sheet.open();
    const pen = sheet.colours.getContext("2d");
    const { factor, width, height } = sheet.data.picture;
    const seen = pen.getImageData(0, 0, width, height).data;
    const picture = document.createElement("canvas");
    Object.assign(picture, { width, height });
    picture.getContext("2d").drawImage(sheet.image, 0, 0);
    const was = picture.getContext("2d").getImageData(0, 0, width, height).data;
    const inks = atob(Live.shared.inks);
    const isInk = (k) => [...Array(inks.length / 3).keys()].some((n) =>
      [0, 1, 2].every((c) => inks.charCodeAt(3 * n + c) === was[4 * k + c]));
    let kept = 0;
    let inked = 0;
    const grey = [];
    for (let y = 0; y < sheet.data.rows * factor; y += 1) {
      for (let x = 0; x < sheet.data.columns * factor; x += 1) {
        const k = y * width + x;
        if (!isInk(k)) continue;
        inked += 1;
        if ([0, 1, 2].every((c) => seen[4 * k + c] === was[4 * k + c])) kept += 1;
      }
    }
    for (const [x, y] of given[1]) {
      const k = (y * factor) * width + x * factor;
      grey.push(isInk(k) ? null : seen[4 * k]);
    }
    return { inked, kept, grey };
    """
    rng = np.random.default_rng(4)
    rows, columns = rng.integers(0, 240, 60), rng.integers(0, 320, 60)
    found = browser.run(body, "kitchen-bays", np.stack([columns, rows], axis=1).tolist())
    assert found["kept"] == found["inked"] > 500
    levels = np.clip((stored(house, "kitchen-bays")[rows, columns] - 12) / 8, 0, 1) * 255
    shown = np.array(found["grey"], float)
    known = np.isfinite(shown)
    assert known.sum() > 40
    assert shown[known] == pytest.approx(levels[known], abs=2, rel=0)  # 247 levels of 256 entries
    figure.find_element(By.CSS_SELECTOR, ".live-back").click()
    browser.run("await Live.sheets.get('kitchen-bays').open();")
    assert not colours.is_displayed()


def test_sliders_and_fields_tell_the_same_range_and_refuse_what_is_none(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    canvas_of(browser, "kitchen-bays")
    figure = figure_of(browser, "kitchen-bays")
    low, high = figure.find_elements(By.CSS_SELECTOR, '.live-colour-bar input[inputmode="decimal"]')
    slide_low, _ = figure.find_elements(By.CSS_SELECTOR, 'input[type="range"]')
    before = float(low.get_attribute("value"))
    slide_low.send_keys(Keys.ARROW_RIGHT)
    assert float(low.get_attribute("value")) == pytest.approx(before + 0.1, abs=1e-6)
    high.clear()
    high.send_keys("-40")
    assert high.get_attribute("aria-invalid") == "true"
    kept = browser.run("return Live.sheets.get('kitchen-bays').range")
    assert kept[0] < kept[1]


def test_the_page_fits_a_window_of_320_pixels(browser: Browser, house: Run) -> None:
    """Nothing sticks out to the side, with a what-if open; a tap reads."""
    browser.driver.execute_cdp_cmd(
        "Emulation.setDeviceMetricsOverride", {"width": 320, "height": 640, "deviceScaleFactor": 2, "mobile": True}
    )
    try:
        browser.open(house.page)
        body = """
        for (const sheet of Live.sheets.values()) {
          await sheet.open();
          sheet.tools.querySelector("details").open = true;
          sheet.panel.fields[0].input.value = "0.8";
          sheet.panel.assume();
          await sheet.open();
        }
        const out = [...document.querySelectorAll("main *")].filter((node) => {
          const box = node.getBoundingClientRect();
          return box.width > 0 && box.right > 320.5 && !node.closest("legend, thead, .live-spoken");
        });
        return [document.documentElement.scrollWidth, out.map((node) => node.outerHTML.slice(0, 80))];
        """
        width, out = browser.run(body)
        assert width <= 320
        assert out == []
        canvas_of(browser, "hall-window")
        mouse(browser, point(browser, "hall-window", 100, 100), "press", "release")
        assert "column" in figure_of(browser, "hall-window").find_element(By.CSS_SELECTOR, ".live-readout").text
    finally:
        browser.driver.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})


def test_every_control_has_a_name_and_the_print_is_the_report(browser: Browser, house: Run) -> None:
    browser.open(house.page)
    body = """
    const labels = (node) => [...(node.labels ?? [])].map((one) => one.textContent).join("");
    const named = (node) => node.getAttribute("aria-label") || labels(node) || node.textContent;
    return [...document.querySelectorAll("input, select, button, canvas[tabindex], summary")]
      .filter((node) => !named(node).trim()).map((node) => node.outerHTML);
    """
    assert browser.run(body) == []
    ids = browser.run("return [...document.querySelectorAll('[id]')].map((node) => node.id)")
    assert len(ids) == len(set(ids))
    browser.driver.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "print"})
    try:
        shown = browser.run(
            "return [...document.querySelectorAll('.live, .live-stage canvas, .live-badge')]"
            ".filter((node) => node.getBoundingClientRect().width > 0).length"
        )
    finally:
        browser.driver.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": ""})
    assert shown == 0


def test_text_stands_out_from_its_ground_by_wcag_aa(browser: Browser, house: Run) -> None:
    """Contrast of all text of the tools, a what-if open: at least 4.5 (WCAG 2.2, 1.4.3), by its relative luminance."""
    browser.open(house.page)
    body = """
    const sheet = Live.sheets.get("hall-window");
    await sheet.open();
    sheet.tools.querySelector("details").open = true;
    sheet.panel.fields[0].input.value = "0.6";
    sheet.panel.fields[1].input.value = "abc";
    sheet.panel.assume();
    await sheet.open();
    const numbers = (colour) => colour.match(/[\\d.]+/g).map(Number);
    const ground = (node) => {
      for (let one = node; one; one = one.parentElement) {
        const found = numbers(getComputedStyle(one).backgroundColor);
        if (found.length === 3 || found[3] > 0) return found;
      }
      return [255, 255, 255];
    };
    const light = (colour) => {
      const linear = (c) => (c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4);
      const [r, g, b] = colour.slice(0, 3).map((c) => linear(c / 255));
      return 0.2126 * r + 0.7152 * g + 0.0722 * b;
    };
    const hasText = (node) => [...node.childNodes].some((one) => one.nodeType === 3 && one.textContent.trim());
    const nodes = [sheet.badge, ...sheet.tools.querySelectorAll("*")]
      .filter((node) => hasText(node) && !node.disabled && !node.closest("svg"));
    return nodes.map((node) => {
      const pair = [light(numbers(getComputedStyle(node).color)), light(ground(node))].sort((a, b) => b - a);
      return [node.className || node.tagName, (pair[0] + 0.05) / (pair[1] + 0.05)];
    });
    """
    ratios = browser.run(body)
    assert len(ratios) > 30
    assert [name for name, ratio in ratios if ratio < 4.5] == []
