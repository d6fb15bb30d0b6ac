"""One raw frame to one frame report, top to bottom: read this first."""

from __future__ import annotations

from irsurvey.analysis.claims import limited
from irsurvey.analysis.components import component_twins
from irsurvey.analysis.conditions import claimed_by
from irsurvey.analysis.correction import correct, reflected_by_reflector
from irsurvey.analysis.evidence import Evidence
from irsurvey.analysis.found import with_found
from irsurvey.analysis.frame_report import failed, frame_report
from irsurvey.analysis.inputs import inputs
from irsurvey.analysis.maps import MAPS, maps_of
from irsurvey.analysis.pairs import compared
from irsurvey.analysis.planning import planned, with_twins
from irsurvey.analysis.propagation import FIRST_ORDER, UNCERTAINTIES, propagated
from irsurvey.analysis.regions import screen
from irsurvey.analysis.window import window_by_frames
from irsurvey.assess.criteria import chosen
from irsurvey.model import Frame, FrameReport, FrameTask, Maps

__all__ = [
    "FIRST_ORDER",
    "MAPS",
    "UNCERTAINTIES",
    "analyse",
    "failed",
    "reflected_by_reflector",
    "window_by_frames",
]


def analyse(
    frame: Frame,
    task: FrameTask,
    *,
    partner: Frame | None = None,
    maps: tuple[str, ...] = (),
    uncertainty: str = FIRST_ORDER,
) -> tuple[FrameReport, Maps]:
    """Correct, screen, measure and assess one frame.

    Returns the report and the maps that go with it; `partner` is the frame of `task.pair.partner`; `maps` may ask for
    those of `MAPS`; `uncertainty` is one of `UNCERTAINTIES`.  Raises FrameError where nothing in the frame can be
    measured.
    """
    criteria = chosen(task.criteria, task.kind, task.method, task.own_criteria)
    corrected = correct(frame, task)  # stored numbers → object temperatures
    task = with_found(task, corrected)  # warm parts that nobody drew, where they are asked for
    screened = screen(corrected, task)  # → reference area and regions that deviate from it
    measured = planned(corrected, screened, task)  # → what is measured, as one function of the scene
    twins = component_twins(task, corrected, measured, criteria)
    measured = with_twins(measured, twins)
    numbers = propagated(measured, uncertainty, seed=task.id)  # → every number with its uncertainty
    paired = compared(corrected, screened, task, partner)  # → what changed with the pressure
    claim = limited(claimed_by(task), corrected, screened)  # → what may be said of it at all
    evidence = Evidence(task, corrected, screened, measured, numbers, inputs(measured.scene), criteria, claim, paired)
    report = frame_report(frame, evidence, twins)  # → findings, components, what they mean
    return report, maps_of(evidence, maps)
