"""Building materials by plain name, from building_materials.toml."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files


@dataclass(frozen=True, slots=True)
class BuildingMaterial:
    """What a layer is reckoned with: design values.

    `mark`: S published, seen as quoted by a secondary text; M from memory, not checked."""

    conductivity: float  # [W m⁻¹ K⁻¹]
    density: float  # [kg m⁻³]
    specific_heat: float  # [J kg⁻¹ K⁻¹]
    source: str
    mark: str


@cache
def building_materials() -> Mapping[str, BuildingMaterial]:
    """All building materials by name, in the order of the table."""
    text = files("irsurvey.heat").joinpath("building_materials.toml").read_text(encoding="utf-8")
    return {name: BuildingMaterial(**row) for name, row in tomllib.loads(text).items()}
