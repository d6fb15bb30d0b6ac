"""What was written down at Saltmarsh pumping station before the round: loads of two pumps, and earlier rounds."""

from __future__ import annotations

import json
from collections.abc import Callable
from datetime import datetime, timedelta

import numpy as np
from painting import normals

START, END = datetime(2026, 3, 11, 7), datetime(2026, 3, 11, 11)
STEP = timedelta(minutes=5)
# (minutes after START, amperes): pump 1 carried 165 A all morning and was run up to 190 A between 10:20 and 10:30.
PUMP_ONE_A = [(0, 165), (200, 165), (210, 190), (240, 190)]
# Both storm pumps on since half past seven.
PUMP_TWO_A = [(0, 150), (25, 150), (30, 236), (240, 236)]
AT_FRAMES = [38, 39, 40, 44, 45]  # readings before and after the frames of 10:12, 10:18 and 10:41
UNBALANCE_A = {"1": 0, "2": -1, "3": 1}  # of the phases

EARLIER = {  # asset, component: (date, over ambient, over its twin, load, rated)
    ("feeder-pump-one", "phase 2 lug"): (
        ("2023-09-13", 19.2, 2.0, 160, 250),
        ("2024-03-12", 21.8, 4.4, 161, 250),
        ("2024-09-11", 25.6, 8.3, 166, 250),
        ("2025-03-12", 28.9, 11.6, 163, 250),
        ("2025-09-10", 34.0, 16.5, 167, 250),
    ),
    ("incomer", "phase 1 lug"): (
        ("2023-09-13", 14.9, 0.3, 210, 400),
        ("2024-03-12", 13.6, 0.2, 201, 400),
        ("2024-09-11", 14.5, 0.4, 207, 400),
        ("2025-03-12", 14.1, 0.3, 204, 400),
        ("2025-09-10", 14.6, 0.3, 209, 400),
    ),
}


def pump_one() -> str:
    """The load of pump 1: steady until it is run up."""
    return load_log("pump one load", PUMP_ONE_A)


def pump_two() -> str:
    """The load of pump 2: above its rating, and steady."""
    return load_log("pump two load", PUMP_TWO_A)


def load_log(name: str, series: list[tuple[int, int]]) -> str:
    """Every five minutes the current of three phases: within two per cent of the series, and just that at a frame."""
    minutes, amperes = zip(*series, strict=True)
    stray = np.clip(normals(name, (1, 49))[0], -2, 2) * 0.01
    stray[AT_FRAMES] = 0
    lines = ["time," + ",".join(f"load_a_{phase}" for phase in UNBALANCE_A)]
    for k in range(int((END - START) / STEP) + 1):
        load = float(np.interp(5 * k, minutes, amperes)) * (1 + stray[k])
        phases = ",".join(f"{load + more:.1f}" for more in UNBALANCE_A.values())
        lines.append(f"{(START + k * STEP).isoformat()},{phases}")
    return "\n".join(lines) + "\n"


def history() -> str:
    """Two lugs in earlier rounds: one that grows worse, one that does not."""
    lines = ["date,asset,component,delta_ambient_k,delta_similar_k,load_a,rated_a,u_k"]
    for (asset, component), rounds in EARLIER.items():
        lines += [",".join(map(str, (date, asset, component, *values, 1.0))) for date, *values in rounds]
    return "\n".join(lines) + "\n"


def round_truth() -> str:
    """What is true about the round beyond its single frames."""
    truth = {
        "standing_out": {"motor breakers": ["breakers-right:component:breaker 7"]},
        "trends": {"pump-one:component:phase 2 lug": "rising", "incomer:component:phase 1 lug": "level"},
        # From the first reading within ±10 % of the load at the frame, and from the last one outside it.
        "steady_min": {"pump-one": [192, 192], "pump-two": [168, 173], "soft-starter": [16, 21]},
        "worst_by_urgency": {
            "4": ["pump-one:component:phase 2 lug", "yard-isolator:component:phase 2 clamp"],
            "2": [
                "transformer:component:phase 3 lug",
                "bus-coupler:component:phase 1 lug",
                "terminals:component:terminal 12",
                "breakers-right:component:breaker 7",
            ],
        },
    }
    return json.dumps(truth, indent=1, ensure_ascii=False) + "\n"


LOGS: dict[str, Callable[[], str]] = {
    "pump-one.csv": pump_one,
    "pump-two.csv": pump_two,
    "history.csv": history,
    "truth/round.json": round_truth,
}
