"""Numbers of a building envelope for many scenes at once: U-values, temperature factors, moisture."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.exchange import Columns, Surroundings, film_and_environment, total
from irsurvey.assess.building import factor_at_resistance, temperature_factor
from irsurvey.heat.envelope import (
    conventional_resistance,
    film_resistance,
    heat_flow_direction,
    u_value,
    u_value_simple,
)
from irsurvey.heat.humid_air import dew_point_of, vapour_pressure
from irsurvey.heat.moisture import MOULD_HUMIDITY, surface_temperature_at, vapour_pressure_of_class
from irsurvey.heat.radiation import radiative_coefficient

Array = NDArray[np.float64]
Results = dict[str, Array]
"""Number → (n,) results in SI units."""

INSIDE_CONVECTION = {"horizontal": 2.5, "up": 5.0, "down": 0.7}
"""The convective part of the conventional inner film [W m⁻² K⁻¹], by the direction of heat flow (ISO 6946)."""
LIMIT_RESISTANCE = 0.25
"""Inner film resistance [m² K W⁻¹] that limits on temperature factors assume (ISO 13788, ISO 10211)."""


@dataclass(frozen=True, slots=True)
class Air:
    """Scene names of the air on both sides of an envelope."""

    indoor: str
    outdoor: str

    def difference(self, values: Columns) -> Array:
        """|T_i − T_e| (n,) [K], NaN where there is none."""
        difference = np.abs(values[self.indoor] - values[self.outdoor])[:, 0]
        return np.where(difference > 0, difference, np.nan)


@dataclass(frozen=True, slots=True)
class Humidity:
    """Where the humidity of the room air comes from: scene name of one measured, or a class and the outdoor air's."""

    indoor_air: str
    relative: str
    outdoor_air: str | None = None
    humidity_class: int | None = None

    def vapour_pressure(self, values: Columns) -> Array:
        """Vapour pressure of the room air (n, 1) [Pa]."""
        if self.humidity_class is None or self.outdoor_air is None:
            return np.asarray(vapour_pressure(values[self.indoor_air], values[self.relative]))
        return np.asarray(
            vapour_pressure_of_class(self.humidity_class, values[self.outdoor_air], values[self.relative])
        )


def of_reference(t: Array, flux: Array, emissivity: str, around: Surroundings, values: Columns, air: Air) -> Results:
    """The undisturbed wall: its film resistance, and its U-value in two ways.  t (n, 1) [K], flux (n,)."""
    coefficient, environment = film_and_environment(t, emissivity, around, values)
    other = values[around.other_air or air.outdoor]
    simple = u_value_simple(t, values[around.air], other, _resistance(t, emissivity, around, values))
    return {
        "film_resistance": 1 / coefficient[:, 0],
        "u_value": np.asarray(u_value(flux, environment[:, 0], other[:, 0])),
        "u_value_simple": np.asarray(simple)[:, 0],
    }


def of_region(
    t: Array, flux: Array, reference_flux: Array, emissivity: str, around: Surroundings, values: Columns, air: Air
) -> Results:
    """A deviating region: its own U-value and how much it is higher.  t (n, 1) [K] mean, fluxes (n,)."""
    _, environment = film_and_environment(t, emissivity, around, values)
    other = values[around.other_air or air.outdoor][:, 0]
    increase = np.asarray(u_value(flux - reference_flux, environment[:, 0], other))
    results = {"u_value": np.asarray(u_value(flux, environment[:, 0], other)), "u_value_increase": increase}
    if "u_value" in values:
        results["u_value_from_contrast"] = values["u_value"][:, 0] + increase
    return results


def factors(t: Array, emissivity: str, around: Surroundings, values: Columns, air: Air) -> Results:
    """Temperature factor at a place of the inner surface, as seen and at the film resistance limits assume.

    t (n, 1) [K].  Converting keeps the rest of the wall."""
    factor = np.asarray(temperature_factor(t, values[air.indoor], values[air.outdoor]))[:, 0]
    converted = factor_at_limit(t, emissivity, around, values, air)[:, 0]
    return {"temperature_factor": factor, "temperature_factor_at_limit": converted}


def factor_at_limit(t: Array, emissivity: str, around: Surroundings, values: Columns, air: Air) -> Array:
    """Temperature factor (n, v) of surface temperatures (n, v) [K] at the film resistance that limits assume."""
    factor = temperature_factor(t, values[air.indoor], values[air.outdoor])
    coefficient, _ = film_and_environment(t, emissivity, around, values)
    return np.asarray(factor_at_resistance(factor, 1 / coefficient, LIMIT_RESISTANCE))


def room(humidity: Humidity, values: Columns) -> Results:
    """What the room air asks of the surfaces around it."""
    pressure = humidity.vapour_pressure(values)[:, 0]
    return {
        "vapour_pressure": pressure,
        "dew_point": np.asarray(dew_point_of(pressure)),
        "mould_surface": np.asarray(surface_temperature_at(pressure, MOULD_HUMIDITY)),
    }


def margins(t: Array, humidity: Humidity, values: Columns) -> Results:
    """How far a surface (n,) [K] is above what the room air asks for."""
    needed = room(humidity, values)
    return {"dew_point_margin": t - needed["dew_point"], "mould_margin": t - needed["mould_surface"]}


def _resistance(t: Array, emissivity: str, around: Surroundings, values: Columns) -> Array:
    """Film resistance of the simple form: conventional inside, with the wind and calm radiation to the air outside."""
    if around.viewed_from == "inside":
        tilt = float(np.asarray(values.get("tilt", np.pi / 2)).flat[0])
        direction = heat_flow_direction(tilt, around.viewed_from, around.sign < 0)
        conventional = 1 / conventional_resistance("inside", direction)
        return np.asarray(1 / (conventional + INSIDE_CONVECTION[direction] * (values["convection"] - 1)))
    radiative = radiative_coefficient(t, values[around.air], total(emissivity, values))
    return np.asarray(film_resistance((4 + 4 * values["wind"]) * values["convection"], radiative))
