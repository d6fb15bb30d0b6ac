"""Open decisions of a survey and what would settle them, from the records of its frames alone."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from irsurvey.analysis.budgets import on_axis
from irsurvey.assess.criteria import criteria
from irsurvey.assess.next_visit import Decision, next_visit
from irsurvey.assess.severity import BLOCKERS
from irsurvey.model import ComponentReport, Finding, FrameReport, NextMeasurement


def next_measurements(frames: Iterable[FrameReport]) -> tuple[NextMeasurement, ...]:
    """Which single measurements would settle the open findings and components, the one that settles most first."""
    return next_visit([decision for frame in frames for decision in _decisions(frame)])


def _decisions(frame: FrameReport) -> Iterator[Decision]:
    for finding in frame.findings:
        yield _decision(finding.id, finding, frame)
    for component in frame.components:
        yield _decision(component.key, component, frame)


def _decision(name: str, item: Finding | ComponentReport, frame: FrameReport) -> Decision:
    """What governs one finding or component: the numbers its governing criterion and its like judge."""
    known = criteria()
    governing = {known[one.criterion].quantity for one in item.assessments if one.governs}
    judged = []
    for assessment in item.assessments:
        criterion = known[assessment.criterion]
        estimate = getattr(item, criterion.quantity)
        if criterion.quantity in governing and estimate is not None:
            judged.append(on_axis(criterion, estimate, item.budgets.get(criterion.quantity, ()), frame.inputs))
    blockers = tuple(flag for flag in item.flags if flag in BLOCKERS)
    return Decision(name, tuple(judged), blockers, item.urgency)
