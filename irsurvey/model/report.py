"""What comes out: plain records whose field names are the keys of report.json.

A trailing underscore (`class_`, `from_`) is dropped in the file.  Keys carry their unit; temperatures
are °C, differences K.  `None` becomes null and means "does not exist here"; nothing found is `()`.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from irsurvey.model.conclusions import (
    AssetReport,
    ChecklistItem,
    ConditionCheck,
    NextMeasurement,
    PopulationAlarm,
    RepairItem,
    Review,
    ReviewStatus,
    SeasonReport,
)
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
    heat_flux_terms_w_m2: dict[str, Estimate | None]  # convection, and radiation to what the surface faces
    film_resistance_m2k_w: Estimate | None  # of the face seen, convection and radiation together
    u_value_w_m2k: Estimate | None  # from the heat flux, between environmental and air temperature
    u_value_simple_w_m2k: Estimate | None  # from the conventional film resistance alone
    refusals: dict[str, str]  # number that is not given → why, and what would make it possible
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
    quantity: str = ""  # key of the number it judges


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
class Indication:
    """What a finding is consistent with, the measured cues, and how to verify it."""

    pattern: str  # "no typical pattern" where the cues fit none
    statement: str  # "Consistent with …; verify by …"
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
    excess_heat_w_k: Estimate | None  # per kelvin between indoor and outdoor air
    heat_flux_terms_w_m2: dict[str, Estimate | None]
    u_value_w_m2k: Estimate | None
    u_value_increase_w_m2k: Estimate | None  # over that of the reference area
    u_value_from_contrast_w_m2k: Estimate | None  # the element's stated U plus the increase
    temperature_factor: Estimate | None  # at the film resistance seen
    temperature_factor_at_0_25: Estimate | None  # at 0.25 m² K W⁻¹, which limits assume
    dew_point_margin_k: Estimate | None  # coldest spot minus dew point of the room air
    mould_margin_k: Estimate | None  # coldest spot minus the least surface temperature against mould
    condensation_probability: float | None
    mould_probability: float | None
    pressure_change_k: Estimate | None  # mean over the finding, with pressure minus without
    refusals: dict[str, str]
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
class LimitReport:
    """The absolute limit of a part: of the materials and insulation that meet in it, the lowest."""

    name: str
    max_c: float
    rise_k: float | None  # allowed above ambient air at rated load
    allowed_now_c: Band | None  # at this load and ambient, for load exponents 1.6 to 2.0
    source: str


@dataclass(frozen=True, slots=True)
class JointHeat:
    """Heat of a joint: always an estimate; what flows off along the conductor is not in it."""

    form: str
    film_coefficient_w_m2k: Estimate | None
    power_w: Estimate | None
    excess_power_w: Estimate | None  # over its twin
    excess_resistance_uohm: Estimate | None  # at least this much
    voltage_drop_mv: Estimate | None  # over the excess resistance, at this load
    yearly_loss_kwh: Estimate | None  # of the excess, at this load all year


@dataclass(frozen=True, slots=True)
class TrendReport:
    """A component's rise over the surveys, brought to rated load and one ambient."""

    points: tuple[tuple[str, float], ...]  # ISO 8601 date, rise at rated load [K]
    slope_k_per_year: Estimate | None  # Theil–Sen
    slope_low_k_per_year: float | None  # 95 % interval
    slope_high_k_per_year: float | None
    change_k: Estimate | None  # since the last survey
    is_significant: bool | None


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
    delta_similar_in_calm_k: Estimate | None  # brought to 1 m/s of wind; None where there is none to correct
    delta_ambient_in_calm_k: Estimate | None
    relative_difference_percent: Estimate | None  # of the rises of this part and its twin
    above_limit_k: Estimate | None  # spot maximum minus its absolute limit
    above_allowed_k: Estimate | None  # minus what is allowed at this load and ambient, n = 1.8 ± 0.2
    delta_neighbours_k: Estimate | None  # PV: over the median of its neighbours, brought to 1000 W/m²
    heat_flux_w_m2: Estimate | None
    is_found: bool
    limit: LimitReport | None
    joint: JointHeat | None
    trend: TrendReport | None
    indication: Indication | None
    at_rated_load: RatedLoad | None
    assessments: tuple[Assessment, ...]
    urgency: int | None
    cleared: bool
    outcome: str  # "cleared" | "not cleared" | "act"
    flips: tuple[Flip, ...]
    budgets: dict[str, tuple[BudgetTerm, ...]]
    flags: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class RoomAir:
    """Humidity of the air a surface seen from inside is exposed to, and the surface temperatures it asks for."""

    how: str  # where its humidity comes from: "measured" | "humidity class n"
    vapour_pressure_pa: Estimate | None
    dew_point_c: Estimate | None
    mould_surface_c: Estimate | None  # below it the air at the surface is at 80 % or more


