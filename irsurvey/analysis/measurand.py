"""Every reported number of a frame as one function of its scene.

Masks, reference pixels and spot positions are fixed by the nominal run; an area is a weighted histogram of
stored values, so thousands of scenes cost no more than a few hundred values each.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.correction import Corrected, Optics, air_path
from irsurvey.assess.building import temperature_factor
from irsurvey.assess.electrical import load_factor, similar_rise
from irsurvey.geometry.footprint import pixel_area
from irsurvey.heat.convection import film_coefficient
from irsurvey.heat.surface import surface_flux
from irsurvey.model import Scene
from irsurvey.radiometry.measurement import object_temperature

_NODES = 200
"""Values an area is merged to: over 20 K a tenth apart, where the curvature of T(T_app) moves a mean by < 10 µK."""

Columns = Mapping[str, Any]
"""Scene values by name, arrays (n, 1) of float64: n scenes."""
Numbers = dict[tuple[str, str], NDArray[np.float64]]
"""(region, number) → (n,) results in SI units; region "" is the frame itself."""


@dataclass(frozen=True, slots=True, eq=False)
class Part:
    """Pixels of one area under one optics: apparent temperatures (v,) [K], weights (f, v) of f linear functionals."""

    optics: Optics
    apparent: NDArray[np.float64]
    weights: NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Area:
    """The pixels a set of numbers comes from.

    `shifts`: what else moves its apparent temperature as a whole, (scene name, kelvin per unit of it): its own noise,
    lens shading where it lies, its outline, contrast that blur may have taken, picking the extreme.
    """

    parts: tuple[Part, ...]
    shifts: tuple[tuple[str, float], ...] = ()

    def shift(self, values: Columns) -> NDArray[np.float64]:
        """Sum of the shifts (n, 1) [K]."""
        return np.asarray(sum((values[name] * factor for name, factor in self.shifts), np.zeros((1, 1))))


@dataclass(frozen=True, slots=True, eq=False)
class Region:
    """An anomaly or component: its measurement spot, the whole of it, and its extent.

    The levers [px] are what the slopes of the reference plane are multiplied by at their places; `extent` is the
    number of pixels or, with a known rectangle, the share of that rectangle it covers; it changes by `rim` per
    pixel that its outline (a scene name) moves.
    """

    name: str
    spot: Area
    whole: Area
    spot_lever: tuple[float, float]
    whole_lever: tuple[float, float]
    extent: float
    rim: float = 0.0
    outline: str | None = None


@dataclass(frozen=True, slots=True)
class Twin:
    """The component another is compared with, and the other's load over the twin's (1: compared as they are)."""

    name: str
    load_ratio: float


@dataclass(frozen=True, slots=True)
class Surroundings:
    """The scene values a surface exchanges heat with, and how.

    `sign` is +1 where heat that leaves the surface seen leaves the heated space or the component.
    """

    air: str
    radiant: str
    sign: float
    convection: str
    height: float
    viewed_from: str | None


@dataclass(frozen=True, slots=True, eq=False)
class Plan:
    """What is measured in a frame: its areas, fixed, and how their numbers are made."""

    band: tuple[float, float]
    pivot: float
    surroundings: Surroundings
    scale: str  # how pixels become m²: "ifov" | "known_length" | "known_rectangle" | "none"
    length_pixels: float = 1.0  # of the known length
    reference: Area | None = None
    tilts: tuple[tuple[str, float, float], ...] = ()  # what else tilts its plane: scene name, K px⁻¹ per unit, x and y
    regions: tuple[Region, ...] = ()
    components: tuple[Region, ...] = ()
    twins: Mapping[str, Twin] = field(default_factory=dict)
    ambient: str = "air"
    factor_between: tuple[str, str] | None = None  # indoor and outdoor air, where a temperature factor exists


def area(
    corrected: Corrected,
    rows: NDArray[np.intp],
    columns: NDArray[np.intp],
    weights: NDArray[np.float64] | None = None,
) -> Area:
    """The area of these pixels: distinct stored values by optics, their weights summed.

    weights (f, n); None: one functional, the mean.  Pixels that cannot be measured must not be among them.
    """
    share = np.full((1, rows.size), 1 / max(rows.size, 1)) if weights is None else weights
    optics = corrected.optics[rows, columns]
    codes = corrected.codes.codes[rows, columns].astype(np.intp) - corrected.codes.lowest
    parts = []
    for index in np.flatnonzero(np.bincount(optics)):
        here = optics == index
        apparent, merged = _histogram(codes[here], share[:, here], corrected.apparent)
        parts.append(Part(corrected.optics_names[index], apparent, merged))
    return Area(tuple(parts))


def measure(plan: Plan, values: Columns) -> Numbers:
    """All numbers of a frame for n scenes, SI units, NaN where there is no solution."""
    temperatures = _Temperatures(plan, values)
    numbers: Numbers = {}
    reference = temperatures.functionals(plan.reference) if plan.reference else None
    if plan.reference and reference is not None:
        numbers |= _reference(plan, values, reference, plan.reference.parts[0].optics)
    per_pixel = _area_per_extent(plan, values)
    for region in plan.regions:
        if reference is None:
            continue
        numbers |= _anomaly(region, plan, values, temperatures, reference, per_pixel)
    spots = {region.name: temperatures.functionals(region.spot)[:, 0] for region in plan.components}
    for region in plan.components:
        numbers |= _component(region, plan, values, temperatures, spots)
    return numbers


def stacked(plan: Plan, values: Columns) -> NDArray[np.float64]:
    """The results of `measure` as (n, m), in its order: the model that uncertainty is propagated through."""
    rows = next(iter(values.values())).shape[0]
    numbers = [np.broadcast_to(number, (rows,)) for number in measure(plan, values).values()]
    return np.stack(numbers, axis=1) if numbers else np.empty((rows, 0))


def flux_of(t: NDArray[np.float64], optics: Optics, around: Surroundings, values: Columns) -> NDArray[np.float64]:
    """Heat flux [W m⁻²] of surface temperatures [K], positive out of the heated space or the component."""
    t_air = values[around.air]
    film = values["convection"] * film_coefficient(
        around.convection,
        t,
        t_air,
        height=around.height,
        wind=values.get("wind", np.nan),
        viewed_from=around.viewed_from,
    )
    return np.asarray(around.sign * surface_flux(t, t_air, values[around.radiant], values[optics[0]], film))


def names(plan: Plan, scene: Scene) -> tuple[tuple[str, str], ...]:
    """(region, number) of each result of `stacked`."""
    return tuple(measure(plan, {name: np.full((1, 1), value) for name, value in scene.values().items()}))


class _Temperatures:
    """Object temperatures of all areas for n scenes, solved once per optics."""

    def __init__(self, plan: Plan, values: Columns) -> None:
        areas = [plan.reference] if plan.reference else []
        areas += [member for region in (*plan.regions, *plan.components) for member in (region.spot, region.whole)]
        path = air_path(values)
        by_optics: dict[Optics, list[tuple[Area, Part]]] = {}
        for member in areas:
            for part in member.parts:
                by_optics.setdefault(part.optics, []).append((member, part))
        self._solved: dict[int, NDArray[np.float64]] = {}
        for (emissivity, reflected), members in by_optics.items():
            apparent = np.concatenate(
                [
                    part.apparent + values["camera_gain"] * (part.apparent - plan.pivot) + owner.shift(values)
                    for owner, part in members
                ],
                axis=1,
            )
            t = object_temperature(
                apparent + values["camera_offset"], values[emissivity], values[reflected], path, plan.band
            )
            start = 0
            for _, part in members:
                self._solved[id(part)] = t[:, start : start + part.apparent.size]
                start += part.apparent.size

    def of(self, part: Part) -> NDArray[np.float64]:
        """Object temperatures (n, v) [K] of one part."""
        return self._solved[id(part)]

    def functionals(self, member: Area) -> NDArray[np.float64]:
        """The area's linear functionals of its temperatures, (n, f) [K]."""
        return np.asarray(sum(self.of(part) @ part.weights.T for part in member.parts))


