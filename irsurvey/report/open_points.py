"""What must not be taken for sound: results that are not cleared, pixels and frames that tell nothing."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from irsurvey import texts
from irsurvey.model import ComponentReport, Finding, FrameReport, Report
from irsurvey.report.ranking import governing
from irsurvey.report.sheets import is_compared
from irsurvey.texts import say

_NAMED = 3  # findings or components that are not cleared for one reason, named one by one; of more, their number


@dataclass(frozen=True, slots=True)
class Open:
    """Something that could not be cleared, in which frames, and why; `key` is that of a finding or component."""

    frames: tuple[FrameReport, ...]
    what: str
    why: str
    key: str | None = None


def not_cleared(report: Report) -> Iterator[Open]:
    """Everything that could not be cleared, one by one, each of one frame."""
    for frame in report.frames:
        if frame.status == "failed":
            continue
        if frame.claim == "not valid":
            yield Open((frame,), say("the_whole_frame"), frame.claim_reason)
        elif not is_compared(frame):
            yield Open((frame,), say("the_whole_frame"), say("no_reference_area"))
        if frame.temperature and (lost := frame.temperature.unmeasurable_pixels + frame.temperature.saturated_pixels):
            yield Open((frame,), say("pixels", count=lost), say("no_temperature"))
        for finding in frame.findings:
            if finding.outcome == "not cleared":
                yield Open((frame,), say("finding_id", id=finding.id), _why(finding), finding.key)
        for component in frame.components:
            if component.outcome == "not cleared":
                yield Open((frame,), component.name, _why(component), component.key)


def beside_repairs(report: Report) -> list[Open]:
    """The same without what the repair list names, gathered by reason."""
    listed = {(item.frame, item.key) for item in report.repairs}
    return gathered(point for point in not_cleared(report) if (point.frames[0].id, point.key) not in listed)


def gathered(points: Iterable[Open]) -> list[Open]:
    """Points of one frame that are open for the same reason as one point; also those of several frames where more
    than a few share it.  In the order of the first of each reason."""
    alike: dict[str, list[Open]] = {}
    for point in points:
        alike.setdefault(point.why, []).append(point)
    told: list[Open] = []
    for same in alike.values():
        frames = dict.fromkeys(point.frames[0].id for point in same)
        is_one = all(point.key for point in same) or len({point.what for point in same}) == 1
        parts = [same] if is_one and len(frames) > _NAMED else [_of_frame(id_, same) for id_ in frames]
        told += map(_as_one, parts)
    return told


def _of_frame(frame: str, points: Iterable[Open]) -> list[Open]:
    return [point for point in points if point.frames[0].id == frame]


def _as_one(same: list[Open]) -> Open:
    """Points that are open for one reason: named one by one where they are few, else by their number."""
    frames = tuple({point.frames[0].id: point.frames[0] for point in same}.values())
    named = tuple(dict.fromkeys(point.what for point in same))
    if len(named) <= _NAMED and (len(frames) == 1 or len(named) == 1):
        return Open(frames, ", ".join(named), same[0].why)
    return Open(frames, say("of_its_results" if len(frames) == 1 else "of_their_results", count=len(same)), same[0].why)


def _why(item: Finding | ComponentReport) -> str:
    """Why something is not cleared: what its governing assessment says, else what its flags mean."""
    assessment = governing(item.assessments)
    if assessment and assessment.statement:
        return assessment.statement
    return " ".join(texts.flag(flag) for flag in item.flags) or say("no_criterion")
