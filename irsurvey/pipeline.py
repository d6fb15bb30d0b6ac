"""One raw frame to one frame report, top to bottom: read this first."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.budgets import terms
from irsurvey.analysis.conditions import recorded
from irsurvey.analysis.correction import Corrected, correct, reflected_by_reflector
from irsurvey.analysis.findings import BUDGETED, Evidence, Results, component_twins, components, findings
from irsurvey.analysis.inputs import inputs
from irsurvey.analysis.maps import heat_flux_map, label_map, uncertainty_map
from irsurvey.analysis.measurand import Columns, names, stacked
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
from irsurvey.uncertainty import Budget, Drawn, differ, monte_carlo, propagate

_STRONG_AMPLIFICATION = 3.0
"""∂T/∂T_app from which a reader is warned."""
_LARGE_RELATIVE_U, _CURVED_AMPLIFICATION = 0.1, 2.0
"""u(ε)/ε and ∂T/∂T_app from which first order is low and the distribution skewed (computed, ε 0.30 ± 0.05)."""
_ROUNDING = 1e-6
"""Of a correlation coefficient."""
FIRST_ORDER, DRAWN = "first-order", "monte-carlo"
UNCERTAINTIES = (FIRST_ORDER, DRAWN)
"""How uncertainty may be propagated."""
MAPS = ("heat-flux", "uncertainty")
"""Maps that are made on request."""
_COARSE = 0.005
"""Step [K] of quantised float frames from which it is told: a tenth of a good camera's noise."""

__all__ = ["analyse", "failed", "reflected_by_reflector"]


def analyse(
    frame: Frame, task: FrameTask, *, maps: tuple[str, ...] = (), uncertainty: str = FIRST_ORDER
) -> tuple[FrameReport, Maps]:
    """Correct, screen, measure and assess one frame.

    Returns the report and the maps that go with it; `maps` may ask for "heat-flux" and "uncertainty";
    `uncertainty` is "first-order" or "monte-carlo".  Raises FrameError where nothing in the frame can be measured.
    """
    criteria = chosen(task.criteria, task.kind, task.method)
    corrected = correct(frame, task)
    screened = screen(corrected, task)
    measured = planned(corrected, screened, task)
    twins = component_twins(task, corrected, measured, criteria)
    measured = with_twins(measured, twins)

    def measurand(values: Columns) -> NDArray[np.float64]:
        return stacked(measured.plan, values)

    budget = propagate(measurand, measured.scene)
    drawn = monte_carlo(measurand, measured.scene, seed=tuple(task.id.encode())) if uncertainty == DRAWN else None
    estimates = budget.estimates() if drawn is None else drawn.estimates()
    numbers = names(measured.plan, measured.scene)
    results = dict(zip(numbers, estimates, strict=True))
    budgets = {name: terms(budget, index) for index, name in enumerate(numbers) if name[1] in BUDGETED}

    level, reason = claim(task.kind, task.method, recorded(task))
    stated = inputs(measured.scene)
    evidence = Evidence(task, corrected, screened, measured, results, budgets, stated, criteria)
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
        inputs=stated,
        humid_air=_humid_air(corrected),
        uncertainty=uncertainty,
        draws=None if drawn is None else drawn.draws,
        atmosphere_transmittance=_transmittance(corrected, task),
        radiance_table_error_k=band_table(task.camera.band).worst_error,
        detectable=_detectable(screened, task),
        temperature=_summary(corrected),
        reference=_reference(screened, task, results),
        findings=tuple(findings(evidence, is_valid=level != "not valid")),
        components=tuple(components(evidence, twins)),
        flags=(*_flags(corrected, screened, task), *_doubts(budget, drawn, corrected, task)),
    )
    celsius = corrected.t - np.float32(ZERO_CELSIUS)
    flux = heat_flux_map(corrected, measured.plan.surroundings) if "heat-flux" in maps else None
    u = uncertainty_map(corrected, measured.scene, task.camera.band, screened.noise) if "uncertainty" in maps else None
    return report, Maps(celsius, label_map(screened), screened.reference_area, flux, u)


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
        uncertainty=None,
        draws=None,
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


def _reference(screened: Screened, task: FrameTask, results: Results) -> ReferenceReport | None:
    reference, level = screened.reference, results.get(("", "reference"))
    if reference is None:
        return None
    return ReferenceReport(
        how="polygon" if task.reference else "automatic",
        median_c=reference.level - ZERO_CELSIUS,
        u_c=None if level is None else level.u,
        spread_k=reference.spread,
        pixels=reference.pixels,
        gradient_k=reference.gradient,
        heat_flux_w_m2=results.get(("", "reference_flux")),
        u_value_w_m2k=results.get(("", "u_value")),
        polygon=task.reference or tuple((float(x), float(y)) for x, y in outline(screened.reference_area)),
    )


def _doubts(budget: Budget, drawn: Drawn | None, corrected: Corrected, task: FrameTask) -> Iterator[str]:
    """Where the propagation itself is in doubt: told beforehand from the inputs, or found by drawing."""
    if budget.adjusted > _ROUNDING:
        yield f"declared correlations contradict each other: coefficients changed by up to {budget.adjusted:.2f}"
    if drawn is not None:
        if count := int(np.count_nonzero(differ(budget, drawn))):
            yield f"first order differs by more than 20 % from Monte Carlo in {count} numbers"
        if count := int(np.count_nonzero(~drawn.converged & np.isfinite(drawn.u))):
            yield f"not settled after {drawn.draws} draws: {count} numbers"
        return
    for index, (emissivity, _) in enumerate(corrected.optics_names):
        doubtful = corrected.scene[emissivity].u > _LARGE_RELATIVE_U * corrected.scene[emissivity].value
        if doubtful or stretch_of(corrected, task, index) > _CURVED_AMPLIFICATION:
            yield "strongly curved: run again with --uncertainty monte-carlo"
            return


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
