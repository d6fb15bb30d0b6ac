"""A browser, and two small surveys run once: frames of a house, frames of a pump station with components."""

from __future__ import annotations

from collections.abc import Iterator

import pytest
from live.browser import Browser, opened
from live.pages import reduced
from live.runs import HOUSE_FRAMES, PUMP_FRAMES, Run, ran
from samples import HOUSE, PUMP_STATION


@pytest.fixture(scope="session")
def house(tmp_path_factory: pytest.TempPathFactory) -> Run:
    """Frames of the sample house."""
    folder = tmp_path_factory.mktemp("house")
    return ran(reduced(HOUSE, folder / "survey", HOUSE_FRAMES), folder)


@pytest.fixture(scope="session")
def pumps(tmp_path_factory: pytest.TempPathFactory) -> Run:
    """Frames of the sample pump station."""
    folder = tmp_path_factory.mktemp("pumps")
    return ran(reduced(PUMP_STATION, folder / "survey", PUMP_FRAMES), folder)


@pytest.fixture(scope="session")
def browser(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Browser]:
    """One Chromium for all tests."""
    with opened(tmp_path_factory.mktemp("profile")) as started:
        yield started
