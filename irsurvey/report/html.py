"""report.html: the report people read, one file that asks nothing of any network."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import cache, partial
from pathlib import Path
from typing import TYPE_CHECKING, Any

from irsurvey import files, numbers, texts
from irsurvey.model import ComponentReport, Finding, FrameReport, FrameTask, Report
from irsurvey.numbers import Style
from irsurvey.report import (
    about,
    axes,
    component_facts,
    condition_rows,
    explained,
    facts,
    live,
    open_points,
    pictures,
    ranking_plot,
    repair_list,
    results,
    review,
    season_table,
    strip_plot,
    trend_plot,
)
from irsurvey.report.labels import change_mark, component_mark, strip_mark
from irsurvey.report.links import REPORT, SHEET, Links
from irsurvey.report.picture import NUMBERED
from irsurvey.report.ranking import Ranked, foremost, governing, in_order
from irsurvey.report.sentences import in_style
from irsurvey.report.sheets import Sheet, entry, sheet
from irsurvey.report.style import asked, day, moment, short, spoken
from irsurvey.texts import noun, say

if TYPE_CHECKING:
    from jinja2 import Environment
    from markupsafe import Markup

SUMMARY_LENGTH = 12
"""Results named on the first page; the table behind it has all of them."""

IN_ONE_FILE = 60
"""Frames up to which all of a report is one file; of more, each has a page of its own."""
MOST_ROWS = 500
"""Rows of a table of all anomalies or components in a report of many files: the foremost."""
MOST_PICTURED = 60
"""Parts of a repair list with their pictures in a report of many files: the first."""

_SMALL_SIDES = ((IN_ONE_FILE, 200), (500, 240), (2000, 120))
"""Frames up to which → longer side [px] of their small pictures, so that a report of many files stays below 20 MB."""
_MODULES = {
    "n": numbers,
    "r": results,
    "f": facts,
    "c": component_facts,
    "w": explained,
    "strip_plot": strip_plot,
    "trend_plot": trend_plot,
}
"""What the templates call a module whose words depend on the style."""
_NAMED = 3  # findings or components of one frame named when they are not cleared for one reason; of more, their number
_CONTROLS = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f]")


def write(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> Path:
    """Write OUT/report.html from the records and the pictures already in OUT/frames, and return its path.

    A report of more than `IN_ONE_FILE` frames has its sheets on pages of their own, OUT/frames/<id>/sheet.html; those
    that an earlier, larger report left are removed."""
    pages = _Pages.of(report, tasks, out)
    for frame in report.frames:
        path = out / "frames" / frame.id / SHEET
        if pages.is_split:
            files.write_bytes(path, pages.of_frame(frame).encode("utf-8", "replace"))
        else:
            path.unlink(missing_ok=True)
    path = out / REPORT
    files.write_bytes(path, pages.of_report().encode("utf-8", "replace"))
    return path


def page(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> str:
    """The text of report.html.  All text of the survey is escaped; control characters become U+FFFD."""
    return _Pages.of(report, tasks, out).of_report()


@dataclass(frozen=True, slots=True)
class _Pages:
    """The pages of a report, and what they share."""

    report: Report
    tasks: dict[str, FrameTask]
    out: Path
    style: Style
    shared: dict[str, Any]

    @classmethod
    def of(cls, report: Report, tasks: tuple[FrameTask, ...], out: Path) -> _Pages:
        style = asked(report)
        shared = {
            "report": report,
            "title": about.said(report).get("title") or say("untitled"),
            "shown": {finding.id for frame in report.frames for finding in foremost(frame, NUMBERED)},
            "frame_ids": {frame.id for frame in report.frames},
            "style": style,
            "out": out,
            "live": live,
            "tables": live.page_data(report, tasks),
            "review": review,
            "desk": review.Desk(report, tasks),
            "s": partial(in_style, style=style),
            "moment": partial(moment, style=style),
            "day": partial(day, style=style),
            **{name: spoken(module, style) for name, module in _MODULES.items()},
        }
        return cls(report, {task.id: task for task in tasks}, out, style, shared)

    @property
    def is_split(self) -> bool:
        return len(self.report.frames) > IN_ONE_FILE

    def of_report(self) -> str:
        """The report itself."""
        report, style, out = self.report, self.style, self.out
        ranked = in_order(report)
        most = MOST_ROWS if self.is_split else len(ranked)
        findings = [entry for entry in ranked if isinstance(entry.item, Finding)]
        components = [entry for entry in ranked if isinstance(entry.item, ComponentReport)]
        seasons = season_table.tables(report, style=style)
        listed = {(item.frame, item.key) for item in report.repairs}
        standing = texts.cautions_for(report.frames, has_season=bool(report.seasons))
        side = _small_side(len(report.frames))
        return self._rendered(
            "report.html.j2",
            Links(self.is_split),
            about=about.headed(report, style=style),
            sheets=[] if self.is_split else [self._sheet(frame) for frame in report.frames],
            index=[entry(frame, pictures.small(frame, side, out) if side else None) for frame in report.frames],
            failed=[frame for frame in report.frames if frame.status == "failed"],
            analysed=[frame for frame in report.frames if frame.status != "failed"],
            ranked=ranked,
            findings=findings,
            components=components,
            most_rows=most,
            of_findings=ranking_plot.plots(findings, self.tasks.values(), style=style),
            of_components=ranking_plot.plots(components, self.tasks.values(), style=style),
            roof=_warm_areas(ranked, self.tasks),
            conditions=condition_rows.rows(report.conditions_review, style=style),
            seasons=seasons,
            season_notes=season_table.notes(seasons, report),
            season_costs=season_table.in_short(report, style=style),
            named={_name(entry): entry for entry in ranked},
            open_points=open_points.beside_repairs(report),
            mouldy=facts.mouldy(report),
            repairs=repair_list.shown(
                report, ranked, self.tasks, out, style=style, pictured=MOST_PICTURED if self.is_split else None
            ),
            notable=[entry for entry in ranked if entry.item.urgency != 0 and _place(entry) not in listed],
            cautions=tuple(dict.fromkeys((*report.cautions, *standing))),
        )

    def of_frame(self, frame: FrameReport) -> str:
        """The page of one frame, where frames have pages of their own."""
        place = [one.id for one in self.report.frames].index(frame.id)
        around = {
            name: self.report.frames[at].id if 0 <= at < len(self.report.frames) else None
            for name, at in (("before", place - 1), ("after", place + 1))
        }
        return self._rendered("frame.html.j2", Links(True, frame.id), entry=self._sheet(frame), **around)

    def _sheet(self, frame: FrameReport) -> Sheet:
        return sheet(frame, self.tasks.get(frame.id), self.out, style=self.style)

    def _rendered(self, template: str, links: Links, **told: Any) -> str:
        text = _environment().get_template(template).render(**self.shared, to=links, **told)
        return _CONTROLS.sub("\ufffd", text)


def _warm_areas(ranked: tuple[Ranked, ...], tasks: dict[str, FrameTask]) -> list[Ranked]:
    """The warm findings of a survey for moisture in roofs, the largest first."""

    def size(entry: Ranked) -> float:
        return entry.item.area_m2.value if isinstance(entry.item, Finding) and entry.item.area_m2 else 0.0

    methods = {id_: task.method for id_, task in tasks.items()}
    warm = (
        entry
        for entry in ranked
        if isinstance(entry.item, Finding)
        and entry.item.sense == "hot"
        and methods.get(entry.frame.id) == "roof-moisture"
    )
    return sorted(warm, key=size, reverse=True)


def _name(entry: Ranked) -> str:
    """What the next-visit card calls a finding or component."""
    return entry.item.id if isinstance(entry.item, Finding) else entry.item.key


def _place(entry: Ranked) -> tuple[str, str]:
    """What the repair list calls a finding or component."""
    return entry.frame.id, entry.item.key


def _small_side(frames: int) -> int:
    """Longer side [px] of the small pictures of a report of so many frames; 0: none."""
    return next((side for most, side in _SMALL_SIDES if frames <= most), 0)


def _upper_first(text: str) -> str:
    return text[:1].upper() + text[1:]


def _within(tag: str, text: str) -> Markup:
    """A text in an element."""
    from markupsafe import Markup

    return Markup(f"<{tag}>{{}}</{tag}>").format(text)


def _marked(key: str, /, **values: object) -> Markup:
    """What `say` gives as markup: values that are markup stay so, all others are text like the words around them."""
    from markupsafe import Markup, escape

    return Markup(escape(say(key))).format(**values)


@cache
def _environment() -> Environment:
    from jinja2 import Environment, PackageLoader, StrictUndefined

    environment = Environment(
        loader=PackageLoader("irsurvey.report"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.filters |= {"flag_name": texts.flag_name, "short": short, "upper_first": _upper_first}
    environment.globals |= {
        "axes": axes,
        **{tag: partial(_within, tag) for tag in ("bdi", "code")},
        "bold": partial(_within, "b"),
        "change_mark": change_mark,
        "component_mark": component_mark,
        "governing": governing,
        "language": texts.language,
        "marked": _marked,
        "noun": noun,
        "numbered": NUMBERED,
        "say": say,
        "strip_mark": strip_mark,
        "summary_length": SUMMARY_LENGTH,
        "t": texts,
    }
    environment.tests |= {"component": lambda ranked: isinstance(ranked.item, ComponentReport)}
    return environment
