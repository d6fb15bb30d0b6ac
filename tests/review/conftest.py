"""A browser that saves what a page exports, and a small survey with findings and components, run once."""

from __future__ import annotations

import json
import shutil
import time
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest
from live.browser import Browser, opened
from review.pages import page
from selenium.webdriver.common.action_chains import ActionChains
from test_review import site

from irsurvey.model import Report
from irsurvey.report.kept import kept
from irsurvey.report.reading import read_report
from irsurvey.run import run


@dataclass
class Desk:
    """The page of one report in the browser."""

    browser: Browser
    out: Path
    saved: Path

    @property
    def report(self) -> Report:
        """The records the page is made of."""
        return read_report(self.out / "report.json")

    def open(self, **options: Any) -> None:
        """Write the page of the report as it is now, and show it."""
        path = self.out.parent / "page.html"
        path.write_text(page(self.report, kept(self.out), **options), encoding="utf-8")
        self.browser.open(path)

    def press(self, *keys: str) -> None:
        """Press keys, or write text, where the focus is."""
        ActionChains(self.browser.driver).send_keys(*keys).perform()

    def focused(self) -> str:
        """What has the focus, in words: its label, legend and text."""
        return str(
            self.browser.run(
                "const at = document.activeElement; const group = at.closest('fieldset');"
                "return [group && at.type === 'radio' ? group.querySelector('legend').textContent : '',"
                " at.labels?.[0]?.textContent ?? '', at.tagName === 'BUTTON' ? at.textContent : '']"
                ".filter(Boolean).join(': ')"
            )
        )

    def counts(self) -> dict[str, int]:
        """How many results stand how, as the bar says."""
        found = self.browser.run(
            "return [...document.querySelectorAll('[data-count]')].map("
            "(node) => [node.dataset.count, node.querySelector('b').textContent])"
        )
        return {status: int(number) for status, number in found}

    def message(self) -> str:
        """What the bar said last."""
        return self.browser.one(".review-message").text

    def export(self) -> Path:
        """Press the export button, and wait for the file."""
        for old in self.saved.iterdir():
            old.unlink()
        self.browser.one(".review-main").click()
        end = time.monotonic() + 10
        while time.monotonic() < end:
            files = [path for path in self.saved.iterdir() if path.suffix == ".json"]
            if files and files[0].stat().st_size:
                return files[0]
            time.sleep(0.05)
        raise AssertionError(f"nothing was saved; the page says: {self.message()}")

    def exported(self) -> dict[str, Any]:
        """The contents of the file that the export button saves."""
        contents: dict[str, Any] = json.loads(self.export().read_text("utf-8"))
        return contents


@pytest.fixture(scope="session")
def browser(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Browser]:
    """One Chromium for all tests."""
    with opened(tmp_path_factory.mktemp("profile")) as started:
        yield started


@pytest.fixture(scope="session")
def lodge(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The output folder of a survey: one finding, two components."""
    folder = tmp_path_factory.mktemp("lodge")
    run(site(folder), folder / "out", documents=())
    return folder / "out"


@pytest.fixture
def desk(browser: Browser, lodge: Path, tmp_path: Path) -> Iterator[Desk]:
    """The page of a report of its own for one test; nothing is kept of earlier tests."""
    saved = tmp_path / "saved"
    saved.mkdir()
    browser.driver.set_window_size(1280, 1000)
    browser.driver.execute_cdp_cmd(
        "Browser.setDownloadBehavior", {"behavior": "allow", "downloadPath": str(saved), "eventsEnabled": False}
    )
    made = Desk(browser, Path(shutil.copytree(lodge, tmp_path / "out")), saved)
    made.open()
    browser.run("localStorage.clear()")
    browser.reload()
    yield made
    assert browser.messages() == []
    assert [address for address in browser.requests() if not address.startswith(("file:", "about:", "blob:"))] == []
