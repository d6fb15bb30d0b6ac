"""What is said of a survey as a whole: conditions, seasons, repairs, populations, assets, a checklist, reviews."""

from __future__ import annotations

from dataclasses import dataclass

from irsurvey.model.quantities import Estimate


@dataclass(frozen=True, slots=True)
class NextMeasurement:
    """One measurement for the next visit, and the findings and components (ids, keys) it would settle."""

    measurement: str
    settles: tuple[str, ...]
    why: str


@dataclass(frozen=True, slots=True)
class ConditionCheck:
    """One requirement on the conditions of the survey, held against what was recorded."""

    group: str
    check: str
    requirement: str
    value: float | None
    verdict: str  # "met" | "not met" | "not recorded"
    source: str
    limits_to: str | None = None  # the most that may be claimed because of it; None where it is met


@dataclass(frozen=True, slots=True)
class ChecklistItem:
    """Something a complete report states, and whether this one does."""

    item: str
    asked_by: str  # "simplified report" | "full report"
    present: bool
    where: str  # what it was found in, or the key of the survey file that would state it


@dataclass(frozen=True, slots=True)
class SeasonRow:
    """What one finding, or one whole element, costs in a season."""

    of: str  # id of a finding or of an element
    frame: str | None
    heat_w_k: Estimate | None
    energy_kwh: Estimate | None
    cost: Estimate | None  # in the season's currency
    order_of_magnitude: bool  # too uncertain for more than that


@dataclass(frozen=True, slots=True)
class SeasonReport:
    """An estimate for a heating or cooling season; rows by heat, the largest first."""

    sense: str  # "heating" | "cooling"
    degree_days_kd: Estimate
    how: str
    efficiency: float
    price: float | None  # per kWh
    currency: str
    findings: tuple[SeasonRow, ...]
    elements: tuple[SeasonRow, ...]
    findings_total: SeasonRow | None
    elements_total: SeasonRow | None


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
class RepairItem:
    """One line of the repair list, the most urgent and surest first."""

    rank: int
    key: str  # of the finding or component
    frame: str
    what: str
    asset: str | None
    location: str
    urgency: int | None
    class_: str | None
    confidence: float | None  # probability of that urgency or a higher one
    delta_k: Estimate | None
    delta_basis: str  # "similar" | "ambient" | "reference" | "neighbours"
    load_a: float | None
    rated_a: float | None
    action: str
    inspect_again: str


@dataclass(frozen=True, slots=True)
class PopulationAlarm:
    """Components of one group over all frames, held against what is usual among them."""

    group: str
    count: int
    how: str  # "median" | "mean", by their number
    alarm_k: float  # rise above which one stands out
    exceeding: tuple[str, ...]  # keys


@dataclass(frozen=True, slots=True)
class Decision:
    """What one reviewer decided about one finding or component, and the numbers it was decided on."""

    key: str
    id: str  # of the finding, or the name of the component
    frame: str
    decision: str  # "accepted" | "rejected" | "reclassified" | "open": taken back | "commented": nothing decided
    criterion: str | None  # whose class it was given, where it was reclassified to one
    class_: str | None
    urgency: int | None  # it was reclassified to, or that of the class
    comment: str
    on: dict[str, Estimate | None]


@dataclass(frozen=True, slots=True)
class Review:
    """The decisions one reviewer handed over at once."""

    reviewer: str
    date: str  # ISO 8601
    report: str  # identity of the report they were made on
    decisions: tuple[Decision, ...]


@dataclass(frozen=True, slots=True)
class ReviewStatus:
    """Where one finding or component stands after all reviews; what decided it, who and when, None while open."""

    key: str
    id: str
    frame: str
    status: str  # "open" | "accepted" | "rejected" | "reclassified" | "asked again" | "gone"
    class_: str | None
    urgency: int | None
    reviewer: str | None
    date: str | None
    comment: str
    moved: tuple[str, ...]  # numbers that moved beyond their U since, so that the reviewer is asked again
