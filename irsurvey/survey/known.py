"""Names that other folders own, which a survey file may use."""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from irsurvey.errors import Fault

DegreeDays = Callable[[NDArray[np.float64], NDArray[np.float64], float, str], Any]
"""Degree days [K d] of readings: seconds, outdoor temperatures [K], base temperature [K], "heating" or "cooling"."""
CriterionFaults = Callable[[str], list[Fault]]
"""What is wrong with the text of a criterion file; `where` is the key in that file, or empty."""


@dataclass(frozen=True, slots=True)
class Known:
    """Names of criteria and of convection correlations; materials by name as (emissivity, its u).

    That u comes from a range of real samples: a rectangular distribution.  `standards` with requirements on the
    conditions; `sky_models` by name with their standard uncertainty [K]; `building_materials` by name as
    (conductivity [W m⁻¹ K⁻¹], density [kg m⁻³], specific heat [J kg⁻¹ K⁻¹]); `degree_days` sums a year's temperatures;
    `limits`: names of absolute temperature limits; `criterion_faults` judges criterion files of the survey's own.
    """

    criteria: tuple[str, ...]
    convections: tuple[str, ...]
    materials: Mapping[str, tuple[float, float]]
    standards: Collection[str] = ()
    sky_models: Mapping[str, float] = field(default_factory=dict)
    building_materials: Mapping[str, tuple[float, float, float]] = field(default_factory=dict)
    degree_days: DegreeDays | None = None
    limits: Collection[str] = ()
    criterion_faults: CriterionFaults | None = None
