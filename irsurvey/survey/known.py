"""Names that other folders own, which a survey file may use."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Known:
    """Names of criteria and of convection correlations; materials by name as (emissivity, its u).

    That u comes from a range of real samples: a rectangular distribution.
    """

    criteria: tuple[str, ...]
    convections: tuple[str, ...]
    materials: Mapping[str, tuple[float, float]]
