"""From the unit a key ends in to SI: the only place where units are converted."""

from __future__ import annotations

from collections.abc import Callable
from math import radians
from typing import Final

from irsurvey.constants import ZERO_CELSIUS

CONVERSIONS: Final[dict[str, Callable[[float], float]]] = {
    "_c": lambda celsius: celsius + ZERO_CELSIUS,
    "_percent": lambda percent: percent / 100,
    "_hpa": lambda hectopascal: hectopascal * 100,
    "_um_k": lambda micrometre_kelvin: micrometre_kelvin / 1e6,
    "_um": lambda micrometre: micrometre / 1e6,
    "_mrad": lambda milliradian: milliradian / 1e3,
    "_deg": radians,
    "_min": lambda minutes: minutes * 60,
}
"""Ending of a key → its conversion; `_um_k` stands before the `_k` of a difference, which is kelvin already."""

TEMPERATURE_UNITS: Final[dict[str, tuple[float, float]]] = {
    "K": (1.0, 0.0),
    "C": (1.0, ZERO_CELSIUS),
    "F": (5 / 9, ZERO_CELSIUS - 32 * 5 / 9),
}
"""Unit of a stored temperature → factor and shift to kelvin (32 °F is 0 °C, a degree Fahrenheit 5/9 K: exact)."""


def si(key: str, value: float) -> float:
    """`value` of `key` in SI units (K, m, s, Pa, rad, fractions); a key without a listed ending is SI already."""
    if key.startswith("hours_"):
        return value * 3600
    for ending, conversion in CONVERSIONS.items():
        if key.endswith(ending):
            return conversion(value)
    return float(value)
