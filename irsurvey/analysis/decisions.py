"""Open decisions of a survey and what would settle them, from the records of its frames alone."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping

from irsurvey.analysis.budgets import on_axis
from irsurvey.assess.criteria import Criterion, criteria
from irsurvey.assess.next_visit import Decision, next_visit
from irsurvey.assess.severity import BLOCKERS
from irsurvey.model import ComponentReport, Finding, FrameReport, NextMeasurement


def next_measurements(
    frames: Iterable[FrameReport], known: Mapping[str, Criterion] | None = None
) -> tuple[NextMeasurement, ...]:
    """Which single measurements would settle the open findings and components, the one that settles most first.

    `known`: criteria by name, with those of the survey's own; default: the built-in ones."""
    named = criteria() if known is None else known
    return next_visit([decision for frame in frames for decision in _decisions(frame, named)])


def _decisions(frame: FrameReport, known: Mapping[str, Criterion]) -> Iterator[Decision]:
    for finding in frame.findings:
        yield _decision(finding.id, finding, frame, known)
    for component in frame.components:
        yield _decision(component.key, component, frame, known)


def _decision(
    name: str, item: Finding | ComponentReport, frame: FrameReport, known: Mapping[str, Criterion]
) -> Decision:
    """What governs one finding or component: the numbers its governing criterion and its like judge."""
    governing = {one.quantity for one in item.assessments if one.governs}
    judged = []
    for one in item.assessments:
        estimate = getattr(item, one.quantity, None)
        if one.quantity in governing and estimate is not None:
            terms = item.budgets.get(one.quantity, ())
            judged.append(on_axis(known[one.criterion], estimate, terms, frame.inputs))
    blockers = tuple(flag for flag in item.flags if flag in BLOCKERS)
    return Decision(name, tuple(judged), blockers, item.urgency)
