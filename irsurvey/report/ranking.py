"""What comes first: the assessment that governs a result, and the results of a report in order of importance."""

from __future__ import annotations

from dataclasses import dataclass

from irsurvey.model import Assessment, ComponentReport, Finding, FrameReport, Report

UNCLASSED_URGENCY = 1
"""Rank of a result that may not be classed: it is to be looked at again, so never below "investigate"."""


@dataclass(frozen=True, slots=True)
class Ranked:
    """One finding or component with the frame it was seen in and its number there."""

    frame: FrameReport
    item: Finding | ComponentReport
    place: int


def governing(assessments: tuple[Assessment, ...]) -> Assessment | None:
    """The assessment that decides: the one marked so, else the most urgent, else the first; None: no assessment."""
    marked = [assessment for assessment in assessments if assessment.governs]
    return max(marked or assessments, key=lambda assessment: _urgency(assessment.urgency), default=None)


def in_order(report: Report) -> tuple[Ranked, ...]:
    """All findings and components, the most important first.

    Saturated hot ones lead (their reading is only a lower bound), then urgency, of one urgency those last whose
    conditions were not valid, then components before findings, then |mean ΔT| × area of a finding or the larger |ΔT|
    of a component."""
    ranked: list[Ranked] = []
    for frame in report.frames:
        ranked += (Ranked(frame, component, place) for place, component in enumerate(frame.components, 1))
        ranked += (Ranked(frame, finding, finding.label) for finding in frame.findings)
    return tuple(sorted(ranked, key=_importance))


def foremost(frame: FrameReport, most: int) -> tuple[Finding, ...]:
    """So many findings of a frame, the most important ones, in the order of their numbers."""
    if len(frame.findings) <= most:
        return frame.findings
    ranked = sorted((Ranked(frame, finding, finding.label) for finding in frame.findings), key=_importance)
    chosen = {entry.place for entry in ranked[:most]}
    return tuple(finding for finding in frame.findings if finding.label in chosen)


def is_saturated(item: Finding | ComponentReport) -> bool:
    """Whether the reading reached the end of the camera's range, so that the truth lies beyond it."""
    return any(flag.startswith("saturated") for flag in item.flags)


def _urgency(urgency: int | None) -> float:
    return UNCLASSED_URGENCY if urgency is None else urgency


def _importance(ranked: Ranked) -> tuple[bool, float, bool, bool, float]:
    item = ranked.item
    leads = is_saturated(item) and (isinstance(item, ComponentReport) or item.sense == "hot")
    is_doubtful = "conditions not valid" in item.flags
    return (not leads, -_urgency(item.urgency), is_doubtful, isinstance(item, Finding), -_weight(item))


def _weight(item: Finding | ComponentReport) -> float:
    if isinstance(item, Finding):
        return abs(item.mean_delta_k.value) * item.area_m2.value if item.mean_delta_k and item.area_m2 else 0.0
    deltas = (item.delta_similar_k, item.delta_ambient_k)
    return max((abs(delta.value) for delta in deltas if delta), default=0.0)
