"""One raw frame to one frame report, top to bottom: read this first."""

from __future__ import annotations

import numpy as np

from irsurvey.analysis.conditions import recorded
from irsurvey.analysis.correction import Corrected, correct, reflected_by_reflector
from irsurvey.analysis.findings import component_twins, components, findings
from irsurvey.analysis.inputs import inputs
from irsurvey.analysis.maps import heat_flux_map, label_map
from irsurvey.analysis.measurand import names, stacked
from irsurvey.analysis.planning import planned, with_twins
from irsurvey.analysis.regions import Screened, screen, stretch_of
from irsurvey.assess.conditions import claim
from irsurvey.assess.criteria import chosen
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.geometry.polygons import outline
from irsurvey.heat.humid_air import dew_point, vapour_density
from irsurvey.model import (
    Detectable,
    Frame,
    FrameReport,
    FrameTask,
    Maps,
    ReferenceReport,
    Source,
    TemperatureSummary,
)
from irsurvey.radiometry.atmosphere import transmittance, validity_notes
from irsurvey.radiometry.band import band_table
from irsurvey.uncertainty import propagate

_STRONG_AMPLIFICATION = 3.0
"""∂T/∂T_app from which a reader is warned."""
_COARSE = 0.005
"""Step [K] of quantised float frames from which it is told: a tenth of a good camera's noise."""

__all__ = ["analyse", "failed", "reflected_by_reflector"]


def analyse(frame: Frame, task: FrameTask, *, maps: tuple[str, ...] = ()) -> tuple[FrameReport, Maps]:
    """Correct, screen, measure and assess one frame.

    Returns the report and the maps that go with it; `maps` may ask for "heat-flux".  Raises FrameError where
    nothing in the frame can be measured.
    """
    criteria = chosen(task.criteria, task.kind, task.method)
    corrected = correct(frame, task)
    screened = screen(corrected, task)
    measured = planned(corrected, screened, task)
    twins = component_twins(task, corrected, measured, criteria)
    measured = with_twins(measured, twins)

    budget = propagate(lambda values: stacked(measured.plan, values), measured.scene)
    results = dict(zip(names(measured.plan, measured.scene), budget.estimates(), strict=True))

    level, reason = claim(task.kind, task.method, recorded(task))
    reference = results.get(("", "reference"))
    report = FrameReport(
        id=task.id,
        status="analysed",
        reason=None,
        kind=task.kind,
        claim=level,
        claim_reason=reason,
        group=task.group,
        label=task.label,
        asset=task.asset,
        notes=task.notes,
        taken=task.taken.isoformat() if task.taken else None,
        source=Source(
            task.file, frame.sha256, (frame.stored.shape[0], frame.stored.shape[1]), str(frame.stored.dtype)
        ),
        inputs=inputs(measured.scene),
        humid_air=_humid_air(corrected),
        atmosphere_transmittance=_transmittance(corrected, task),
        radiance_table_error_k=band_table(task.camera.band).worst_error,
        detectable=_detectable(screened, task),
        temperature=_summary(corrected),
        reference=_reference(screened, task, reference.u if reference else None),
        findings=tuple(findings(task, screened, measured, results, criteria, is_valid=level != "not valid")),
        components=tuple(components(task, corrected, measured, twins, results, criteria)),
        flags=_flags(corrected, screened, task),
    )
    flux = heat_flux_map(corrected, measured.plan.surroundings) if "heat-flux" in maps else None
    celsius = corrected.t - np.float32(ZERO_CELSIUS)
    return report, Maps(celsius, label_map(screened), screened.reference_area, flux)


def failed(task: FrameTask, reason: str) -> FrameReport:
    """The report of a frame that could not be read or analysed."""
    return FrameReport(
        id=task.id,
        status="failed",
        reason=reason,
        kind=task.kind,
        claim="not valid",
        claim_reason="the frame could not be analysed",
        group=task.group,
        label=task.label,
        asset=task.asset,
        notes=task.notes,
        taken=task.taken.isoformat() if task.taken else None,
        source=Source(task.file, None, None, None),
        inputs={},
        humid_air={},
        atmosphere_transmittance=None,
        radiance_table_error_k=None,
        detectable=None,
        temperature=None,
        reference=None,
        findings=(),
        components=(),
        flags=(),
    )


