"""The scene of one frame: every scalar its measurement depends on, in SI units, with uncertainty and source."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from math import inf, pi

from irsurvey.model import Camera, Quantity
from irsurvey.survey import schema
from irsurvey.survey.defaults import defaults
from irsurvey.survey.levels import Stated
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


_CONDITIONS = {
    "air_c": _Scalar("air", ("air_k",)),
    "relative_humidity_percent": _Scalar("relative_humidity", ("relative_humidity_percent",), high=1.0),
    "pressure_hpa": _Scalar("pressure", ("pressure_hpa",)),
    "reflected_c": _Scalar("reflected", ("reflected_k",)),
    "distance_m": _Scalar("distance", ("distance_m", "distance_fraction")),
    "view_angle_deg": _Scalar("view_angle", ("view_angle_deg",), high=pi / 2),
    "indoor_air_c": _Scalar("indoor_air", ("indoor_air_k",)),
    "outdoor_air_c": _Scalar("outdoor_air", ("outdoor_air_k",)),
    "wind_m_s": _Scalar("wind", ("wind_m_s", "wind_fraction")),
    "ambient_c": _Scalar("ambient", ("ambient_k",)),
    "mean_radiant_c": _Scalar("mean_radiant", ("mean_radiant_k",)),
    "ground_c": _Scalar("ground", ("ground_k",)),
    "sky_c": _Scalar("sky", ("sky_k",)),
    "hours_since_sun": _Scalar("hours_since_sun", ("hours_since",)),
    "hours_since_rain": _Scalar("hours_since_rain", ("hours_since",)),
    "irradiance_w_m2": _Scalar("irradiance", ("irradiance_fraction",)),
    "pressure_pa": _Scalar("pressure_difference", ("pressure_pa",), low=-inf),
}
_ASSUMED = ("relative_humidity_percent", "pressure_hpa", "view_angle_deg")


def conditions(stated: Mapping[str, Stated], uncertainties: Uncertainties) -> Iterator[Quantity]:
    """Quantities of [conditions], and of those among them that nobody stated but every measurement needs."""
    for key, scalar in _CONDITIONS.items():
        if key in stated:
            value = si(key, stated[key].value)
            u = uncertainties.of(value, *scalar.uncertainty)
            yield Quantity(scalar.name, value, u, stated[key].source, scalar.low, scalar.high)
        elif key in _ASSUMED:
            value = si(key, defaults("assumed")[key].value)
            u = uncertainties.of(value, *scalar.uncertainty, assumed=key)
            yield Quantity(scalar.name, value, u, "default", scalar.low, scalar.high)
    if "outdoor_24h_c" in stated:
        for name, celsius in zip(("low", "high"), stated["outdoor_24h_c"].value, strict=True):
            value = si("outdoor_24h_c", celsius)
            u = uncertainties.of(value, "outdoor_24h_k")
            yield Quantity(f"outdoor_24h_{name}", value, u, stated["outdoor_24h_c"].source, 0.0)


def surroundings(scene: Quantities, uncertainties: Uncertainties) -> Iterator[Quantity]:
    """What a surface exchanges heat with, where nobody stated it: the air, further off than a stated value."""
    at = uncertainties.surroundings
    air = scene.get("air")
    if at == "electrical" and air is not None and "ambient" not in scene:
        air = Quantity("ambient", air.value, uncertainties.of(air.value, "ambient_k", assumed="ambient_k"), low=0.0)
        yield air
    nearby = scene.get({"inside": "indoor_air", "outside": "outdoor_air", "electrical": "ambient"}[at], air)
    if nearby is not None and "mean_radiant" not in scene:
        u = uncertainties.of(nearby.value, "mean_radiant_k", assumed="mean_radiant_k")
        yield Quantity("mean_radiant", nearby.value, u, low=0.0)
    yield Quantity("convection", 1.0, uncertainties.of(1.0, "convection_fraction"), low=0.0)
    yield Quantity("atmosphere", 0.0, uncertainties.of(1.0, "atmosphere_fraction"), low=-1.0)


def window(
    stated: schema.Window, source: str, air: Quantity | None, uncertainties: Uncertainties
) -> Iterator[Quantity]:
    """An infrared window in the path."""
    of, tau, rho = uncertainties.of, stated.transmittance, stated.reflectance
    u_tau, u_rho = of(tau, "window_transmittance"), of(rho, "window_reflectance")
    yield Quantity("window_transmittance", tau, u_tau, source, 0.001, max(1.0 - rho, tau))
    is_stated = "reflectance" in stated.model_fields_set
    yield Quantity("window_reflectance", rho, u_rho, source if is_stated else "default", 0.0, max(1.0 - tau, rho))
    for name, key, celsius in (
        ("window_temperature", "window_k", stated.temperature_c),
        ("window_ambient", "window_ambient_k", stated.ambient_c),
    ):
        if celsius is not None:
            value = si("temperature_c", celsius)
            yield Quantity(name, value, of(value, key), source, 0.0)
        elif air is not None:
            yield Quantity(name, air.value, of(air.value, key, assumed=key), low=0.0)


def scale(frame: schema.Frame, camera: Camera, uncertainties: Uncertainties) -> Iterator[Quantity]:
    """What turns pixels into metres."""
    keys = "known_length_m", "known_length_fraction"
    lengths = {}
    if frame.known_length is not None:
        lengths = {"known_length": frame.known_length.metres}
    if frame.known_rectangle is not None:
        lengths = {"known_width": frame.known_rectangle.width_m, "known_height": frame.known_rectangle.height_m}
    for name, metres in lengths.items():
        yield Quantity(name, metres, uncertainties.of(metres, *keys), "frame", 0.0)
    if camera.ifov is not None:
        yield Quantity("ifov", camera.ifov, uncertainties.of(camera.ifov, "ifov_fraction"), "survey", 0.0)
