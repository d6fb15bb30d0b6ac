"""The record of one frame: what was read, stated, found and claimed, and what a reader must know first."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from math import ceil

import numpy as np

from irsurvey.analysis.building import reference_heat, room_air, strip_reports, transmittances
from irsurvey.analysis.components import components
from irsurvey.analysis.correction import Corrected
from irsurvey.analysis.evidence import Evidence
from irsurvey.analysis.findings import findings, reference_emissivity
from irsurvey.analysis.regions import ENOUGH_REFERENCE, SMALL_REFERENCE, Screened, has_small_reference, stretch_of
from irsurvey.analysis.risk import surfaces_at_risk
from irsurvey.analysis.surroundings import surroundings_flags
from irsurvey.assess.severity import LEAST_EMISSIVITY, NO_SOLUTION, REFLECTIVE, SATURATED
from irsurvey.assess.twins import TwinPlan
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.geometry.polygons import outline
from irsurvey.heat.humid_air import dew_point, vapour_density
from irsurvey.model import Detectable, Frame, FrameReport, FrameTask, ReferenceReport, Source, TemperatureSummary
from irsurvey.radiometry.atmosphere import transmittance, validity_notes
from irsurvey.radiometry.band import band_table
from irsurvey.texts import state

_STRONG_AMPLIFICATION = 3.0
"""∂T/∂T_app from which a reader is warned."""
_LARGE_RELATIVE_U, _CURVED_AMPLIFICATION = 0.1, 2.0
"""u(ε)/ε and ∂T/∂T_app from which first order is low and the distribution skewed (computed, ε 0.30 ± 0.05)."""
_COARSE = 0.005
"""Step [K] of quantised float frames from which it is told: a tenth of a good camera's noise."""


def frame_report(frame: Frame, evidence: Evidence, twins: Mapping[str, TwinPlan]) -> FrameReport:
    """The report of an analysed frame."""
    task, corrected, screened = evidence.task, evidence.corrected, evidence.screened
    level, reason = evidence.claim
    return FrameReport(
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
        source=Source(task.file, frame.sha256, (frame.stored.shape[0], frame.stored.shape[1]), str(frame.stored.dtype)),
        inputs=dict(evidence.inputs),
        humid_air=_humid_air(corrected),
        uncertainty=evidence.numbers.how,
        draws=evidence.numbers.draws,
        atmosphere_transmittance=_transmittance(corrected, task),
        radiance_table_error_k=band_table(task.camera.band).worst_error,
        detectable=_detectable(screened, task),
        temperature=_summary(corrected),
        reference=_reference(evidence),
        findings=tuple(findings(evidence)),
        components=tuple(components(evidence, twins)),
        element=task.element.id if task.element else None,
        room_air=room_air(evidence),
        surface_at_risk=tuple(surfaces_at_risk(evidence)),
        strips=tuple(strip_reports(evidence)),
        pair=evidence.paired.report if evidence.paired else None,
        flags=(*_flags(evidence), *evidence.numbers.doubts),
    )


def failed(task: FrameTask, reason: str) -> FrameReport:
    """The report of a frame that could not be read or analysed."""
    return FrameReport(
        id=task.id,
        status="failed",
        reason=reason,
        kind=task.kind,
        claim="not valid",
        claim_reason=state("not_analysed"),
        group=task.group,
        label=task.label,
        asset=task.asset,
        notes=task.notes,
        taken=task.taken.isoformat() if task.taken else None,
        source=Source(task.file, None, None, None),
        inputs={},
        humid_air={},
        uncertainty=None,
        draws=None,
        atmosphere_transmittance=None,
        radiance_table_error_k=None,
        detectable=None,
        temperature=None,
        reference=None,
        findings=(),
        components=(),
        element=task.element.id if task.element else None,
        room_air=None,
        surface_at_risk=(),
        strips=(),
        pair=None,
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
    compared = screened.reference is not None
    pixels = task.detection.min_pixels
    if task.detection.min_area and screened.pixel_area is not None:
        pixels = ceil(round(task.detection.min_area / float(np.nanmedian(screened.pixel_area)), 6))
    return Detectable(
        threshold_k=screened.min_delta if compared else None,
        min_delta_k=screened.detectable_delta if compared else None,
        min_area_m2=area,
        min_pixels=pixels,
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


def _reference(evidence: Evidence) -> ReferenceReport | None:
    task, screened, results = evidence.task, evidence.screened, evidence.numbers.results
    reference, level = screened.reference, results.get(("", "reference"))
    if reference is None:
        return None
    numbers, refusals = transmittances(evidence, "")
    heat = reference_heat(evidence, refusals)
    return ReferenceReport(
        how="polygon" if task.reference else "automatic",
        median_c=reference.level - ZERO_CELSIUS,
        u_c=None if level is None else level.u,
        spread_k=reference.spread,
        pixels=reference.pixels,
        gradient_k=reference.gradient,
        **heat,
        film_resistance_m2k_w=results.get(("", "film_resistance")),
        u_value_w_m2k=numbers["u_value_w_m2k"],
        u_value_simple_w_m2k=numbers["u_value_simple_w_m2k"],
        refusals=refusals,
        polygon=task.reference or tuple((float(x), float(y)) for x, y in outline(screened.reference_area)),
    )


def _flags(evidence: Evidence) -> Iterator[str]:
    """What whoever reads the frame's report should know first, in short sentences."""
    task, corrected = evidence.task, evidence.corrected
    scene, values = corrected.scene, corrected.scene.values()
    if evidence.screened.reference is None:
        yield state("flag_no_reference")
    elif task.reference is None:
        yield "automatic reference"
    if has_small_reference(evidence.screened):
        yield f"{SMALL_REFERENCE}: {state('flag_small_reference', pixels=ENOUGH_REFERENCE)}"
    if reference_emissivity(evidence) < LEAST_EMISSIVITY:
        yield f"{REFLECTIVE}: {state('flag_reflective_reference')}"
    if pixels := corrected.saturated_pixels:
        yield f"{SATURATED}: {state('flag_saturated', pixels=pixels)}"
    if pixels := corrected.unsolved_pixels:
        yield f"{NO_SOLUTION}: {state('flag_unsolved', pixels=pixels)}"
    if pixels := corrected.without_data_pixels:
        yield state("flag_without_data", pixels=pixels)
    if (stretch := stretch_of(corrected, task, 0)) > _STRONG_AMPLIFICATION:
        yield state("flag_amplified", times=f"{stretch:.1f}")
    if "wind" in scene and scene["wind"].source == "default":
        yield state("flag_wind_assumed")
    if task.has_window and scene["window_temperature"].source == "default":
        yield "window temperature assumed"
    yield from surroundings_flags(task, evidence.planned.scene)
    if corrected.quantised_to > _COARSE:
        yield state("flag_coarse", step=f"{corrected.quantised_to:.3f}")
    if any(_is_curved(corrected, task, index) for index in range(len(corrected.optics_names))):
        yield f"strongly curved: {state('flag_curved')}"
    yield from validity_notes(values["distance"], values["air"], values["pressure"])


def _is_curved(corrected: Corrected, task: FrameTask, index: int) -> bool:
    """Whether first order may not do on one optics of the frame."""
    emissivity = corrected.scene[corrected.optics_names[index][0]]
    return emissivity.u > _LARGE_RELATIVE_U * emissivity.value or (
        stretch_of(corrected, task, index) > _CURVED_AMPLIFICATION
    )