def _humid_air(corrected: Corrected) -> dict[str, float]:
    """Dew point and vapour content of the air along the path."""
    values = corrected.scene.values()
    air, humidity = values["air"], values["relative_humidity"]
    return {
        "dew_point_c": float(dew_point(air, humidity)) - ZERO_CELSIUS,
        "vapour_density_g_m3": 1e3 * float(vapour_density(air, humidity)),
    }


def _transmittance(corrected: Corrected, task: FrameTask) -> float:
    """Band transmittance of the air path for radiation of the frame's median temperature."""
    values = corrected.scene.values()
    return float(
        transmittance(
            corrected.pivot,
            distance=values["distance"],
            t_air=values["air"],
            vapour_density=vapour_density(values["air"], values["relative_humidity"]),
            pressure=values["pressure"],
            band=task.camera.band,
        )
    )


def _detectable(screened: Screened, task: FrameTask) -> Detectable:
    """The least this frame could have shown: a clean frame is a bounded statement."""
    area = None
    if screened.pixel_area is not None:
        area = task.detection.min_area or task.detection.min_pixels * float(np.nanmedian(screened.pixel_area))
    found_nothing_to_compare = screened.reference is None
    return Detectable(
        min_delta_k=None if found_nothing_to_compare else screened.detectable_delta,
        min_area_m2=area,
        min_pixels=task.detection.min_pixels,
        noise_k=screened.noise,
        shading_allowance_k=abs(screened.shading),
    )


def _summary(corrected: Corrected) -> TemperatureSummary:
    measured = corrected.t[~np.isnan(corrected.t)]
    unmeasurable = corrected.unsolved_pixels + corrected.without_data_pixels
    if measured.size == 0:
        return TemperatureSummary(None, None, None, None, unmeasurable, corrected.saturated_pixels)
    return TemperatureSummary(
        float(measured.min()) - ZERO_CELSIUS,
        float(measured.max()) - ZERO_CELSIUS,
        float(measured.mean(dtype=np.float64)) - ZERO_CELSIUS,
        float(np.median(measured)) - ZERO_CELSIUS,
        unmeasurable,
        corrected.saturated_pixels,
    )


def _reference(screened: Screened, task: FrameTask, u: float | None) -> ReferenceReport | None:
    reference = screened.reference
    if reference is None:
        return None
    return ReferenceReport(
        how="polygon" if task.reference else "automatic",
        median_c=reference.level - ZERO_CELSIUS,
        u_c=u,
        spread_k=reference.spread,
        pixels=reference.pixels,
        gradient_k=reference.gradient,
        polygon=task.reference or tuple((float(x), float(y)) for x, y in outline(screened.reference_area)),
    )


def _flags(corrected: Corrected, screened: Screened, task: FrameTask) -> tuple[str, ...]:
    """What whoever reads the frame's report should know first, in short sentences."""
    values = corrected.scene.values()
    stretch = stretch_of(corrected, task, 0)
    told = [
        (screened.reference is None, "no reference area found: nothing can be compared in this frame"),
        (task.reference is None and screened.reference is not None, "automatic reference"),
        (corrected.saturated_pixels > 0, f"saturated: {corrected.saturated_pixels} pixels at or beyond the range"),
        (corrected.unsolved_pixels > 0, f"no physical solution: {corrected.unsolved_pixels} pixels"),
        (corrected.without_data_pixels > 0, f"without data: {corrected.without_data_pixels} pixels"),
        (stretch > _STRONG_AMPLIFICATION, f"errors of the reading are amplified {stretch:.1f} times"),
        (corrected.scene["wind"].source == "default" if "wind" in values else False, "wind not recorded, assumed"),
    ]
    step = corrected.quantised_to
    told.append((step > _COARSE, f"numbers read in steps of {step:.3f} K: a far-off one stretches their range"))
    notes = validity_notes(values["distance"], values["air"], values["pressure"])
    return (*(text for applies, text in told if applies), *notes)
