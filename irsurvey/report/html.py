"""report.html: the report people read, one file that asks nothing of any network."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING

from irsurvey import files, numbers
from irsurvey.model import ComponentReport, Finding, FrameReport, FrameTask, Report
from irsurvey.report import (
    axes,
    component_facts,
    condition_rows,
    facts,
    pictures,
    repair_list,
    results,
    season_table,
    strip_plot,
    texts,
    trend_plot,
)
from irsurvey.report.labels import change_mark, component_mark, strip_mark
from irsurvey.report.picture import NUMBERED
from irsurvey.report.pictures import Picture
from irsurvey.report.ranking import Ranked, foremost, governing, in_order

if TYPE_CHECKING:
    from jinja2 import Environment

SUMMARY_LENGTH = 12
"""Results named on the first page; the table behind it has all of them."""

_LONG = 140  # characters of a free text that the summary and the tables show; the sheet of its frame has it all
_NAMED = 3  # findings or components of one frame named when they are not cleared for one reason; of more, their number
_NOT_FREE_TEXT = {"title", "kind", "method", "viewed_from", "timezone", "reference", "camera"}
_TIME = re.compile(r"(\d{4}-\d\d-\d\d)T(\d\d:\d\d)(?::\d\d(?:\.\d+)?)?(.*)")
_CONTROLS = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f]")


@dataclass(frozen=True, slots=True)
class Sheet:
    """What the page shows of one frame; of very many findings, the foremost, and how many `more` there are."""

    frame: FrameReport
    task: FrameTask | None
    findings: tuple[Finding, ...]
    more: int
    picture: Picture | None
    photo: Picture | None
    change: Picture | None  # what pressure changed
    unchanged: tuple[str, ...]  # ids of findings that pressure did not change
    to_do: str  # in short: what the most urgent of its findings and components asks for
    chip: str  # how that is set


@dataclass(frozen=True, slots=True)
class Open:
    """Something that could not be cleared, and why."""

    frame: FrameReport
    what: str
    why: str


def write(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> Path:
    """Write OUT/report.html from the records and the pictures already in OUT/frames, and return its path."""
    path = out / "report.html"
    files.write_bytes(path, page(report, tasks, out).encode("utf-8", "replace"))
    return path


def page(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> str:
    """The text of the page.  All text of the survey is escaped; control characters become U+FFFD."""
    by_id = {task.id: task for task in tasks}
    ranked = in_order(report)
    sheets = [_sheet(frame, by_id.get(frame.id), out) for frame in report.frames]
    seasons = season_table.tables(report)
    listed = {(item.frame, item.key) for item in report.repairs}
    standing = texts.cautions_for(report.frames, has_season=bool(report.seasons))
    template = _environment().get_template("report.html.j2")
    rendered = template.render(
        report=report,
        title=_about(report).get("title") or "Thermographic survey",
        about={texts.about(key): text for key, text in _about(report).items() if key not in _NOT_FREE_TEXT},
        sheets=sheets,
        shown={finding.id for sheet in sheets for finding in sheet.findings},
        frame_ids={frame.id for frame in report.frames},
        failed=[frame for frame in report.frames if frame.status == "failed"],
        analysed=[frame for frame in report.frames if frame.status != "failed"],
        ranked=ranked,
        findings=[entry for entry in ranked if isinstance(entry.item, Finding)],
        components=[entry for entry in ranked if isinstance(entry.item, ComponentReport)],
        roof=_warm_areas(ranked, by_id),
        conditions=condition_rows.rows(report.conditions_review),
        seasons=seasons,
        season_notes=season_table.notes(seasons),
        season_costs=season_table.in_short(report),
        named={_name(entry): entry for entry in ranked},
        not_cleared=sum(1 for _ in not_cleared(report)),
        open_points=gathered(not_cleared(report)),
        repairs=repair_list.shown(report, ranked, by_id, out),
        notable=[entry for entry in ranked if entry.item.urgency != 0 and _place(entry) not in listed],
        cautions=tuple(dict.fromkeys((*report.cautions, *standing))),
    )
    return _CONTROLS.sub("\ufffd", rendered)


def not_cleared(report: Report) -> Iterator[Open]:
    """What must not be taken for sound: results that are not cleared, pixels and frames without a claim."""
    for frame in report.frames:
        if frame.status == "failed":
            continue
        if frame.claim == "not valid":
            yield Open(frame, "the whole frame", frame.claim_reason)
        elif not _is_compared(frame):
            yield Open(frame, "the whole frame", "nothing in it could be compared with a reference area")
        if frame.temperature and (lost := frame.temperature.unmeasurable_pixels + frame.temperature.saturated_pixels):
            yield Open(frame, f"{lost} pixels", "no temperature could be measured there")
        for finding in frame.findings:
            if finding.outcome == "not cleared":
                yield Open(frame, f"finding {finding.id}", _why(finding))
        for component in frame.components:
            if component.outcome == "not cleared":
                yield Open(frame, component.name, _why(component))


def gathered(points: Iterable[Open]) -> list[Open]:
    """Points of one frame that are open for the same reason as one point, in the order of the first of each."""
    alike: dict[tuple[str, str], list[Open]] = {}
    for point in points:
        alike.setdefault((point.frame.id, point.why), []).append(point)
    return [
        replace(same[0], what=", ".join(point.what for point in same))
        if len(same) <= _NAMED
        else replace(same[0], what=f"{len(same)} of its results")
        for same in alike.values()
    ]


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


def _about(report: Report) -> dict[str, str]:
    """What [survey] says in words: title, date and free texts."""
    survey = report.survey.get("survey")
    return {key: text for key, text in survey.items() if isinstance(text, str)} if isinstance(survey, dict) else {}


def _name(entry: Ranked) -> str:
    """What the next-visit card calls a finding or component."""
    return entry.item.id if isinstance(entry.item, Finding) else entry.item.key


def _place(entry: Ranked) -> tuple[str, str]:
    """What the repair list calls a finding or component."""
    return entry.frame.id, entry.item.key


def _why(item: Finding | ComponentReport) -> str:
    """Why something is not cleared: what its governing assessment says, else what its flags mean."""
    assessment = governing(item.assessments)
    if assessment and assessment.statement:
        return assessment.statement
    return " ".join(texts.flag(flag) for flag in item.flags) or "no criterion applies"


def _sheet(frame: FrameReport, task: FrameTask | None, out: Path) -> Sheet:
    items: tuple[Finding | ComponentReport, ...] = (*frame.findings, *frame.components)
    urgency = max((item.urgency for item in items if item.urgency is not None), default=None)
    is_open = any(item.outcome == "not cleared" for item in items)
    to_do = texts.to_do(urgency, "not cleared" if is_open else "")
    chip = "weak" if to_do != texts.urgency(urgency) else "ux" if urgency is None else f"u{urgency}"
    if frame.status == "failed":
        to_do, chip = "not readable", "weak"
    elif not items and frame.claim == "not valid":
        to_do, chip = frame.claim, "weak"
    elif not items:
        to_do, chip = ("nothing found", "") if _is_compared(frame) else ("nothing compared", "weak")
    shown = foremost(frame, NUMBERED)
    return Sheet(
        frame,
        task,
        findings=shown,
        more=len(frame.findings) - len(shown),
        picture=pictures.stored(frame, out, "annotated.png"),
        photo=pictures.photograph(task, pictures.PHOTOGRAPH_SIDE) if task and frame.status != "failed" else None,
        change=pictures.stored(frame, out, "change.png"),
        unchanged=_unchanged(frame),
        to_do=to_do,
        chip=chip,
    )


def _unchanged(frame: FrameReport) -> tuple[str, ...]:
    """Findings seen in both frames of a pair that pressure did not change."""
    changed = {change.finding for change in frame.pair.changes} if frame.pair else set()
    compared = (finding.id for finding in frame.findings if frame.pair and finding.pressure_change_k)
    return tuple(id_ for id_ in compared if id_ not in changed)


def _is_compared(frame: FrameReport) -> bool:
    """Whether a frame has a reference area to hold its pixels against."""
    return frame.detectable is not None and frame.detectable.min_delta_k is not None


def _short(text: str, length: int = _LONG) -> str:
    return text if len(text) <= length else f"{text[: length - 1].rstrip()}…"


def _moment(taken: str) -> str:
    """When a frame was taken, to the minute: "2026-01-18 07:12 +01:00"; what is no such time stays as it is."""
    match = _TIME.fullmatch(taken)
    return " ".join(part for part in match.groups() if part) if match else taken


def _upper_first(text: str) -> str:
    return text[:1].upper() + text[1:]


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
    environment.filters |= {"short": _short, "moment": _moment, "upper_first": _upper_first}
    environment.globals |= {
        "axes": axes,
        "c": component_facts,
        "change_mark": change_mark,
        "component_mark": component_mark,
        "f": facts,
        "governing": governing,
        "numbered": NUMBERED,
        "n": numbers,
        "r": results,
        "strip_mark": strip_mark,
        "strip_plot": strip_plot.plot,
        "summary_length": SUMMARY_LENGTH,
        "t": texts,
        "trend_plot": trend_plot.plot,
    }
    environment.tests |= {"component": lambda ranked: isinstance(ranked.item, ComponentReport)}
    return environment
