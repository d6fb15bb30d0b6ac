"""What comes out: plain records whose field names are the keys of report.json.

A trailing underscore (`class_`, `from_`) is dropped in the file.  Keys carry their unit; temperatures
are °C, differences K.  `None` becomes null and means "does not exist here"; nothing found is `()`.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from irsurvey.model.quantities import Estimate


@dataclass(frozen=True, slots=True)
class Input:
    """One input of the measurement, in the unit its key ends in, and where its value and its u came from."""

    value: float
    u: float
    from_: str
    u_from: str = "default"


@dataclass(frozen=True, slots=True)
class Source:
    """The raw file a frame was read from."""

    file: str
    sha256: str | None
    shape: tuple[int, int] | None
    dtype: str | None


@dataclass(frozen=True, slots=True)
class Detectable:
    """The smallest deviation and size this frame could have shown.

    A region is what deviates by `threshold_k` or more; it is reported where part of it passes `min_delta_k`.
    """

    threshold_k: float | None
    min_delta_k: float | None
    min_area_m2: float | None
    min_pixels: int
    noise_k: float | None  # estimated from the frame, in object temperature
    shading_allowance_k: float | None  # added to the threshold in the corners


@dataclass(frozen=True, slots=True)
class TemperatureSummary:
    """The object temperatures of the whole frame."""

    min_c: float | None
    max_c: float | None
    mean_c: float | None
    median_c: float | None
    unmeasurable_pixels: int
    saturated_pixels: int


@dataclass(frozen=True, slots=True)
class ReferenceReport:
    """The reference area; `gradient_k` is the range of its fitted plane over the area, 0 where none was needed."""

    how: str  # "polygon" | "automatic"
    median_c: float
    u_c: float | None
    spread_k: float
    pixels: int
    gradient_k: float
    heat_flux_w_m2: Estimate | None
    u_value_w_m2k: Estimate | None  # seen from inside with both air temperatures recorded
    polygon: tuple[tuple[float, float], ...]


@dataclass(frozen=True, slots=True)
class Assessment:
    """One criterion applied to one finding or component; class None: no class may be given, the statement says why.

    `verdict` holds the number against the edge where action begins, with a guard band of 2u (ILAC-G8:09/2019):
    "pass", "conditional pass", "conditional fail", "fail"; None without a class or an uncertainty.
    """

    criterion: str
    class_: str | None
    urgency: int | None
    statement: str
    probabilities: dict[str, float]
    source: str
    governs: bool = False
    verdict: str | None = None


@dataclass(frozen=True, slots=True)
class BudgetTerm:
    """What one input does to the uncertainty of one number; `u`, `sensitivity` in the unit the input's key ends in."""

    input: str
    u: float
    sensitivity: float  # of the number, per unit of the input
    contribution: float  # |change| of the number for one u
    share: float  # of the variance


@dataclass(frozen=True, slots=True)
class Flip:
    """A plausible change of one input (within 2u), in the unit its key ends in, that would change the class."""

    input: str
    change: float
    class_: str


@dataclass(frozen=True, slots=True)
class NextMeasurement:
    """One measurement for the next visit, and the findings and components (ids, keys) it would settle."""

    measurement: str
    settles: tuple[str, ...]
    why: str


@dataclass(frozen=True, slots=True)
class Indication:
    """What a finding is consistent with, the measured cues, and how to verify it."""

    pattern: str
    evidence: dict[str, float]
    verify_by: str


@dataclass(frozen=True, slots=True)
class Shape:
    """Measured cues of a finding's outline."""

    elongation: float  # major over minor axis of the equivalent ellipse
    edge_sharpness_per_pixel: float | None  # steepest gradient across the outline over the mean contrast
    centre: tuple[float, float]  # [px]
    extreme_at: tuple[float, float]  # [px]


