"""The review in words, for the page, for paper and for the command line."""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Mapping
from dataclasses import dataclass

from irsurvey import numbers, texts
from irsurvey.model import Decision, Estimate, Report, ReviewStatus
from irsurvey.report.review.standing import ASKED_AGAIN, COMMENTED, GONE, OPEN, URGENCY, Item, number, reviewable
from irsurvey.report.style import asked, moment


@dataclass(frozen=True, slots=True)
class Said:
    """One decision or comment: what was decided, by whom, when, and why.  Text, to be escaped where it is set."""

    what: str
    reviewer: str
    date: str
    comment: str


class InWords:
    """The reviews of one report in words; for one without reviews every answer is empty."""

    def __init__(self, report: Report) -> None:
        self.style = asked(report)
        self.statuses = {status.key: status for status in report.review_status}
        self._items: dict[str, Item] = {one.key: one.item for one in reviewable(report)}
        self._said: dict[str, list[Said]] = defaultdict(list)
        self._last: dict[str, Decision] = {}
        for review in report.reviews:
            for decision in review.decisions:
                told = Said(_decided(decision), review.reviewer, review.date, decision.comment)
                self._said[decision.key].append(told)
                if decision.decision != COMMENTED:
                    self._last[decision.key] = decision

    def said(self, key: str) -> tuple[Said, ...]:
        """What all reviewers decided and said of one finding or component, in order."""
        return tuple(self._said.get(key, ()))

    def status(self, key: str) -> str:
        """How it stands in one or two words."""
        status = self.statuses.get(key)
        return texts.review(status.status) if status else ""

    def again(self, key: str) -> str:
        """Which numbers moved since the decision on it, then and now; "" where it is not asked again."""
        changes = self._changes(key)
        return texts.review("again", changes=changes) if changes else ""

    def how_open(self, status: ReviewStatus) -> str:
        """Why something is still open, in half a sentence."""
        if changes := self._changes(status.key):
            return texts.review("asked", changes=changes, reviewer=status.reviewer, date=self.day(status.date))
        if status.reviewer is None:
            return texts.review("undecided")
        return texts.review("taken_back", reviewer=status.reviewer, date=self.day(status.date))

    def day(self, date: str | None) -> str:
        """The day of a review as the survey asks days to be written."""
        return moment(date or "", style=self.style)

    def counts(self) -> str:
        """How many results stand how, in a sentence."""
        found = Counter(status.status for status in self.statuses.values())
        decided = {name: found[name] for name in ("accepted", "rejected", "reclassified")}
        open_ = found[OPEN] + found[ASKED_AGAIN]
        sentence = texts.review("counts_again" if found[ASKED_AGAIN] else "counts")
        return sentence.format(**decided, open=open_, again=found[ASKED_AGAIN]) if found else ""

    def gone(self) -> tuple[ReviewStatus, ...]:
        """What was decided on and is no longer in the report."""
        return tuple(status for status in self.statuses.values() if status.status == GONE)

    def _changes(self, key: str) -> str:
        status = self.statuses.get(key)
        if status is None or status.status != ASKED_AGAIN:
            return ""
        then: Mapping[str, Estimate | None] = self._last[key].on
        item = self._items[key]
        changed = ((name, then.get(name), number(item, name)) for name in status.moved)
        return "; ".join(
            texts.review("moved", name=_name(name), then=self._shown(old, name), now=self._shown(new, name))
            for name, old, new in changed
        )

    def _shown(self, estimate: Estimate | None, name: str) -> str:
        return texts.review("none") if estimate is None else numbers.measured(estimate, name, style=self.style)


def _decided(decision: Decision) -> str:
    given = texts.review(f"by_{decision.decision}")
    if decision.decision != "reclassified":
        return given
    if decision.class_ is None:
        as_ = texts.review("as_urgency", urgency=decision.urgency, words=texts.urgency(decision.urgency))
    else:
        class_ = texts.of_table(decision.class_)
        as_ = texts.review("as_class", urgency=decision.urgency, criterion=decision.criterion, **{"class": class_})
    return given.format(**{"class": as_})


def _name(name: str) -> str:
    return texts.review("urgency_name") if name == URGENCY else texts.inside(name)
