"""The reviewer's desk in the page: what was decided as text, the forms to decide, and their export as one file."""

from __future__ import annotations

import base64
import hashlib
import json
from collections.abc import Collection, Iterable
from functools import cache
from importlib.resources import files
from typing import TYPE_CHECKING, Any

from irsurvey import texts
from irsurvey.assess.criteria import URGENCIES, criteria
from irsurvey.model import Estimate, FrameReport, FrameTask, Report, Review
from irsurvey.report.review.decisions import LONGEST
from irsurvey.report.review.standing import DECIDED, Reviewable, identity, numbers_of, reviewable, title
from irsurvey.report.review.words import InWords, Said

if TYPE_CHECKING:
    from markupsafe import Markup

_MARKUP = str.maketrans({mark: f"\\u{ord(mark):04x}" for mark in "<>&\u2028\u2029"})


class Desk:
    """The pieces that the review adds to the page of one report; all text of people is escaped."""

    def __init__(self, report: Report, tasks: Iterable[FrameTask]) -> None:
        self._report = report
        self._known = criteria(tuple(dict.fromkeys(own for task in tasks for own in task.own_criteria)))
        self._told = InWords(report)
        self._places = {one.key: place for place, one in enumerate(reviewable(report))}

    def summary(self) -> Markup:
        """The section on the review, to stand behind the summary of the page; hidden while there is nothing in it."""
        from markupsafe import Markup

        told = Markup("")
        if self._report.reviews:
            names = dict.fromkeys(
                f"{review.reviewer} ({self._told.day(review.date)})" for review in self._report.reviews
            )
            told += Markup("<p>{}</p>").format(self._told.counts())
            told += Markup('<p dir="auto">{}</p>').format(texts.review("summary", reviewers=", ".join(names)))
        if lost := self._told.gone():
            lines = Markup("").join(
                Markup("<li><bdi>{}</bdi>{}</li>").format(f"{status.frame} {status.id}", self._said(status.key))
                for status in lost
            )
            told += Markup('<p>{}</p><ul class="flags">{}</ul>').format(texts.review("lost"), lines)
        return Markup(
            '<section id="review" class="card" aria-labelledby="review-heading"{}><h2 id="review-heading">{}</h2>'
            '{}<div id="review-desk"></div></section>'
        ).format(Markup("") if told else Markup(" hidden"), texts.review("review"), told)

    def result(self, key: str) -> Markup:
        """What was decided about one finding or component, and the place of its form, to end its section."""
        from markupsafe import Markup

        told = self._said(key)
        if status := self._told.status(key):
            line = texts.review("standing", status=status)
            told = Markup('<p class="review-status"><b>{}</b> {}</p>').format(line, self._told.again(key)) + told
        return Markup('<div class="review" data-review="{}">{}</div>').format(self._places[key], told)

    def rest(self, frame: FrameReport, shown: Collection[str]) -> Markup:
        """The same for findings that a sheet has no section of, folded away; `shown`: ids of those it has one of."""
        from markupsafe import Markup

        left = [finding for finding in frame.findings if finding.id not in shown]
        if not left:
            return Markup("")
        lines = Markup("").join(
            Markup('<div class="review-one"><p><b>{}</b> {}</p>{}</div>').format(
                finding.id, texts.sense(finding.sense), self.result(finding.key)
            )
            for finding in left
        )
        title = texts.review("rest", count=len(left))
        return Markup('<details class="review-rest"><summary>{}</summary>{}</details>').format(title, lines)

    def data(self, frames: Collection[str] | None = None) -> str:
        """What the script works on, as JSON to stand in `<script type="application/json" id="review-data">`.

        `frames`: ids of those a page shows, where the report is more than one page."""
        report = self._report
        shown = [one for one in reviewable(report) if frames is None or one.frame.id in frames]
        judged = dict.fromkeys(assessment.criterion for one in shown for assessment in one.item.assessments)
        return _json(
            {
                "format": 1,
                "tool": report.tool,
                "survey": title(report),
                "report": identity(report),
                "longest": LONGEST,
                "words": texts.of_review(),
                "urgencies": {str(level): texts.urgency(level) for level in URGENCIES},
                "criteria": {
                    name: [[kind.name, kind.urgency] for kind in self._known[name].classes]
                    for name in judged
                    if name in self._known
                },
                "results": [self._result(one) for one in shown],
                "said": [_said_in(review) for review in report.reviews],
            }
        )

    def _said(self, key: str) -> Markup:
        from markupsafe import Markup

        lines = Markup("").join(self._line(said) for said in self._told.said(key))
        return Markup('<ul class="review-said">{}</ul>').format(lines) if lines else lines

    def _line(self, said: Said) -> Markup:
        from markupsafe import Markup, escape

        who = Markup("<bdi>{}</bdi>").format(said.reviewer)
        day = Markup('<span class="nowrap">{}</span>').format(self._told.day(said.date))
        what = Markup("<b>{}</b>").format(said.what)
        line = Markup(escape(texts.review("by"))).format(decision=what, reviewer=who, date=day)
        comment = (
            Markup(': <span class="review-words" dir="auto">{}</span>').format(said.comment) if said.comment else ""
        )
        return Markup("<li>{}{}</li>").format(line, comment)

    def _result(self, one: Reviewable) -> dict[str, Any]:
        status = self._told.statuses.get(one.key)
        return {
            "place": self._places[one.key],
            "key": one.key,
            "id": one.id,
            "frame": one.frame.id,
            "status": status.status if status else "open",
            "decided": status is not None and (status.status in DECIDED or bool(status.moved)),
            "criteria": list(dict.fromkeys(assessment.criterion for assessment in one.item.assessments)),
            "on": {name: _number(value) for name, value in numbers_of(one.item).items()},
        }


@cache
def script() -> str:
    """The script of the review, to stand in one `<script>` unchanged; `script_hash` is of this text."""
    return _asset("review.js")


@cache
def script_hash() -> str:
    """What the page's policy allows to run: 'sha256-…' for the `script-src` of its Content-Security-Policy."""
    return f"'sha256-{base64.b64encode(hashlib.sha256(script().encode()).digest()).decode()}'"


@cache
def style() -> str:
    """The style rules of the review, to stand behind those of the page."""
    return _asset("review.css")


def _said_in(review: Review) -> dict[str, Any]:
    """Decisions already in the report, by which the page knows what it need not keep."""
    decisions = [
        [one.key, one.decision, one.criterion, one.class_, one.urgency, one.comment] for one in review.decisions
    ]
    return {"reviewer": review.reviewer, "date": review.date, "report": review.report, "decisions": decisions}


def _number(estimate: Estimate | None) -> dict[str, float | None] | None:
    return None if estimate is None else {"value": estimate.value, "u": estimate.u}


def _asset(name: str) -> str:
    return files("irsurvey.report.review").joinpath(name).read_text(encoding="utf-8")


def _json(data: dict[str, Any]) -> str:
    """Compact JSON, always the same for the same data, in which no text can end the script element it stands in."""
    text = json.dumps(data, ensure_ascii=False, allow_nan=False, separators=(",", ":"))
    return text.translate(_MARKUP)
