"""What several folders of tests share."""

from __future__ import annotations

import pytest
from samples import SURVEYS

from irsurvey.run import run


@pytest.fixture(scope="session")
def sample_runs(tmp_path_factory):
    """Both sample surveys, run once: name → (report, output folder)."""
    runs = {}
    for name, path in SURVEYS.items():
        out = tmp_path_factory.mktemp(name) / "out"
        runs[name] = (run(path, out), out)
    return runs
