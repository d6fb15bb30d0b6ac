"""What the browser computes with: band radiances, the air path, criteria, colour maps and words, one for a report."""

from __future__ import annotations

import tomllib
from base64 import b64encode
from collections.abc import Iterable
from dataclasses import replace
from functools import cache
from importlib.resources import files
from math import isfinite
from typing import Any, Final

import numpy as np

from irsurvey import texts
from irsurvey.analysis.envelope import LIMIT_RESISTANCE
from irsurvey.assess.criteria import URGENCIES, Criterion, criteria
from irsurvey.assess.severity import LEAST_EMISSIVITY
from irsurvey.constants import STANDARD_PRESSURE, STEFAN_BOLTZMANN, ZERO_CELSIUS
from irsurvey.heat.humid_air import GAS_CONSTANT
from irsurvey.model import FrameTask, Report
from irsurvey.numbers import Scale, Style, expressed
from irsurvey.radiometry.atmosphere import fitted_band, source
from irsurvey.radiometry.band import TEMPERATURES, band_table
from irsurvey.radiometry.planck import Band
from irsurvey.report.inks import COLORMAP, LEVELS, palette
from irsurvey.report.style import asked

COLORMAPS: Final = (COLORMAP, "viridis", "magma", "gray")
"""Colour maps a reader may choose, by the names matplotlib gives them; the first is that of the report."""

_STEP: Final = 50
"""Every so many entries of a band table (0.1 K apart) are carried: over 5 K ln L is a cubic to 0.1 mK."""
_FIGURES: Final = 9  # of ln L, after the point: 1e-9 of L is less than 0.1 µK


def tables(report: Report, tasks: tuple[FrameTask, ...]) -> dict[str, Any]:
    """Everything that the frames of a report share, ready for JSON."""
    return {
        **equations(tuple(dict.fromkeys(task.camera.band for task in tasks))),
        "criteria": {criterion.name: _criterion(criterion) for criterion in _used(report, tasks)},
        "colormaps": {name: b64encode(palette(name)[: 3 * LEVELS]).decode() for name in COLORMAPS},
        "inks": b64encode(palette(COLORMAP)[3 * LEVELS :]).decode(),
        "show": _show(asked(report)),
        "words": texts.tools(),
        "urgencies": _urgencies(),
    }


def equations(bands: tuple[Band, ...]) -> dict[str, Any]:
    """What the equations of the page need: tables and coefficients of these bands, and constants."""
    return {
        "bands": {band_key(band): _band(band) for band in bands},
        "source": _source_range(),
        "constants": {
            "zero_celsius": ZERO_CELSIUS,
            "standard_pressure": STANDARD_PRESSURE,
            "stefan_boltzmann": STEFAN_BOLTZMANN,
            "vapour_gas": GAS_CONSTANT,
            "least_emissivity": LEAST_EMISSIVITY,
            "limit_resistance": LIMIT_RESISTANCE,
        },
    }


def band_key(band: Band) -> str:
    """What a band is called in the data of a page: its edges in µm."""
    return "-".join(f"{edge * 1e6:.6g}" for edge in band)


def _band(band: Band) -> dict[str, Any]:
    """Natural logarithms of the band radiance, and the fit of the air path that serves this band."""
    table = band_table(band)
    logs = np.log(table.radiances[::_STEP])
    step = float(table.temperatures[_STEP] - table.temperatures[0])
    return {
        "first": TEMPERATURES[0],
        "step": round(step, 9),
        "fine": round(step / _STEP, 9),
        "logs": [round(float(value), _FIGURES) for value in logs],
        "air": _air(band),
    }


@cache
def _fits() -> dict[str, Any]:
    return tomllib.loads(files("irsurvey.radiometry").joinpath("atmosphere.toml").read_text(encoding="utf-8"))


def _air(band: Band) -> dict[str, Any]:
    """The coefficients of atmosphere.toml for one band; lists over its parts weak, dry, strong."""
    entry = _fits()[fitted_band(band)[0]]
    parts = [entry[part] for part in ("weak", "dry", "strong")]
    weak, dry = np.array(entry["F"]), np.array(entry["H"])
    shares = np.array([weak, dry, np.array([1.0, 0.0, 0.0]) - weak - dry])
    return {
        **{key: entry[key] for key in ("a", "b", "c", "d", "mu")},
        **{key: [part[key] for part in parts] for key in "knsqm"},
        "shares": shares.tolist(),
    }


def _source_range() -> dict[str, float]:
    """Ends of the fit's source temperatures [K], and the one where x = 0, read off x = ln(T/reference) itself."""
    reference = 300.0 / float(np.exp(source(300.0)))
    low, high = (reference * float(np.exp(source(t))) for t in (1.0, 1e4))
    return {"reference": round(reference, 6), "low": round(low, 6), "high": round(high, 6)}


def _used(report: Report, tasks: Iterable[FrameTask]) -> list[Criterion]:
    """The criteria that judged anything in this report, by name."""
    known = criteria(tuple(dict.fromkeys(own for task in tasks for own in task.own_criteria)))
    judged = [item.assessments for frame in report.frames for item in frame.findings]
    judged += [item.assessments for frame in report.frames for item in frame.components]
    names = {assessment.criterion for assessments in judged for assessment in assessments}
    return [known[name] for name in sorted(names) if name in known]


def _criterion(criterion: Criterion) -> dict[str, Any]:
    return {
        "quantity": criterion.quantity,
        "graded_from": criterion.classed_from,
        "classes": [
            {
                "name": kind.name,
                "urgency": kind.urgency,
                "low": kind.low if isfinite(kind.low) else None,
                "holds_low": kind.holds_low,
            }
            for kind in criterion.classes
        ],
    }


def _urgencies() -> dict[str, str]:
    """What each urgency asks for; "none": of what cannot be classed; "open": of 0 where nothing is cleared."""
    asked_for = {str(level): texts.urgency(level) for level in URGENCIES}
    return {**asked_for, "none": texts.urgency(None), "open": texts.to_do(0, "not cleared")}


def _show(style: Style) -> dict[str, Any]:
    """How the page shows numbers in SI units: times `factor` plus `shift`, to so many places, with a unit."""
    celsius, flux = expressed("°C", style), expressed("W/m²", style)
    return {
        "decimal": "," if style.decimal_comma else ".",
        "temperature": _shown_as(replace(celsius, shift=celsius.shift - celsius.factor * ZERO_CELSIUS), 2),
        "celsius": _shown_as(celsius, 2),
        "delta": _shown_as(expressed("K", style), 2),
        "plain": _shown_as(Scale(""), 2),
        "flux": _shown_as(flux, 1 if flux.factor == 1 else 2),
    }


def _shown_as(to: Scale, places: int) -> dict[str, Any]:
    return {"factor": to.factor, "shift": to.shift, "symbol": to.symbol, "places": places}
