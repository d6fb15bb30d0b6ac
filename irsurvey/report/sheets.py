"""What a page shows of each frame."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from irsurvey import texts
from irsurvey.model import ComponentReport, Finding, FrameReport, FrameTask
from irsurvey.numbers import SI, Style
from irsurvey.report import histogram_plot, pictures, pressure
from irsurvey.report.picture import NUMBERED
from irsurvey.report.pictures import Picture
from irsurvey.report.ranking import foremost


@dataclass(frozen=True, slots=True)
class Entry:
    """A frame in the list of all: in short, what the most urgent of its findings and components asks for."""

    frame: FrameReport
    to_do: str
    chip: str  # how that is set
    small: Picture | None = None


@dataclass(frozen=True, slots=True)
class Sheet:
    """What its sheet shows of a frame; of very many findings, the foremost, and how many `more` there are."""

    frame: FrameReport
    task: FrameTask | None
    findings: tuple[Finding, ...]
    more: int
    picture: Picture | None
    photo: Picture | None
    change: Picture | None  # what pressure changed
    pair: pressure.Told
    histogram: histogram_plot.Plot | None


def entry(frame: FrameReport, small: Picture | None = None) -> Entry:
    """A frame as the list of all frames has it."""
    items: tuple[Finding | ComponentReport, ...] = (*frame.findings, *frame.components)
    urgency = max((item.urgency for item in items if item.urgency is not None), default=None)
    is_open = any(item.outcome == "not cleared" for item in items)
    to_do = texts.to_do(urgency, "not cleared" if is_open else "")
    chip = "weak" if to_do != texts.urgency(urgency) else "ux" if urgency is None else f"u{urgency}"
    if frame.status == "failed":
        to_do, chip = texts.say("not_readable"), "weak"
    elif not items and frame.claim == "not valid":
        to_do, chip = texts.claim_name(frame.claim), "weak"
    elif not items:
        compared = is_compared(frame)
        to_do, chip = texts.say("nothing_found" if compared else "nothing_compared"), "" if compared else "weak"
    return Entry(frame, to_do, chip, small)


def sheet(frame: FrameReport, task: FrameTask | None, out: Path, *, style: Style = SI) -> Sheet:
    """The sheet of a frame, with the pictures that the run left in its folder."""
    shown = foremost(frame, NUMBERED)
    return Sheet(
        frame,
        task,
        findings=shown,
        more=len(frame.findings) - len(shown),
        picture=pictures.stored(frame, out, "annotated.png"),
        photo=pictures.photograph(task, pictures.PHOTOGRAPH_SIDE) if task and frame.status != "failed" else None,
        change=pictures.stored(frame, out, "change.png"),
        pair=pressure.told(frame, task),
        histogram=histogram_plot.plot(frame, out, style=style),
    )


def is_compared(frame: FrameReport) -> bool:
    """Whether a frame has a reference area to hold its pixels against."""
    return frame.detectable is not None and frame.detectable.min_delta_k is not None