@dataclass(frozen=True, slots=True)
class SurfaceAtRisk:
    """How much of the surface inspected lies at or below a limit; low and high: with margins of 2u either way."""

    risk: str  # "condensation" | "mould" | name of a criterion
    limit_c: Estimate | None
    share: float
    share_low: float
    share_high: float
    area_m2: float | None
    area_low_m2: float | None
    area_high_m2: float | None
    probability: float | None  # that the coldest spot does


@dataclass(frozen=True, slots=True)
class StripReport:
    """A thermal bridge measured along a line across it."""

    name: str
    from_: tuple[float, float]
    to: tuple[float, float]
    width_px: int
    length_m: Estimate | None
    undisturbed_c: Estimate | None
    undisturbed_gradient_k_per_m: Estimate | None  # how steep its ends still are
    extreme_c: Estimate | None
    temperature_factor: Estimate | None
    incidence_factor: Estimate | None  # heat through the strip over that of the undisturbed wall
    linear_transmittance_w_mk: Estimate | None  # Ψ
    u_value_w_m2k: Estimate | None  # undisturbed
    refusals: dict[str, str]
    flags: tuple[str, ...]
    profile: tuple[tuple[float, float], ...]  # distance from the start [px], temperature [°C]


@dataclass(frozen=True, slots=True)
class PressureChange:
    """A region whose temperature changed with the pressure."""

    sense: str  # "hot" | "cold": how it changed
    polygon: tuple[tuple[int, int], ...]
    pixels: int
    area_m2: Estimate | None
    mean_change_k: Estimate | None
    finding: str | None  # id of the finding it overlaps most


@dataclass(frozen=True, slots=True)
class PairReport:
    """Two frames of one view, with and without a pressure difference."""

    with_: str
    pressure_pa: float
    accepted: bool
    reason: str  # why the two could not be compared; else ""
    correlation: float | None  # of the two pictures, laid over each other
    shift_px: tuple[float, float] | None
    rotation_deg: float | None
    threshold_k: float | None  # smallest change that counts
    changes: tuple[PressureChange, ...]


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
    element: str | None
    room_air: RoomAir | None
    surface_at_risk: tuple[SurfaceAtRisk, ...]
    strips: tuple[StripReport, ...]
    pair: PairReport | None
    flags: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Report:
    """A whole report: what report.json holds."""

    format: int
    tool: dict[str, str]
    survey: dict[str, object]
    claim: str  # that more than half of its frames may make; the reason names the others
    claim_reason: str
    conditions_review: tuple[ConditionCheck, ...]
    next_visit: tuple[NextMeasurement, ...]
    assets: tuple[AssetReport, ...]
    frames: tuple[FrameReport, ...]
    repairs: tuple[RepairItem, ...]
    populations: tuple[PopulationAlarm, ...]
    seasons: tuple[SeasonReport, ...]
    checklist: tuple[ChecklistItem, ...]
    cautions: tuple[str, ...]
    reviews: tuple[Review, ...] = ()  # by date, of one date in the order they came in
    review_status: tuple[ReviewStatus, ...] = ()  # of every finding and component; empty without reviews


@dataclass(frozen=True, slots=True, eq=False)
class Maps:
    """The arrays that go with a frame report, shape (rows, columns)."""

    temperature_c: NDArray[np.float32]  # NaN where not measurable
    labels: NDArray[np.uint16]  # 0 none, k = finding k
    reference: NDArray[np.bool_]
    change: NDArray[np.float32] | None = None  # with pressure minus without [K], of an accepted pair
    heat_flux: NDArray[np.float32] | None = None  # [W m⁻²], on request
    u_temperature: NDArray[np.float32] | None = None  # standard uncertainty [K], on request
