"""report.html: the report people read, one file that asks nothing of any network."""

from __future__ import annotations

import re
from base64 import b64encode
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING

from irsurvey import files
from irsurvey.model import ComponentReport, Estimate, Finding, FrameReport, FrameTask, Report
from irsurvey.report import numbers, texts
from irsurvey.report.labels import component_mark
from irsurvey.report.ranking import governing, in_order, is_saturated

if TYPE_CHECKING:
    from jinja2 import Environment

SUMMARY_LENGTH = 8
"""Results named on the first page; the table behind it has all of them."""

_HELD_BACK = "cannot be cleared"  # the flag of a result that asks for nothing, yet must not pass for sound
_LONG = 140  # characters of a free text that the summary and the tables show; the sheet of its frame has it all
_NOT_FREE_TEXT = {"title", "kind", "method", "viewed_from", "timezone", "reference", "camera"}
_CONTROLS = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f]")


@dataclass(frozen=True, slots=True)
class Picture:
    """An annotated picture to stand in the page: data URI, size [px], and what it shows in words."""

    uri: str
    width: int
    height: int
    words: str


@dataclass(frozen=True, slots=True)
class Sheet:
    """What the page shows of one frame."""

    frame: FrameReport
    task: FrameTask | None
    picture: Picture | None
    urgency: int | None  # the highest of its findings and components


@dataclass(frozen=True, slots=True)
class Open:
    """Something that could not be cleared, and why."""

    frame: FrameReport
    what: str
    why: str


def write(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> Path:
    """Write OUT/report.html from the records and the annotated pictures already in OUT/frames, and return its path."""
    path = out / "report.html"
    files.write_bytes(path, page(report, tasks, out).encode("utf-8", "replace"))
    return path


def page(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> str:
    """The text of the page.  All text of the survey is escaped; control characters become U+FFFD."""
    by_id = {task.id: task for task in tasks}
    template = _environment().get_template("report.html.j2")
    rendered = template.render(
        report=report,
        title=_about(report).get("title") or "Thermographic survey",
        about={texts.about(key): text for key, text in _about(report).items() if key not in _NOT_FREE_TEXT},
        sheets=[Sheet(frame, by_id.get(frame.id), _picture(frame, out), _highest(frame)) for frame in report.frames],
        ranked=in_order(report),
        open_points=list(not_cleared(report)),
        cautions=(*report.cautions, *texts.cautions(frame.kind for frame in report.frames)),
    )
    return _CONTROLS.sub("\ufffd", rendered)


def not_cleared(report: Report) -> Iterator[Open]:
    """What must not be taken for sound: results without a class or held back, pixels and frames without a claim."""
    for frame in report.frames:
        if frame.status == "failed":
            continue
        if frame.claim == "not valid":
            yield Open(frame, "the whole frame", frame.claim_reason)
        if frame.temperature and (lost := frame.temperature.unmeasurable_pixels + frame.temperature.saturated_pixels):
            yield Open(frame, f"{lost} pixels", "no temperature could be measured there")
        for finding in frame.findings:
            if finding.urgency is None or (finding.urgency == 0 and _HELD_BACK in finding.flags):
                yield Open(frame, f"finding {finding.id}", _why(finding))
        for component in frame.components:
            if not component.cleared and not component.urgency:
                yield Open(frame, component.name, _why(component))


def reading(item: Finding | ComponentReport, key: str, *, unit: bool = True) -> str:
    """One number of a finding or component ± U, with its unit, and with ≥ or ≤ where the reading is only a bound."""
    estimate: Estimate | None = getattr(item, key)
    text = numbers.with_unit(numbers.shown(estimate), key) if unit else numbers.shown(estimate)
    if estimate is None or text == numbers.NOTHING or not _is_bound(item, key):
        return text
    return f"{'≤' if isinstance(item, Finding) and item.sense == 'cold' else '≥'}\u00a0{text}"


def _is_bound(item: Finding | ComponentReport, key: str) -> bool:
    if key == "delta_similar_k" and "twin size-limited" in item.flags:
        return False  # both are too small: which way the difference errs is not known
    if key in ("mean_c", "mean_delta_k"):
        return is_saturated(item)
    at_the_spot = key in ("extreme_c", "max_c", "delta_k", "delta_ambient_k", "delta_similar_k")
    return at_the_spot and (is_saturated(item) or "size-limited" in item.flags)


def _about(report: Report) -> dict[str, str]:
    """What [survey] says in words: title, date and free texts."""
    survey = report.survey.get("survey")
    return {key: text for key, text in survey.items() if isinstance(text, str)} if isinstance(survey, dict) else {}


def _why(item: Finding | ComponentReport) -> str:
    """Why something is not cleared: what its governing assessment says, else what its flags mean."""
    assessment = governing(item.assessments)
    if assessment and assessment.statement:
        return assessment.statement
    return " ".join(texts.flag(flag) for flag in item.flags) or "no criterion applies"


def _highest(frame: FrameReport) -> int | None:
    items: tuple[Finding | ComponentReport, ...] = (*frame.findings, *frame.components)
    return max((item.urgency for item in items if item.urgency is not None), default=None)


def _picture(frame: FrameReport, out: Path) -> Picture | None:
    from PIL import Image

    path = out / "frames" / frame.id / "annotated.png"
    if frame.status == "failed" or not path.is_file():
        return None
    with Image.open(path) as image:
        words = str(image.info.get("Description", ""))
        width, height = image.size
    return Picture(f"data:image/png;base64,{b64encode(path.read_bytes()).decode()}", width, height, words)


def _short(text: str, length: int = _LONG) -> str:
    return text if len(text) <= length else f"{text[: length - 1].rstrip()}…"


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
    environment.filters |= {"short": _short}
    environment.globals |= {
        "component_mark": component_mark,
        "governing": governing,
        "n": numbers,
        "reading": reading,
        "summary_length": SUMMARY_LENGTH,
        "t": texts,
    }
    environment.tests |= {"component": lambda ranked: isinstance(ranked.item, ComponentReport)}
    return environment
