"""One raw frame to one frame report, top to bottom: read this first."""

from __future__ import annotations

from irsurvey.analysis.conditions import recorded
from irsurvey.analysis.correction import correct, reflected_by_reflector
from irsurvey.analysis.findings import Evidence, component_twins
from irsurvey.analysis.frame_report import failed, frame_report
from irsurvey.analysis.inputs import inputs
from irsurvey.analysis.maps import MAPS, maps_of
from irsurvey.analysis.planning import planned, with_twins
from irsurvey.analysis.propagation import FIRST_ORDER, UNCERTAINTIES, propagated
from irsurvey.analysis.regions import screen
from irsurvey.assess.conditions import claim
from irsurvey.assess.criteria import chosen
from irsurvey.model import Frame, FrameReport, FrameTask, Maps

__all__ = ["FIRST_ORDER", "MAPS", "UNCERTAINTIES", "analyse", "failed", "reflected_by_reflector"]


def analyse(
    frame: Frame, task: FrameTask, *, maps: tuple[str, ...] = (), uncertainty: str = FIRST_ORDER
) -> tuple[FrameReport, Maps]:
    """Correct, screen, measure and assess one frame.

    Returns the report and the maps that go with it; `maps` may ask for those of `MAPS`; `uncertainty` is one of
    `UNCERTAINTIES`.  Raises FrameError where nothing in the frame can be measured.
    """
    criteria = chosen(task.criteria, task.kind, task.method)
    corrected = correct(frame, task)  # stored numbers → object temperatures
    screened = screen(corrected, task)  # → reference area and regions that deviate from it
    measured = planned(corrected, screened, task)  # → what is measured, as one function of the scene
    twins = component_twins(task, corrected, measured, criteria)
    measured = with_twins(measured, twins)
    numbers = propagated(measured, uncertainty, seed=task.id)  # → every number with its uncertainty
    evidence = Evidence(task, corrected, screened, measured, numbers, inputs(measured.scene), criteria)
    claimed = claim(task.kind, task.method, recorded(task))
    report = frame_report(frame, evidence, twins, claimed)  # → findings, components, what they mean
    return report, maps_of(evidence, maps)
