"""Where the sample surveys lie, and the truth that was saved beside their frames."""

from __future__ import annotations

import json
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

SAMPLES = Path(__file__).parents[1] / "sample_frames"
HOUSE = SAMPLES / "house" / "survey.toml"
PUMP_STATION = SAMPLES / "pump_station" / "survey.toml"
SURVEYS = {"house": HOUSE, "pump_station": PUMP_STATION}


@dataclass(frozen=True, eq=False)
class Truth:
    """What is true about one sample frame; sample_frames/README.md says what each field means."""

    temperature_c: NDArray[np.float64]
    defect: NDArray[np.uint8]
    exclude: NDArray[np.bool_]
    facts: dict[str, Any]


@cache
def truth_facts(survey: str) -> dict[str, dict[str, Any]]:
    """The entries of truth.json by frame id."""
    facts: dict[str, dict[str, Any]] = json.loads((SAMPLES / survey / "truth" / "truth.json").read_text("utf-8"))
    return facts


@cache
def truth(survey: str, frame: str) -> Truth:
    """The truth about one frame."""
    with np.load(SAMPLES / survey / "truth" / f"{frame}.npz") as arrays:
        return Truth(
            temperature_c=arrays["temperature_ck"] / 100 - 273.15,
            defect=arrays["defect"],
            exclude=arrays["exclude"],
            facts=truth_facts(survey)[frame],
        )


FRAMES = [(survey, frame) for survey in SURVEYS for frame in truth_facts(survey)]
"""(survey, frame id) of every sample frame."""
