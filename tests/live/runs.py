"""Small runs of the sample surveys, and the page of their sheets."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from live.pages import sheets

from irsurvey.model import FrameReport, FrameTask, Report
from irsurvey.run import load_survey, run

HOUSE_FRAMES = (
    *("bedroom-gable", "kitchen-bays", "hall-window", "north-cavity", "north-meter", "bedroom-ceiling"),
    *("living-foil", "north-foil"),  # others refer to them
)
PUMP_FRAMES = (
    *("incomer", "pump-one", "busbars", "heating", "terminals", "yard-isolator", "pv-row"),
    *("window-plate", "window-plate-through"),  # another one refers to them
)


@dataclass(frozen=True)
class Run:
    """A finished run: its records, its tasks, its folder, and a page with its sheets."""

    report: Report
    tasks: tuple[FrameTask, ...]
    out: Path
    page: Path

    def frame(self, id_: str) -> FrameReport:
        """One frame's report."""
        return next(frame for frame in self.report.frames if frame.id == id_)

    def task(self, id_: str) -> FrameTask:
        """One frame's task."""
        return next(task for task in self.tasks if task.id == id_)


def ran(survey: Path, folder: Path) -> Run:
    """Run a survey and write the page of its sheets."""
    out = folder / "out"
    report, tasks = run(survey, out, documents=("html",), maps=("heat-flux",)), load_survey(survey).tasks
    page = folder / "page.html"
    page.write_text(sheets(report, tasks, out), encoding="utf-8")
    return Run(report, tasks, out, page)
