"""What the loggers of Quarry Cottage wrote: two days of weather, a night in the bathroom, a year of daily means."""

from __future__ import annotations

from collections.abc import Callable
from datetime import datetime, timedelta
from math import cos, pi

import numpy as np
from painting import normals

START, END = datetime(2026, 2, 1, 6), datetime(2026, 2, 3, 9)
STEP = timedelta(minutes=30)
OUTDOOR_C = [  # (hours after START, value); straight lines between
    (0.0, -0.8), (1.5, -1.2), (7.0, 1.0), (12.0, 0.2), (18.0, -1.2), (24.0, -2.2), (25.5, -2.5), (28.0, -0.6),
    (32.5, 1.5), (34.5, 1.1), (37.0, 0.4), (38.5, 0.0), (40.0, 0.0), (43.0, -0.3), (46.0, -0.2), (47.0, 0.0),
    (50.5, 0.0), (51.0, 0.2),
]  # fmt: skip
IRRADIANCE_W_M2 = [  # a clouded day, then a clear one; the rim of the quarry takes the sun away early
    (0.0, 0), (2.0, 0), (4.0, 60), (6.0, 90), (8.0, 70), (10.0, 15), (10.5, 0), (25.5, 0), (26.0, 30), (27.0, 120),
    (28.0, 230), (29.0, 310), (30.0, 340), (31.0, 320), (32.0, 240), (33.0, 140), (33.5, 85), (34.0, 30), (34.5, 0),
    (49.5, 0), (50.0, 40), (50.5, 90), (51.0, 130),
]  # fmt: skip
INDOOR_C = [(0.0, 19.8), (9.0, 20.2), (18.0, 20.0), (24.0, 19.9), (30.0, 20.2), (38.5, 20.0), (51.0, 20.0)]
WIND_M_S = [(0.0, 2.5), (8.0, 3.0), (20.0, 1.5), (30.0, 2.0), (36.0, 1.5), (38.0, 1.0), (51.0, 1.0)]
RAIN_MM = {6.0: 0.4, 6.5: 0.6, 7.0: 0.8, 7.5: 0.4, 8.0: 0.2}  # in the half-hour before
BATHROOM_RH_PERCENT = [(0.0, 58), (12.0, 61), (13.5, 84), (14.5, 76), (17.0, 72), (20.0, 70), (25.0, 70)]


def loggers() -> str:
    """Every half-hour of the two days before the survey: a mast in the garden, and the hall."""
    lines = ["time,outdoor_air_c,indoor_air_c,irradiance_w_m2,rain_mm,wind_m_s"]
    for k in range(int((END - START) / STEP) + 1):
        hours = k * 0.5
        outdoor_c, indoor_c, irradiance, wind = (
            at(hours, series) for series in (OUTDOOR_C, INDOOR_C, IRRADIANCE_W_M2, WIND_M_S)
        )
        moment, rain = (START + k * STEP).isoformat(), RAIN_MM.get(hours, 0.0)
        lines.append(f"{moment},{outdoor_c:.1f},{indoor_c:.1f},{irradiance:.0f},{rain:.1f},{wind:.1f}")
    return "\n".join(lines) + "\n"


def bathroom() -> str:
    """The bathroom's air from the morning before: a shower at night, and 70 % ever since."""
    lines = ["time,indoor_air_c,indoor_relative_humidity_percent"]
    for k in range(26):
        humidity = at(float(k), BATHROOM_RH_PERCENT)
        lines.append(f"{(datetime(2026, 2, 2, 6) + timedelta(hours=k)).isoformat()},20.0,{humidity:.0f}")
    return "\n".join(lines) + "\n"


def year() -> str:
    """Daily means of the outdoor air, the year before the survey."""
    lines = ["time,outdoor_air_c"]
    for day, mean_c in enumerate(daily_means()):
        lines.append(f"{(datetime(2025, 2, 3, 12) + timedelta(days=day)).isoformat()},{mean_c:.1f}")
    return "\n".join(lines) + "\n"


def daily_means() -> list[float]:
    """A year's swing, coldest about 20 January, and weather that lasts for some days; to a tenth of a degree."""
    pushes = normals("house year", (1, 365))[0]
    spell, means = 0.0, []
    for day in range(365):
        spell = 0.75 * spell + 2.1 * float(pushes[day])
        means.append(round(9.3 - 10.2 * cos(2 * pi * (day + 14) / 365) + spell, 1))
    return means


def at(hours: float, series: list[tuple[float, float]]) -> float:
    """A logged value between the two listed before and after; +0.0 where it rounds to nothing below zero."""
    times, values = zip(*series, strict=True)
    return round(float(np.interp(hours, times, values)), 1) + 0.0


LOGS: dict[str, Callable[[], str]] = {"loggers.csv": loggers, "bathroom.csv": bathroom, "year.csv": year}
