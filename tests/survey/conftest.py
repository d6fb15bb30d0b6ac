"""A survey folder in the making: the file's text in, the loaded survey or its faults out."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from irsurvey.errors import Fault, SurveyError
from irsurvey.model import Survey
from irsurvey.survey.load import Known, load


def kelvin_days(seconds: NDArray[np.float64], t_outdoor: NDArray[np.float64], t_base: float, sense: str) -> float:
    """Degree days as if every reading held until the next one: a rule of the tests alone."""
    sign = 1 if sense == "heating" else -1
    return float(np.sum(np.diff(seconds) / 86_400 * np.maximum(sign * (t_base - t_outdoor), 0)[:-1]))


def criterion_faults(text: str) -> list[Fault]:
    """One fault for each line "key = bad", and one without a key for a text of nothing: a rule of the tests alone."""
    bad = [line.split(" = ")[0] for line in text.splitlines() if line.endswith(" = bad")]
    return [Fault("", "a criterion", "nothing")] if not text.strip() else [Fault(key, "good", "bad") for key in bad]


KNOWN = Known(
    criteria=("building-delta-t", "temperature-factor"),
    convections=("iso-6946", "churchill-chu"),
    materials={
        "plaster": (0.91, 0.03),
        "brick": (0.93, 0.02),
        "glass": (0.87, 0.03),
        "steel": (0.3, 0.1),
        "copper": (0.1, 0.05),
    },
    standards=("en-13187", "astm-c1060"),
    sky_models={"berdahl-martin": 5.0, "swinbank": 6.0},
    building_materials={"brick": (0.77, 1700.0, 800.0), "gypsum plaster": (0.4, 1000.0, 1000.0)},
    degree_days=kelvin_days,
    limits=("iec-60694/bolted-bare", "iec-60694/bolted-tin", "insulation/F"),
    criterion_faults=criterion_faults,
)
HEAD = """
[survey]
title = "T"
kind = "building"
"""
CAMERA = """
[camera]
band_um = [7.5, 13]
signal = { quantity = "apparent-temperature", unit = "K" }
"""
CONDITIONS = """
[conditions]
air_c = 20
reflected_c = 19
distance_m = 2
"""
FRAME = """
[[frame]]
id = "F01"
file = "f01.tif"
"""
MINIMAL = HEAD + CAMERA + CONDITIONS + FRAME

Load = Callable[..., Survey]
Faults = Callable[..., tuple[Fault, ...]]


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """The survey's folder, beside which other files may lie."""
    folder = tmp_path / "site"
    folder.mkdir()
    return folder


@pytest.fixture
def load_text(folder: Path) -> Load:
    """Writes survey.toml and the files beside it, and loads it."""

    def loaded(text: str, files: dict[str, str] | None = None) -> Survey:
        for name, content in {**(files or {}), "survey.toml": text}.items():
            (folder / name).parent.mkdir(parents=True, exist_ok=True)
            (folder / name).write_bytes(content.encode("utf-8"))
        return load(folder / "survey.toml", known=KNOWN)

    return loaded


@pytest.fixture
def faults_of(load_text: Load) -> Faults:
    """The faults of a survey file that must have some."""

    def faults(text: str, files: dict[str, str] | None = None) -> tuple[Fault, ...]:
        with pytest.raises(SurveyError) as caught:
            load_text(text, files)
        assert caught.value.exit_code == 2
        return caught.value.faults

    return faults


@pytest.fixture
def minimal() -> str:
    """The shortest survey that runs: one frame F01, air 20, reflected 19 °C, 2 m."""
    return MINIMAL
