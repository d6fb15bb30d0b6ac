"""What a report tells on paper, gathered once for all its parts."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path

from irsurvey import texts
from irsurvey.model import ComponentReport, Finding, FrameReport, FrameTask, Report
from irsurvey.numbers import Style
from irsurvey.report import about, repair_list, season_table, style
from irsurvey.report.open_points import Open, beside_repairs
from irsurvey.report.pdf.parts import asks, chip
from irsurvey.report.pdf.runs import Run
from irsurvey.report.ranking import Ranked, in_order
from irsurvey.report.review.words import InWords
from irsurvey.texts import say

_DAY = re.compile(r"\d{4}-\d\d-\d\d")


@dataclass(frozen=True, slots=True)
class Story:
    """A report with all that its parts need to know of it."""

    report: Report
    tasks: dict[str, FrameTask]
    out: Path
    title: str
    about: dict[str, str]  # heading → text
    ranked: tuple[Ranked, ...]
    open_points: list[Open]
    repairs: repair_list.Shown
    seasons: tuple[season_table.Table, ...]
    season_costs: dict[str, str]
    cautions: tuple[str, ...]
    style: Style
    reviews: InWords

    @property
    def analysed(self) -> list[FrameReport]:
        """Frames that could be read."""
        return [frame for frame in self.report.frames if frame.status != "failed"]

    @property
    def failed(self) -> list[FrameReport]:
        """Frames that could not."""
        return [frame for frame in self.report.frames if frame.status == "failed"]

    @property
    def findings(self) -> list[Ranked]:
        """All anomalies, the most important first."""
        return [entry for entry in self.ranked if isinstance(entry.item, Finding)]

    @property
    def components(self) -> list[Ranked]:
        """All components, the most important first."""
        return [entry for entry in self.ranked if isinstance(entry.item, ComponentReport)]

    @property
    def notable(self) -> list[Ranked]:
        """What asks for something and is not on the repair list."""
        listed = {(item.frame, item.key) for item in self.report.repairs}
        return [e for e in self.ranked if e.item.urgency != 0 and (e.frame.id, e.item.key) not in listed]

    @property
    def warm_areas(self) -> list[Ranked]:
        """The warm findings of a survey for moisture in roofs, the largest first."""
        warm = [
            entry
            for entry in self.findings
            if isinstance(entry.item, Finding) and entry.item.sense == "hot" and self._is_roof(entry.frame.id)
        ]
        return sorted(warm, key=_area, reverse=True)

    @property
    def named(self) -> dict[str, Ranked]:
        """Id of a finding, or key of a component → where it is."""
        return {entry.item.id if isinstance(entry.item, Finding) else entry.item.key: entry for entry in self.ranked}

    def _is_roof(self, frame: str) -> bool:
        return frame in self.tasks and self.tasks[frame].method == "roof-moisture"


def gather(report: Report, tasks: Iterable[FrameTask], out: Path) -> Story:
    """The story of a report whose pictures are already in OUT/frames."""
    by_id = {task.id: task for task in tasks}
    ranked = in_order(report)
    asked_style = style.asked(report)
    standing = texts.cautions_for(report.frames, has_season=bool(report.seasons))
    return Story(
        report=report,
        tasks=by_id,
        out=out,
        title=about.said(report).get("title") or say("untitled"),
        about=about.headed(report, style=asked_style),
        ranked=ranked,
        open_points=beside_repairs(report),
        repairs=repair_list.shown(report, ranked, by_id, out, style=asked_style),
        seasons=season_table.tables(report, style=asked_style),
        season_costs=season_table.in_short(report, style=asked_style),
        cautions=tuple(dict.fromkeys((*report.cautions, *standing))),
        style=asked_style,
        reviews=InWords(report),
    )


def made_on(report: Report) -> datetime:
    """The day of the survey at noon: as it was stated, else that of its earliest frame, so that the same report never
    gets another date; 1970 where nobody wrote one down."""
    taken = sorted(frame.taken for frame in report.frames if frame.taken)
    for text in (about.said(report).get("date", ""), *taken):
        if day := _DAY.match(text):
            try:
                return datetime.fromisoformat(f"{day[0]}T12:00:00+00:00")
            except ValueError:
                continue
    return datetime(1970, 1, 1, 12, tzinfo=UTC)


def is_compared(frame: FrameReport) -> bool:
    """Whether a frame has a reference area to hold its pixels against."""
    return frame.detectable is not None and frame.detectable.min_delta_k is not None


def asked(frame: FrameReport) -> Run:
    """In short, what the most urgent of the findings and components of a frame asks for."""
    items: tuple[Finding | ComponentReport, ...] = (*frame.findings, *frame.components)
    if frame.status == "failed":
        return chip(say("not_readable"), "weak")
    if items:
        urgency = max((item.urgency for item in items if item.urgency is not None), default=None)
        is_open = any(item.outcome == "not cleared" for item in items)
        return asks(urgency, "not cleared" if is_open else "")
    if frame.claim == "not valid":
        return chip(texts.claim_name(frame.claim), "weak")
    return chip(say("nothing_found")) if is_compared(frame) else chip(say("nothing_compared"), "weak")


def _area(entry: Ranked) -> float:
    return entry.item.area_m2.value if isinstance(entry.item, Finding) and entry.item.area_m2 else 0.0
