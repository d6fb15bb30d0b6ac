"""Frames and tasks built in tests: invented values, a plain camera, everything stated."""

from __future__ import annotations

from typing import Any

import numpy as np

from irsurvey.model import Camera, Frame, FrameTask, Quantity, Scene, Signal

KELVIN = 273.15
CENTIKELVIN = Signal("apparent-temperature", scale=0.01)


def camera(**changes: Any) -> Camera:
    """A long-wave camera that stores apparent temperature in hundredths of a kelvin."""
    given: dict[str, Any] = {
        "name": "camera",
        "band": (7.5e-6, 13e-6),
        "signal": CENTIKELVIN,
        "ifov": 1e-3,
        "noise": 0.05,
        **changes,
    }
    return Camera(**given)


GOOD_CONDITIONS = {
    "hours_difference_held": 48 * 3600.0,
    "hours_since_sun": 14 * 3600.0,
    "hours_since_rain": 40 * 3600.0,
    "wind": 1.0,
}
"""What an envelope survey must have recorded, besides both air temperatures, for numbers to be claimed."""


def scene(**values: float | tuple[float, float]) -> Scene:
    """A calm room at 20 °C; values in SI, or (value, standard uncertainty)."""
    given: dict[str, Any] = {
        "emissivity": (0.95, 0.02),
        "reflected": (293.15, 1.0),
        "air": (293.15, 0.5),
        "relative_humidity": (0.5, 0.05),
        "distance": (2.0, 0.1),
        "pressure": (101_325.0, 500.0),
        "atmosphere": (0.0, 0.15),
        "mean_radiant": (293.15, 0.5),
        "convection": (1.0, 0.25),
        "ifov": (1e-3, 2e-5),
        "view_angle": (0.0, 0.05),
        "shading": (0.0, 0.3),
        "shading_x": (0.0, 0.15),
        "shading_y": (0.0, 0.15),
        "outline": (0.0, 0.5),
        "size_of_source": (0.0, 1 / 3**0.5),
        **values,
    }
    ends = {"emissivity": (0.0, 1.0), "relative_humidity": (0.0, 1.0), "distance": (0.0, np.inf)}
    quantities = []
    for name, value in given.items():
        centre, u = value if isinstance(value, tuple) else (value, 0.0)
        low, high = ends.get(name.partition(":")[0], (-np.inf, np.inf))
        quantities.append(Quantity(name, centre, u, "survey", low, high))
    return Scene(tuple(quantities))


def task(**changes: Any) -> FrameTask:
    """A building frame seen from inside, reference over the left third."""
    given: dict[str, Any] = {
        "id": "F01",
        "file": "f01.tif",
        "path": "",
        "kind": "building",
        "method": "envelope",
        "viewed_from": "inside",
        "camera": camera(),
        "scene": scene(),
        "reference": ((2.0, 2.0), (50.0, 2.0), (50.0, 117.0), (2.0, 117.0)),
        **changes,
    }
    return FrameTask(**given)


def frame(t_apparent: Any, seed: int | None = 1, noise: float = 0.05) -> Frame:
    """A centikelvin frame of apparent temperatures [K], with noise unless `seed` is None."""
    t = np.asarray(t_apparent, float)
    if seed is not None:
        t = t + np.random.default_rng(seed).normal(0, noise, t.shape)
    return Frame(np.rint(t * 100).astype(np.uint16), sha256="0" * 64)