@dataclass(frozen=True, slots=True)
class Finding:
    """One anomaly of one frame, measured and assessed."""

    id: str
    key: str
    label: int
    sense: str  # "hot" | "cold"
    polygon: tuple[tuple[int, int], ...]
    pixels: int
    area_m2: Estimate | None
    extreme_c: Estimate | None
    mean_c: Estimate | None
    delta_k: Estimate | None
    mean_delta_k: Estimate | None
    heat_flux_w_m2: Estimate | None
    reference_heat_flux_w_m2: Estimate | None
    excess_heat_w_m2: Estimate | None
    excess_heat_w: Estimate | None
    temperature_factor: Estimate | None
    shape: Shape
    exceeds_threshold: float | None  # probability that |ΔT| truly exceeds the smallest that counts
    assessments: tuple[Assessment, ...]
    urgency: int | None
    outcome: str  # "not cleared" | "act"
    flips: tuple[Flip, ...]  # changes of single inputs that would change the governing class
    budgets: dict[str, tuple[BudgetTerm, ...]]  # number → its terms, largest first
    indication: Indication | None
    flags: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Band:
    """A range instead of one number."""

    low: float
    high: float


@dataclass(frozen=True, slots=True)
class RatedLoad:
    """Rise extrapolated to rated load, as the band for load exponents 1.6 to 2.0."""

    delta_similar_k: Band | None
    delta_ambient_k: Band | None


@dataclass(frozen=True, slots=True)
class ComponentReport:
    """One electrical component of one frame, measured and assessed."""

    name: str
    key: str
    group: str | None
    phase: str | None
    load_a: float | None
    rated_a: float | None
    polygon: tuple[tuple[float, float], ...]
    pixels: int
    max_c: Estimate | None
    mean_c: Estimate | None
    delta_similar_k: Estimate | None
    similar_to: str | None  # the twin it was compared with; None for the coolest itself, whose difference is 0
    delta_ambient_k: Estimate | None
    heat_flux_w_m2: Estimate | None
    at_rated_load: RatedLoad | None
    assessments: tuple[Assessment, ...]
    urgency: int | None
    cleared: bool
    outcome: str  # "cleared" | "not cleared" | "act"
    flips: tuple[Flip, ...]
    budgets: dict[str, tuple[BudgetTerm, ...]]
    flags: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class FrameReport:
    """Everything reported about one frame."""

    id: str
    status: str  # "analysed" | "failed"
    reason: str | None
    kind: str
    claim: str  # "quantitative" | "qualitative" | "not valid"
    claim_reason: str
    group: str | None
    label: str
    asset: str | None
    notes: str
    taken: str | None  # ISO 8601 with offset
    source: Source
    inputs: dict[str, Input]
    humid_air: dict[str, float]  # dew_point_c, vapour_density_g_m3
    uncertainty: str | None  # "first-order" | "monte-carlo"
    draws: int | None  # of Monte Carlo
    atmosphere_transmittance: float | None
    radiance_table_error_k: float | None  # worst error of the run-time table, −40…300 °C
    detectable: Detectable | None
    temperature: TemperatureSummary | None
    reference: ReferenceReport | None
    findings: tuple[Finding, ...]
    components: tuple[ComponentReport, ...]
    flags: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class ConditionCheck:
    """One requirement on the conditions of the survey, held against what was recorded."""

    group: str
    check: str
    requirement: str
    value: float | None
    verdict: str  # "met" | "not met" | "not recorded"
    source: str


@dataclass(frozen=True, slots=True)
class AssetReport:
    """One asset of the round and whether it was inspected."""

    id: str
    description: str
    location: str
    criticality: int | None
    inspected: bool
    reason: str | None
    frames: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Report:
    """A whole report: what report.json holds."""

    format: int
    tool: dict[str, str]
    survey: dict[str, object]
    conditions_review: tuple[ConditionCheck, ...]
    next_visit: tuple[NextMeasurement, ...]
    assets: tuple[AssetReport, ...]
    frames: tuple[FrameReport, ...]
    cautions: tuple[str, ...]


@dataclass(frozen=True, slots=True, eq=False)
class Maps:
    """The arrays that go with a frame report, shape (rows, columns)."""

    temperature_c: NDArray[np.float32]  # NaN where not measurable
    labels: NDArray[np.uint16]  # 0 none, k = finding k
    reference: NDArray[np.bool_]
    heat_flux: NDArray[np.float32] | None = None  # [W m⁻²], on request
    u_temperature: NDArray[np.float32] | None = None  # standard uncertainty [K], on request