def _reference(plan: Plan, values: Columns, reference: NDArray[np.float64], optics: Optics) -> Numbers:
    """The reference area by itself: level, heat flux, and U where both air temperatures are known."""
    flux = flux_of(reference[:, :1], optics, plan.surroundings, values)[:, 0]
    results = {"reference": reference[:, 0], "reference_flux": flux}
    if plan.factor_between:
        indoor, outdoor = (values[name][:, 0] for name in plan.factor_between)
        results["u_value"] = flux / np.where(indoor == outdoor, np.nan, np.abs(indoor - outdoor))
    return {("", name): number for name, number in results.items()}


def _anomaly(
    region: Region,
    plan: Plan,
    values: Columns,
    temperatures: _Temperatures,
    reference: NDArray[np.float64],
    per_pixel: NDArray[np.float64] | None,
) -> Numbers:
    extreme = temperatures.functionals(region.spot)[:, 0]
    mean = temperatures.functionals(region.whole)[:, 0]
    levers = (region.spot_lever, region.whole_lever)
    at_spot, at_centre = (_reference_at(plan, values, reference, lever) for lever in levers)
    flux = _mean_flux(region.whole, plan, values, temperatures)
    optics = region.whole.parts[0].optics
    reference_flux = flux_of(at_centre[:, None], optics, plan.surroundings, values)[:, 0]
    results = {
        "extreme": extreme,
        "mean": mean,
        "delta": extreme - at_spot,
        "mean_delta": mean - at_centre,
        "flux": flux,
        "reference_flux": reference_flux,
        "excess_flux": flux - reference_flux,
    }
    if per_pixel is not None:
        grown = 0.0 if region.outline is None else values[region.outline][:, 0] * region.rim
        results["area"] = per_pixel * np.maximum(region.extent + grown, 0)
        results["excess_heat"] = (flux - reference_flux) * results["area"]
    if plan.factor_between:
        indoor, outdoor = (values[name][:, 0] for name in plan.factor_between)
        results["temperature_factor"] = np.asarray(temperature_factor(extreme, indoor, outdoor))
    return {(region.name, name): number for name, number in results.items()}


