"""The scene of one frame: every scalar its measurement depends on, in SI units, with uncertainty and source."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from math import inf, pi

from irsurvey.model import Camera, Quantity
from irsurvey.survey import schema
from irsurvey.survey.defaults import defaults
from irsurvey.survey.levels import Stated
from irsurvey.survey.schema_electrical import Window
from irsurvey.survey.uncertainties import Uncertainties
from irsurvey.survey.units import si

Quantities = dict[str, Quantity]


@dataclass(frozen=True, slots=True)
class _Scalar:
    """One condition: its name in the scene, its keys of [uncertainty], its limits in SI units."""

    name: str
    uncertainty: tuple[str, ...]
    low: float = 0.0
    high: float = inf


CONDITIONS = {
    "air_c": _Scalar("air", ("air_k",)),
    "relative_humidity_percent": _Scalar("relative_humidity", ("relative_humidity_percent",), high=1.0),
    "pressure_hpa": _Scalar("pressure", ("pressure_hpa",)),
    "reflected_c": _Scalar("reflected", ("reflected_k",)),
    "distance_m": _Scalar("distance", ("distance_m", "distance_fraction")),
    "view_angle_deg": _Scalar("view_angle", ("view_angle_deg",), high=pi / 2),
    "tilt_deg": _Scalar("tilt", ("tilt_deg",), high=pi),
    "indoor_air_c": _Scalar("indoor_air", ("indoor_air_k",)),
    "outdoor_air_c": _Scalar("outdoor_air", ("outdoor_air_k",)),
    "indoor_relative_humidity_percent": _Scalar("indoor_humidity", ("indoor_relative_humidity_percent",), high=1.0),
    "outdoor_relative_humidity_percent": _Scalar("outdoor_humidity", ("outdoor_relative_humidity_percent",), high=1.0),
    "wind_m_s": _Scalar("wind", ("wind_m_s", "wind_fraction")),
    "ambient_c": _Scalar("ambient", ("ambient_k",)),
    "mean_radiant_c": _Scalar("mean_radiant", ("mean_radiant_k",)),
    "ground_c": _Scalar("ground", ("ground_k",)),
    "sky_c": _Scalar("sky", ("sky_k",)),
    "cloud_fraction": _Scalar("cloud", ("cloud_fraction",), high=1.0),
    "hours_since_sun": _Scalar("hours_since_sun", ("hours_since",)),
    "hours_since_rain": _Scalar("hours_since_rain", ("hours_since",)),
    "hours_difference_held": _Scalar("hours_difference_held", ("hours_since",)),
    "hours_steady": _Scalar("hours_steady", ("hours_since",)),
    "hours_furniture_clear": _Scalar("hours_furniture_clear", ("hours_since",)),
    "irradiance_w_m2": _Scalar("irradiance", ("irradiance_fraction",)),
    "pressure_pa": _Scalar("pressure_difference", ("pressure_pa",), low=-inf),
}
"""Conditions that are one number, by their keys of the survey file."""
_ASSUMED = ("relative_humidity_percent", "pressure_hpa", "view_angle_deg")
_OF_BUILDINGS = ("tilt_deg",)
_OF_A_WHOLE = ("cloud_fraction",)
"""Shares whose uncertainty is a share of the same whole, not one of the value."""

IMPERFECTIONS = {
    "shading": "shading_k",
    "shading_x": "shading_tilt_k",
    "shading_y": "shading_tilt_k",
    "outline": "outline_px",
    "size_of_source": "size_of_source_fraction",
}
"""What the camera adds to every picture → its key of [uncertainty]."""


def conditions(
    stated: Mapping[str, Stated], uncertainties: Uncertainties, *, is_roof: bool = False
) -> Iterator[Quantity]:
    """Quantities of [conditions], and of those among them that nobody stated but every measurement needs.

    `is_roof`: what is seen is looked down on, and level unless stated.
    """
    needed = _ASSUMED if uncertainties.surroundings == "electrical" else (*_ASSUMED, *_OF_BUILDINGS)
    for key, scalar in CONDITIONS.items():
        if key in stated:
            value, source, assumed = stated[key].value, stated[key].source, ""
        elif key in needed:
            assumed = "roof_tilt_deg" if key == "tilt_deg" and is_roof else key
            value, source = defaults("assumed")[assumed].value, "default"
        else:
            continue
        yield uncertainties.quantity(
            scalar.name,
            si(key, value),
            *scalar.uncertainty,
            source=source,
            low=scalar.low,
            high=scalar.high,
            assumed=assumed,
            relative_to=1.0 if key in _OF_A_WHOLE else None,
        )
    if "outdoor_24h_c" in stated:
        source = stated["outdoor_24h_c"].source
        for name, celsius in zip(("low", "high"), stated["outdoor_24h_c"].value, strict=True):
            value = si("outdoor_24h_c", celsius)
            yield uncertainties.quantity(f"outdoor_24h_{name}", value, "outdoor_24h_k", source=source, low=0.0)


def surroundings(scene: Quantities, sky_model_u: float | None, uncertainties: Uncertainties) -> Iterator[Quantity]:
    """What a surface exchanges heat with; where nobody stated it, the air nearby.

    `sky_model_u`: standard uncertainty of the sky model's temperature [K]; None: of a model that nobody knows.
    """
    at = uncertainties.surroundings
    nearby = scene.get({"inside": "indoor_air", "outside": "outdoor_air", "electrical": "ambient"}[at])
    if nearby is None:
        nearby = scene.get("air")
        if at == "electrical" and nearby is not None:
            nearby = _as(nearby, "ambient", "ambient_k", uncertainties)
            yield nearby
    if nearby is not None and "mean_radiant" not in scene:
        if at == "outside":
            yield from _outdoors(scene, nearby, sky_model_u, uncertainties)
        yield _as(nearby, "mean_radiant", "mean_radiant_k", uncertainties)
    yield uncertainties.quantity("convection", 1.0, "convection_fraction", low=0.0)
    yield uncertainties.quantity("atmosphere", 0.0, "atmosphere_fraction", low=-1.0, relative_to=1.0)


def window(
    stated: Window, source: str, air: Quantity | None, uncertainties: Uncertainties, *, is_ahead: bool = False
) -> Iterator[Quantity]:
    """An infrared window in the path; without its transmittance where frames are to measure that.

    `is_ahead`: before they are taken, when one is assumed.
    """
    tau, rho, key = stated.transmittance, stated.reflectance, "window_transmittance"
    if tau is not None:
        yield uncertainties.quantity(key, tau, key, source=source, low=0.001, high=max(1.0 - rho, tau))
    elif is_ahead:
        tau = max(min(defaults("assumed")[key].value, 1.0 - rho), 0.001)
        yield uncertainties.quantity(key, tau, key, low=0.001, high=max(1.0 - rho, tau), assumed=key)
    of, key = source if "reflectance" in stated.model_fields_set else "default", "window_reflectance"
    yield uncertainties.quantity(key, rho, key, source=of, low=0.0, high=max(1.0 - (tau or 0.0), rho))
    for name, key, celsius in (
        ("window_temperature", "window_k", stated.temperature_c),
        ("window_ambient", "window_ambient_k", stated.ambient_c),
    ):
        if celsius is not None:
            yield uncertainties.quantity(name, si("temperature_c", celsius), key, source=source, low=0.0)
        elif air is not None:
            yield _as(air, name, key, uncertainties)


def scale(frame: schema.Frame, camera: Camera, uncertainties: Uncertainties) -> Iterator[Quantity]:
    """What turns pixels into metres."""
    keys = "known_length_m", "known_length_fraction"
    lengths = {}
    if frame.known_length is not None:
        lengths = {"known_length": frame.known_length.metres}
    if frame.known_rectangle is not None:
        lengths = {"known_width": frame.known_rectangle.width_m, "known_height": frame.known_rectangle.height_m}
    for name, metres in lengths.items():
        yield uncertainties.quantity(name, metres, *keys, source="frame", low=0.0)
    if camera.ifov is not None:
        yield uncertainties.quantity("ifov", camera.ifov, "ifov_fraction", source="survey", low=0.0)


def element(u_value: float | None, uncertainties: Uncertainties) -> Iterator[Quantity]:
    """What is stated about the building element that a frame shows: its U-value [W m⁻² K⁻¹]."""
    if u_value is not None:
        yield uncertainties.quantity("u_value", u_value, "u_value_fraction", source="survey", low=0.0)


def imperfections(uncertainties: Uncertainties) -> Iterator[Quantity]:
    """What the camera does to every picture that nothing corrects: its best value is 0, and its uncertainty counts."""
    for name, key in IMPERFECTIONS.items():
        yield uncertainties.quantity(name, 0.0, key, source=uncertainties.source(key), relative_to=1.0)


def _outdoors(
    scene: Quantities, air: Quantity, sky_model_u: float | None, uncertainties: Uncertainties
) -> Iterator[Quantity]:
    """What a face sees outside where its mean radiant temperature was not stated: the ground, and a sky to be modelled.

    `sky_model` is what the model may be off, 0 ± u [K]."""
    if "ground" not in scene:
        yield _as(air, "ground", "ground_k", uncertainties)
    if "sky" in scene:
        return
    if "cloud" not in scene:
        value, key = defaults("assumed")["cloud_fraction"].value, "cloud_fraction"
        yield uncertainties.quantity("cloud", value, key, low=0.0, high=1.0, assumed=key, relative_to=1.0)
    if sky_model_u is not None:
        error = uncertainties.quantity("sky_model", 0.0, "sky_model_k", source=uncertainties.source("sky_model_k"))
        yield error if "sky_model_k" in uncertainties.stated else replace(error, u=sky_model_u)


def _as(leader: Quantity, name: str, key: str, uncertainties: Uncertainties) -> Quantity:
    """A temperature nobody stated, taken from `leader`: it moves with that, and may be off by something of its own."""
    return uncertainties.quantity(name, leader.value, key, low=0.0, assumed=key, follows=leader.name)
