"""Surface temperatures, anomalies, heat and severity from radiometric infrared survey frames."""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from irsurvey.errors import IrsurveyError
    from irsurvey.model import ReadOptions
    from irsurvey.pipeline import analyse
    from irsurvey.radiometry.measurement import Path as AirPath
    from irsurvey.radiometry.measurement import apparent_temperature, object_temperature
    from irsurvey.radiometry.planck import band_radiance
    from irsurvey.readers import read as read_frame
    from irsurvey.run import check as check_survey
    from irsurvey.run import load_survey
    from irsurvey.run import run as run_survey

__version__ = "0.1.0"
__all__ = [
    "AirPath",
    "IrsurveyError",
    "ReadOptions",
    "analyse",
    "apparent_temperature",
    "band_radiance",
    "check_survey",
    "load_survey",
    "object_temperature",
    "read_frame",
    "run_survey",
]

_HOMES = {
    "AirPath": "irsurvey.radiometry.measurement:Path",
    "IrsurveyError": "irsurvey.errors:IrsurveyError",
    "ReadOptions": "irsurvey.model:ReadOptions",
    "analyse": "irsurvey.pipeline:analyse",
    "apparent_temperature": "irsurvey.radiometry.measurement:apparent_temperature",
    "band_radiance": "irsurvey.radiometry.planck:band_radiance",
    "check_survey": "irsurvey.run:check",
    "load_survey": "irsurvey.run:load_survey",
    "object_temperature": "irsurvey.radiometry.measurement:object_temperature",
    "read_frame": "irsurvey.readers:read",
    "run_survey": "irsurvey.run:run",
}
"""Where a public name lives; imported when it is first asked for (PEP 562), so that the command line stays quick."""


def __getattr__(name: str) -> object:
    if name not in _HOMES:
        raise AttributeError(f"module 'irsurvey' has no attribute {name!r}")
    module, _, attribute = _HOMES[name].partition(":")
    return getattr(import_module(module), attribute)


def __dir__() -> list[str]:
    return sorted([*globals(), *_HOMES])
