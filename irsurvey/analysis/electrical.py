"""Numbers of an electrical part beyond its temperature, for many scenes at once: limits, wind, neighbours, its heat."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.exchange import Columns, total
from irsurvey.assess.limits import Limit
from irsurvey.assess.pv import LEAST_IRRADIANCE, STANDARD_IRRADIANCE, scaled
from irsurvey.assess.twins import load_factor
from irsurvey.heat.joint import excess_resistance, film_coefficient, power, voltage_drop, yearly_energy
from irsurvey.heat.wind import HIGHEST, wind_factor
from irsurvey.model import JointShape

Array = NDArray[np.float64]
Results = dict[str, Array]
"""Number → (n,) results in SI units."""

LEAST_WIND = 1.0
"""Wind [m s⁻¹] that rises are brought to: less cools no more than still air does."""


@dataclass(frozen=True, slots=True, eq=False)
class PartFacts:
    """What is known of one component besides its pixels; currents [A]."""

    limit: Limit | None = None
    load: float | None = None
    load_ratio: float | None = None  # over its rating
    shape: JointShape | None = None
    neighbours: tuple[str, ...] = ()  # PV: the modules it is held against


def beside(facts: PartFacts, hottest: Array, rise: Array, values: Columns) -> Results:
    """How far a part (n,) [K] is above its absolute limit, and its rise above what is allowed at this load.

    A rise is allowed in proportion to the load to the power of its exponent: neither a cool day nor wind buys it.
    """
    limit = facts.limit
    if limit is None:
        return {}
    results = {"above_limit": hottest - limit.t_max}
    if limit.rise is not None and facts.load_ratio is not None and "load_exponent" in values:
        allowed = limit.rise * load_factor(facts.load_ratio, values["load_exponent"][:, 0])
        results["above_allowed"] = rise - np.minimum(allowed, limit.rise)
    return results


def in_calm(rises: Mapping[str, Array], values: Columns) -> Results:
    """Rises (n,) [K] brought to 1 m/s of wind; nothing where there is not more of it."""
    if "wind" not in values:
        return {}
    held = np.minimum(values["wind"], HIGHEST)  # above it nothing is valid, and what was raised stays raised
    factor = np.asarray(wind_factor(held))[:, 0] * values["wind_factor"][:, 0]
    return {f"{name}_in_calm": rise * np.maximum(factor, 1.0) for name, rise in rises.items()}


def relative_difference(over_twin: Array, over_air: Array) -> Array:
    """What a part (n,) [K] is warmer than its twin at its own load, over its rise [percent]; NaN without a rise."""
    return np.asarray(100 * over_twin / np.where(over_air > 0, over_air, np.nan))


def over_neighbours(hottest: Array, neighbours: list[Array], values: Columns) -> Array:
    """Over the median of its neighbours (n,) [K], brought to 1000 W/m² where the sun was weaker.

    By no more than 600 W/m² allow (below it that is only a part of what it should be, and nothing is cleared), and as
    it reads where the irradiance was not recorded: a correction may raise, never lower.
    """
    over = hottest - np.median(np.stack(neighbours), axis=0)
    if "irradiance" not in values:
        return np.asarray(over)
    usable = np.clip(values["irradiance"][:, 0], LEAST_IRRADIANCE, STANDARD_IRRADIANCE)
    return np.where(over > 0, scaled(over, usable), over)


def heat_of(
    facts: PartFacts, t: Array, t_twin: Array | None, emissivity: str, around: tuple[str, str], values: Columns
) -> Results:
    """Heat of a joint (n,): its film, its power, and over its twin the excess and what that says of its resistance.

    t, t_twin (n,) [K] mean surface temperatures; `around` are the scene names of its air and what it faces.
    """
    shape = facts.shape
    if shape is None:
        return {}
    sizes = {"diameter": shape.diameter, "length": shape.length, "width": shape.width, "area": shape.area}
    t_air, t_faced = (values[name][:, 0] for name in around)
    epsilon = total(emissivity, values)[:, 0]
    wind = values["wind"][:, 0] if "wind" in values else None
    scale = values["convection"][:, 0]

    def given_off(surface: Array) -> Array:
        film = np.asarray(film_coefficient(shape.form, surface, t_air, wind=wind, **sizes))
        return np.asarray(power(shape.form, surface, t_air, t_faced, epsilon, wind=wind, film=film * scale, **sizes))

    results = {
        "film": np.asarray(film_coefficient(shape.form, t, t_air, wind=wind, **sizes)) * scale,
        "power": given_off(t),
    }
    if t_twin is None:
        return results
    results["excess_power"] = results["power"] - given_off(t_twin)
    if facts.load:
        resistance = np.asarray(excess_resistance(results["power"], given_off(t_twin), facts.load))
        results["excess_resistance"] = resistance * 1e6
        results["voltage_drop"] = np.asarray(voltage_drop(resistance, facts.load)) * 1e3
        results["yearly_loss"] = np.asarray(yearly_energy(results["excess_power"]))
    return results
