"""Made-up parts of a switch-room report: an invented lug, its limit, its joint, its trend, and what to repair."""

from __future__ import annotations

from irsurvey.model import (
    Band,
    Estimate,
    Indication,
    JointHeat,
    LimitReport,
    PopulationAlarm,
    RepairItem,
    TrendReport,
)


def limit() -> LimitReport:
    return LimitReport("invented/bolted-bare", 90.0, 50.0, Band(32.13, 35.94), "invented for this test, table 3")


def joint() -> JointHeat:
    return JointHeat(
        "cylinder",
        Estimate(7.18, 0.72),
        Estimate(8.57, 1.1),
        Estimate(6.76, 1.0),
        Estimate(42.25, 6.3),
        Estimate(16.9, 2.5),
        Estimate(59.2, 8.8),
    )


def trend() -> TrendReport:
    return TrendReport(
        (("2022-03-01", 61.0), ("2023-02-20", 78.5), ("2024-03-11", 96.0), ("2026-01-18", 158.0)),
        Estimate(24.6, 4.1),
        17.1,
        33.2,
        Estimate(62.0, 9.5),
        True,
    )


def lug() -> dict[str, object]:
    """New numbers of the hot lug."""
    return {
        "delta_similar_in_calm_k": Estimate(59.7, 4.4),
        "delta_ambient_in_calm_k": Estimate(74.6, 5.1),
        "relative_difference_percent": Estimate(79.95, 2.1),
        "above_limit_k": Estimate(-18.5, 1.4),
        "above_allowed_k": Estimate(35.56, 1.6),
        "delta_neighbours_k": Estimate(18.62, 0.83),
        "limit": limit(),
        "joint": joint(),
        "trend": trend(),
        "indication": Indication("hot joint", "Consistent with a joint of high resistance.", {}, "a resistance test"),
    }


def repairs() -> tuple[RepairItem, ...]:
    return (
        RepairItem(
            rank=1,
            key="S01@319,179",
            frame="S01",
            what="phase 2 lug",
            asset="FB-2",
            location="Switch room, ground floor",
            urgency=4,
            class_="major discrepancy",
            confidence=0.9987,
            delta_k=Estimate(36.38, 0.9),
            delta_basis="similar",
            load_a=200.0,
            rated_a=400.0,
            action="Have the joint opened, cleaned and made again.",
            inspect_again="after the repair, at 40 % of its rating or more",
        ),
        RepairItem(
            rank=2,
            key="S01@314,339",
            frame="S01",
            what="warm area beside the lugs",
            asset="FB-2",
            location="Switch room, ground floor",
            urgency=4,
            class_=None,
            confidence=None,
            delta_k=Estimate(47.2, None),
            delta_basis="reference",
            load_a=None,
            rated_a=None,
            action="Have it looked at.",
            inspect_again="with a temperature range that holds it",
        ),
        RepairItem(
            rank=3,
            key="S01@499,179",
            frame="S01",
            what="phase 3 bare bar",
            asset=None,
            location="",
            urgency=None,
            class_=None,
            confidence=None,
            delta_k=None,
            delta_basis="similar",
            load_a=None,
            rated_a=400.0,
            action="Look again with matt tape on it.",
            inspect_again="",
        ),
    )


def populations() -> tuple[PopulationAlarm, ...]:
    return (
        PopulationAlarm("feeder lugs", 12, "median", 14.82, ("S01@319,179",)),
        PopulationAlarm("links", 6, "mean", 8.876, ()),
    )
