"""Inputs of a measurement as a report shows them: keys with units instead of SI names."""

from __future__ import annotations

from math import degrees, inf, isfinite

from irsurvey.constants import ZERO_CELSIUS
from irsurvey.model import Input, Quantity, Scene

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
    "total_emissivity": _PLAIN,
    "indoor_humidity": _PERCENT,
    "outdoor_humidity": _PERCENT,
    "cloud": _PLAIN,
    "tilt": ("_deg", degrees(1.0), 0.0),
    "sky_model": _KELVIN,
    "u_value": ("_w_m2k", 1.0, 0.0),
    "hours_difference_held": ("", 1 / 3600, 0.0),
    "hours_steady": ("", 1 / 3600, 0.0),
    "hours_furniture_clear": ("", 1 / 3600, 0.0),
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
    "wind_factor": _PLAIN,
    "shading": _KELVIN,
    "shading_x": _KELVIN,
    "shading_y": _KELVIN,
    "size_of_source": _PLAIN,
    "selection": _PLAIN,
    "noise": _KELVIN,
    "outline": ("_px", 1.0, 0.0),
    "slope_x": ("_k_per_px", 1.0, 0.0),
    "slope_y": ("_k_per_px", 1.0, 0.0),
}
"""Scene name → ending of its key, factor and shift to the unit shown."""


_BY_KEY = {name + ending: name for name, (ending, _, _) in _SHOWN.items()}
_ENDS = {
    "emissivity": (0.0, 1.0),
    "total_emissivity": (0.0, 1.0),
    "indoor_humidity": (0.0, 1.0),
    "outdoor_humidity": (0.0, 1.0),
    "cloud": (0.0, 1.0),
    "u_value": (0.0, inf),
    "relative_humidity": (0.0, 1.0),
    "window_transmittance": (0.0, 1.0),
    "window_reflectance": (0.0, 1.0),
    "distance": (0.0, inf),
    "wind": (0.0, inf),
    "convection": (0.0, inf),
    "ifov": (0.0, inf),
}

_OF_AREAS = ("noise", "outline", "slope_x", "slope_y", "selection")
"""What belongs to the areas of a frame and not to its inputs."""


def inputs(scene: Scene) -> dict[str, Input]:
    """Inputs by key (`air_c`, `emissivity:cover plate`), in the order of the scene."""
    return {
        shown(quantity.name)[0]: Input(in_unit(quantity.name, quantity.value), *_spread(quantity))
        for quantity in scene.quantities
        if quantity.name.partition(":")[0] not in _OF_AREAS and isfinite(quantity.value)
    }


def shown(name: str) -> tuple[str, float]:
    """Key of a scene name, and how many of the key's units one SI unit is: `air` → ("air_c", 1)."""
    base, _, owner = name.partition(":")
    ending, factor, _ = _SHOWN[base]
    return (f"{base}{ending}:{owner}" if owner else f"{base}{ending}"), factor


def named(key: str) -> str:
    """The scene name behind a key: "air_c" → `air`."""
    base, _, owner = key.partition(":")
    name = _BY_KEY[base]
    return f"{name}:{owner}" if owner else name


def domain(name: str) -> tuple[float, float]:
    """Least and greatest value [SI] an input can have."""
    return _ENDS.get(name.partition(":")[0], (-inf, inf))


def in_unit(name: str, value: float) -> float:
    """A value in the unit its key ends in."""
    _, factor, shift = _SHOWN[name.partition(":")[0]]
    return value * factor + shift


def in_si(name: str, value: float) -> float:
    """A value in the unit of its key, in SI units."""
    _, factor, shift = _SHOWN[name.partition(":")[0]]
    return (value - shift) / factor


def _spread(quantity: Quantity) -> tuple[float, str, str]:
    return quantity.u * shown(quantity.name)[1], quantity.source, quantity.u_source
