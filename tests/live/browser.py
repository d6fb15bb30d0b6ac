"""A headless Chromium for the tests, and what it reports: requests, messages of the console."""

from __future__ import annotations

import json
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from selenium import webdriver
from selenium.webdriver.chrome.service import Service
from selenium.webdriver.common.by import By
from selenium.webdriver.remote.webelement import WebElement

_OPTIONS = (
    *("--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--hide-scrollbars"),
    *("--disable-background-networking", "--disable-component-update", "--disable-sync", "--disable-dev-shm-usage"),
)
_SETTLED = """
document.documentElement.style.scrollBehavior = "auto"; // a click must not wait for a scroll
await new Promise((done) => setTimeout(done)); // after what the page itself does once it has loaded
"""


class Browser:
    """One window; `open` shows a page, `run` calls a function body in it and waits for what it returns."""

    def __init__(self, driver: webdriver.Chrome) -> None:
        self.driver = driver

    def open(self, page: Path) -> None:
        """Show a page; what earlier pages asked for or said is forgotten."""
        self.driver.get("about:blank")
        self.messages()
        self.requests()
        self.driver.get(page.as_uri())
        self.run(_SETTLED)

    def reload(self) -> None:
        """Load the page again."""
        self.driver.refresh()
        self.run(_SETTLED)

    def run(self, body: str, *arguments: Any) -> Any:
        """What an asynchronous function (`given`) with this body returns."""
        script = f"const done = arguments[arguments.length - 1]; const given = [...arguments].slice(0, -1);\
            (async () => {{ {body} }})().then((value) => done([true, value]), (fault) => done([false, fault.stack]));"
        worked, value = self.driver.execute_async_script(script, *arguments)
        assert worked, value
        return value

    def one(self, selector: str) -> WebElement:
        """The element of a CSS selector."""
        return self.driver.find_element(By.CSS_SELECTOR, selector)

    def messages(self) -> list[str]:
        """What the console said since it was last asked."""
        return [entry["message"] for entry in self.driver.get_log("browser")]

    def requests(self) -> list[str]:
        """Addresses asked for since it was last asked, pictures inside the page left out."""
        told = (json.loads(entry["message"])["message"] for entry in self.driver.get_log("performance"))
        sent = (entry["params"]["request"]["url"] for entry in told if entry["method"] == "Network.requestWillBeSent")
        return [address for address in sent if not address.startswith("data:")]


@contextmanager
def opened(profile: Path) -> Iterator[Browser]:
    """A browser with an empty profile; needs Debian's chromium and chromium-driver."""
    chromium, chromedriver = shutil.which("chromium"), shutil.which("chromedriver")
    assert chromium is not None, "these tests need Debian's package chromium"
    assert chromedriver is not None, "these tests need Debian's package chromium-driver"
    options = webdriver.ChromeOptions()
    options.binary_location = chromium
    for option in (*_OPTIONS, f"--user-data-dir={profile}", "--window-size=1280,1000"):
        options.add_argument(option)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    driver = webdriver.Chrome(options=options, service=Service(chromedriver))
    driver.set_script_timeout(60)
    try:
        yield Browser(driver)
    finally:
        driver.quit()
