"""Where each finding and component stands after the decisions of its reviewers."""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from hashlib import sha256

from irsurvey.model import ComponentReport, Decision, Estimate, Finding, FrameReport, Report, Review, ReviewStatus
from irsurvey.numbers import COVERAGE_FACTOR
from irsurvey.report.json import plain

OPEN, ASKED_AGAIN, GONE = "open", "asked again", "gone"
DECIDED = ("accepted", "rejected", "reclassified")
COMMENTED = "commented"
DECISIONS = (*DECIDED, OPEN, COMMENTED)
"""What a reviewer may do: decide, take a decision back, or say something without deciding."""

URGENCY = "urgency"
"""Stands among the numbers a decision was made on, though nobody measured it: it must be the same."""

_OF_FINDINGS = ("mean_delta_k", "delta_k", "mean_c", "extreme_c", "area_m2", "heat_flux_w_m2", "excess_heat_w")
_OF_COMPONENTS = ("max_c", "mean_c", "delta_similar_k", "delta_ambient_k")
"""Numbers that a sheet shows first; those that criteria judged come on top."""
_ROUNDED = 1e-6  # relative: report.json keeps seven significant digits, half a unit of the last is 5e-7 at most

COLUMNS = ("review", "review_class", "review_urgency", "reviewer", "review_date", "review_comment")
"""What a table of results says of their review."""

Item = Finding | ComponentReport


@dataclass(frozen=True, slots=True)
class Reviewable:
    """One finding or component of one frame, with its name there."""

    frame: FrameReport
    item: Item

    @property
    def key(self) -> str:
        """What decisions know it by."""
        return self.item.key

    @property
    def id(self) -> str:
        """What people know it by: the id of a finding, the name of a component."""
        return self.item.id if isinstance(self.item, Finding) else self.item.name


def reviewable(report: Report) -> Iterator[Reviewable]:
    """All findings and components, in the order of the report."""
    for frame in report.frames:
        yield from (Reviewable(frame, finding) for finding in frame.findings)
        yield from (Reviewable(frame, component) for component in frame.components)


def numbers_of(item: Item) -> dict[str, Estimate | None]:
    """The numbers that a decision on a finding or component is made on, as report.json has them."""
    first = _OF_FINDINGS if isinstance(item, Finding) else _OF_COMPONENTS
    judged = (assessment.quantity for assessment in item.assessments)
    names = dict.fromkeys((*first, *(name for name in judged if name)))
    return {**{name: number(item, name) for name in names}, URGENCY: number(item, URGENCY)}


def number(item: Item, name: str) -> Estimate | None:
    """One of these numbers, to the digits of report.json; None where it does not exist."""
    value = getattr(item, name, None)
    if name == URGENCY:
        return None if value is None else Estimate(float(value), None)
    written = plain(value) if isinstance(value, Estimate) else {"value": None}
    return None if written["value"] is None else Estimate(written["value"], written["u"])


def identity(report: Report) -> str:
    """What a report is told from others by: SHA-256 over its frames, keys and the numbers decisions are made on."""
    told = [
        title(report),
        [[frame.id, frame.source.sha256] for frame in report.frames],
        [[one.key, _told(numbers_of(one.item))] for one in reviewable(report)],
    ]
    return sha256(json.dumps(told).encode()).hexdigest()


def title(report: Report) -> str:
    """The title of the survey; "–" for one without, as decisions must name one."""
    about = report.survey.get("survey")
    found = about.get("title") if isinstance(about, dict) else None
    return found if isinstance(found, str) and found.strip() else "–"


def with_reviews(report: Report, reviews: Iterable[Review]) -> Report:
    """The report with these reviews, by date and of one date as they come, and where they leave each result.

    A later decision on a key counts.  It is carried over to another version of the report by its key; where a number
    it was made on moved beyond its U, the reviewer is asked again.  What was measured stays as it was."""
    ordered = tuple(sorted(reviews, key=lambda review: review.date))
    return replace(report, reviews=ordered, review_status=tuple(_statuses(report, ordered)))


def cells(report: Report) -> dict[str, dict[str, str | float | None]]:
    """Key of a finding or component → its review in the columns of a table; empty without reviews."""
    return {
        one.key: dict(
            zip(
                COLUMNS,
                (one.status, one.class_, one.urgency, one.reviewer, one.date, one.comment or None),
                strict=True,
            )
        )
        for one in report.review_status
    }


def moved(item: Item, then: Mapping[str, Estimate | None]) -> tuple[str, ...]:
    """Which numbers moved beyond their U (k = 2), then or now, or came, or went; all of them, if none was known."""
    now = {name: number(item, name) for name in then} if then else numbers_of(item)
    return tuple(name for name, value in now.items() if not then or _has_moved(then[name], value))


def _has_moved(then: Estimate | None, now: Estimate | None) -> bool:
    if then is None or now is None:
        return then is not now
    expanded = COVERAGE_FACTOR * min(then.u or 0.0, now.u or 0.0)
    return abs(now.value - then.value) > expanded + _ROUNDED * abs(then.value)


def _statuses(report: Report, reviews: tuple[Review, ...]) -> Iterator[ReviewStatus]:
    if not reviews:
        return
    told: dict[str, Decision] = {}
    counts: dict[str, tuple[Review, Decision]] = {}
    for review in reviews:
        for decision in review.decisions:
            told[decision.key] = decision
            if decision.decision != COMMENTED:
                counts[decision.key] = (review, decision)
    for one in reviewable(report):
        told.pop(one.key, None)
        if one.key in counts:
            yield _status(one, *counts[one.key])
        else:
            yield ReviewStatus(one.key, one.id, one.frame.id, OPEN, None, None, None, None, "", ())
    for key, decision in told.items():
        decided = counts.get(key)
        last = decided[1] if decided else decision
        reviewer, date = (decided[0].reviewer, decided[0].date) if decided else (None, None)
        yield ReviewStatus(key, last.id, last.frame, GONE, last.class_, last.urgency, reviewer, date, last.comment, ())


def _status(one: Reviewable, review: Review, decision: Decision) -> ReviewStatus:
    changed = moved(one.item, decision.on) if decision.decision in DECIDED else ()
    status = ASKED_AGAIN if changed else decision.decision
    return ReviewStatus(
        one.key,
        one.id,
        one.frame.id,
        status,
        decision.class_,
        decision.urgency,
        review.reviewer,
        review.date,
        decision.comment,
        changed,
    )


def _told(numbers: Mapping[str, Estimate | None]) -> list[object]:
    return [[name, value and [value.value, value.u]] for name, value in numbers.items()]
