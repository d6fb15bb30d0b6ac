"""Emissivities of common surfaces by plain name, from emissivities.toml."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cache
from importlib.resources import files
from math import sqrt
from typing import Final

_RANGES: Final = {"source": "", "allowance": "its range is an allowance, not from the source"}


@dataclass(frozen=True, slots=True)
class Material:
    """Emissivity of a surface at normal view in 8–14 µm; standard uncertainty `u`, range `low`…`high`.

    `mark`: S published, seen as quoted by a secondary text; M from memory, not checked."""

    name: str
    emissivity: float
    u: float
    low: float
    high: float
    note: str
    source: str
    mark: str


def material(name: str) -> Material:
    """The material of that name; KeyError where there is none (see `nearest`)."""
    return materials()[name]


def nearest(name: str) -> tuple[str, ...]:
    """Up to three names of materials that look like `name`, best first."""
    return tuple(get_close_matches(name, materials(), n=3, cutoff=0.4))


@cache
def materials() -> dict[str, Material]:
    """All materials by name, in the order of the table."""
    text = files("irsurvey.radiometry").joinpath("emissivities.toml").read_text(encoding="utf-8")
    return {
        name: Material(
            name=name,
            emissivity=entry["emissivity"],
            u=(entry["high"] - entry["low"]) / (2 * sqrt(3)),  # rectangular: JCGM 100:2008, 4.3.7
            low=entry["low"],
            high=entry["high"],
            note="; ".join(filter(None, (entry.get("note"), _RANGES[entry["range"]]))),
            source=entry["source"],
            mark=entry["mark"],
        )
        for group in tomllib.loads(text).values()
        for name, entry in group.items()
    }
