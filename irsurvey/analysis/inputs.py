"""Inputs of a measurement as a report shows them: keys with units instead of SI names."""

from __future__ import annotations

from math import degrees, isfinite

from irsurvey.constants import ZERO_CELSIUS
from irsurvey.model import Input, Scene

_CELSIUS = ("_c", 1.0, -ZERO_CELSIUS)
_KELVIN = ("_k", 1.0, 0.0)
_PLAIN = ("", 1.0, 0.0)
_PERCENT = ("_percent", 100.0, 0.0)
_METRES = ("_m", 1.0, 0.0)

_SHOWN: dict[str, tuple[str, float, float]] = {
    "emissivity": _PLAIN,
    "reflected": _CELSIUS,
    "air": _CELSIUS,
    "relative_humidity": _PERCENT,
    "distance": _METRES,
    "pressure": ("_hpa", 0.01, 0.0),
    "atmosphere": ("_relative", 1.0, 0.0),
    "window_transmittance": _PLAIN,
    "window_reflectance": _PLAIN,
    "window_temperature": _CELSIUS,
    "window_ambient": _CELSIUS,
    "indoor_air": _CELSIUS,
    "outdoor_air": _CELSIUS,
    "ambient": _CELSIUS,
    "mean_radiant": _CELSIUS,
    "ground": _CELSIUS,
    "sky": _CELSIUS,
    "outdoor_24h_low": _CELSIUS,
    "outdoor_24h_high": _CELSIUS,
    "hours_since_sun": ("", 1 / 3600, 0.0),
    "hours_since_rain": ("", 1 / 3600, 0.0),
    "irradiance": ("_w_m2", 1.0, 0.0),
    "pressure_difference": ("_pa", 1.0, 0.0),
    "wind": ("_m_s", 1.0, 0.0),
    "convection": ("_factor", 1.0, 0.0),
    "camera_offset": _KELVIN,
    "camera_gain": _PLAIN,
    "ifov": ("_mrad", 1e3, 0.0),
    "view_angle": ("_deg", degrees(1.0), 0.0),
    "known_length": _METRES,
    "known_width": _METRES,
    "known_height": _METRES,
    "temperature": _CELSIUS,
    "load_exponent": _PLAIN,
}
"""Scene name → ending of its key, factor and shift to the unit shown."""


def inputs(scene: Scene) -> dict[str, Input]:
    """Inputs by key (`air_c`, `emissivity:cover plate`), in the order of the scene; noise terms are not inputs."""
    shown = {}
    for quantity in scene.quantities:
        base, _, owner = quantity.name.partition(":")
        if base == "noise" or not isfinite(quantity.value):
            continue
        ending, factor, shift = _SHOWN[base]
        key = f"{base}{ending}:{owner}" if owner else f"{base}{ending}"
        shown[key] = Input(quantity.value * factor + shift, quantity.u * factor, quantity.source)
    return shown