def _component(
    region: Region,
    plan: Plan,
    values: Columns,
    temperatures: _Temperatures,
    spots: Mapping[str, NDArray[np.float64]],
) -> Numbers:
    hottest, ambient = spots[region.name], values[plan.ambient][:, 0]
    results = {
        "max": hottest,
        "mean": temperatures.functionals(region.whole)[:, 0],
        "delta_ambient": hottest - ambient,
        "flux": _mean_flux(region.whole, plan, values, temperatures),
    }
    twin = plan.twins.get(region.name)
    if twin is not None:
        factor = load_factor(twin.load_ratio, values["load_exponent"][:, 0]) if twin.load_ratio != 1 else 1.0
        results["delta_similar"] = similar_rise(hottest, spots[twin.name], ambient, factor)
    return {(region.name, name): number for name, number in results.items()}


def _reference_at(
    plan: Plan, values: Columns, reference: NDArray[np.float64], lever: tuple[float, float]
) -> NDArray[np.float64]:
    """Reference temperature (n,) at a place: level and slopes, with what tilts the plane."""
    slope_x, slope_y = reference[:, 1], reference[:, 2]
    for name, along_x, along_y in plan.tilts:
        slope_x, slope_y = slope_x + values[name][:, 0] * along_x, slope_y + values[name][:, 0] * along_y
    return np.asarray(reference[:, 0] + slope_x * lever[0] + slope_y * lever[1])


def _mean_flux(member: Area, plan: Plan, values: Columns, temperatures: _Temperatures) -> NDArray[np.float64]:
    return np.asarray(
        sum(
            (flux_of(temperatures.of(part), part.optics, plan.surroundings, values) * part.weights[0]).sum(axis=1)
            for part in member.parts
        )
    )


def _area_per_extent(plan: Plan, values: Columns) -> NDArray[np.float64] | None:
    """Area [m²] (n,) that one unit of a region's extent stands for; None without a scale."""
    if plan.scale == "ifov":
        return np.asarray(pixel_area(values["distance"], values["ifov"], values["view_angle"]))[:, 0]
    if plan.scale == "known_length":
        return np.asarray((values["known_length"][:, 0] / plan.length_pixels) ** 2)
    if plan.scale == "known_rectangle":
        return np.asarray(values["known_width"][:, 0] * values["known_height"][:, 0])
    return None


def _histogram(
    codes: NDArray[np.intp], weights: NDArray[np.float64], apparent: NDArray[np.float64]
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """At most `_NODES` apparent temperatures (v,) and the weights (f, v) they carry for these pixels.

    Where there are more distinct values than nodes, a pixel's weight is shared by its two neighbouring nodes in
    proportion: any functional of a temperature linear between nodes is then exact, whatever the signs of the weights.
    """
    lowest = int(codes.min())
    span = int(codes.max()) - lowest
    if span < _NODES:
        counts = np.bincount(codes - lowest)
        filled = counts > 0
        merged = np.stack([np.bincount(codes - lowest, row)[filled] for row in weights]).astype(np.float64)
        return apparent[lowest + np.flatnonzero(filled)], merged
    x = apparent[codes]
    if x.min() == x.max():  # all beyond the range: many codes, one bound
        return x[:1], weights.sum(axis=1, keepdims=True)
    nodes = np.linspace(x.min(), x.max(), _NODES)
    place = (x - nodes[0]) / (nodes[1] - nodes[0])
    left = np.minimum(place.astype(np.intp), _NODES - 2)
    right_share = place - left
    merged = np.stack(
        [
            np.bincount(left, row * (1 - right_share), _NODES) + np.bincount(left + 1, row * right_share, _NODES)
            for row in weights
        ]
    ).astype(np.float64)
    return nodes, merged
