"""What several folders of tests share."""

from __future__ import annotations

import pytest
from hypothesis import settings
from samples import SURVEYS

from irsurvey.run import run

# An example may take long where two cores do the work of ten: time is no property of what is tested.
settings.register_profile("patient", deadline=None)
settings.load_profile("patient")


BROWSER = ("live", "review")
"""Folders of tests that need Chromium: `pytest -m browser`."""


def pytest_collection_modifyitems(items):
    for item in items:
        if item.path.parent.name in BROWSER:
            item.add_marker(pytest.mark.browser)


@pytest.fixture(scope="session")
def sample_runs(tmp_path_factory):
    """Both sample surveys, run once: name → (report, output folder)."""
    runs = {}
    for name, path in SURVEYS.items():
        out = tmp_path_factory.mktemp(name) / "out"
        runs[name] = (run(path, out), out)
    return runs
