"""Every reported number of a frame as one function of its scene.

Masks, reference pixels and spot positions are fixed by the nominal run; an area is a weighted histogram of
stored values, so thousands of scenes cost no more than a few hundred values each.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis import electrical, envelope
from irsurvey.analysis.correction import Corrected, Optics, air_path
from irsurvey.analysis.electrical import PartFacts
from irsurvey.analysis.envelope import Air, Humidity
from irsurvey.analysis.exchange import Columns, Surroundings, flux_of, terms_of
from irsurvey.assess.twins import load_factor, similar_rise
from irsurvey.geometry.footprint import pixel_area
from irsurvey.heat.bridge import incidence_factor, linear_transmittance
from irsurvey.model import Scene
from irsurvey.radiometry.measurement import object_temperature

_NODES = 200
"""Values an area is merged to: over 20 K a tenth apart, where the curvature of T(T_app) moves a mean by < 10 µK."""

Numbers = dict[tuple[str, str], NDArray[np.float64]]
"""(region, number) → (n,) results in SI units; region "" is the frame itself."""
FLUX_TERM, STRIP = "flux:", "strip "
"""Before the names of the parts of a heat flux, and of the strips among the regions."""


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


@dataclass(frozen=True, slots=True, eq=False)
class Bridge:
    """A strip across a thermal bridge: all of it, where it is coldest, and its ends, where the wall is undisturbed.

    `span`: its length in pixels or, with a known rectangle, across and down as shares of that rectangle.
    """

    name: str
    whole: Area
    spot: Area
    undisturbed: Area
    span: tuple[float, float]


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
    facts: Mapping[str, PartFacts] = field(default_factory=dict)  # of components, by name
    is_windy: bool = False  # components stand in more wind than rises are brought to
    ambient: str = "air"
    bridges: tuple[Bridge, ...] = ()
    air: Air | None = None  # on both sides of an envelope, where both are recorded
    humidity: Humidity | None = None  # of the room air, seen from inside


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
            numbers |= _bound(region, values, temperatures, per_pixel)
        else:
            numbers |= _anomaly(region, plan, values, temperatures, reference, per_pixel)
    spots = {region.name: temperatures.functionals(region.spot)[:, 0] for region in plan.components}
    for region in plan.components:
        numbers |= _component(region, plan, values, temperatures, spots)
    for bridge in plan.bridges:
        numbers |= _bridge(bridge, plan, values, temperatures, per_pixel)
    if plan.humidity:
        numbers |= _named("", envelope.room(plan.humidity, values))
    return numbers


def stacked(plan: Plan, values: Columns) -> NDArray[np.float64]:
    """The results of `measure` as (n, m), in its order: the model that uncertainty is propagated through."""
    rows = next(iter(values.values())).shape[0]
    numbers = [np.broadcast_to(number, (rows,)) for number in measure(plan, values).values()]
    return np.stack(numbers, axis=1) if numbers else np.empty((rows, 0))


def names(plan: Plan, scene: Scene) -> tuple[tuple[str, str], ...]:
    """(region, number) of each result of `stacked`."""
    return tuple(measure(plan, {name: np.full((1, 1), value) for name, value in scene.values().items()}))


def reach(plan: Plan, numbers: Sequence[tuple[str, str]]) -> dict[str, list[int]]:
    """Names of a scene that move the numbers of one anomaly alone, the noise of its pixels and its outline → where
    these stand among the results `numbers`."""
    of_region: dict[str, list[int]] = {}
    for place, (region, _) in enumerate(numbers):
        of_region.setdefault(region, []).append(place)
    return {
        name: of_region[region.name]
        for region in plan.regions
        for name in (region.outline, *(shift for one in (region.spot, region.whole) for shift, _ in one.shifts))
        if name and name.partition(":")[0] in ("noise", "outline")
    }


class _Temperatures:
    """Object temperatures of all areas for n scenes, solved once per optics."""

    def __init__(self, plan: Plan, values: Columns) -> None:
        areas = [plan.reference] if plan.reference else []
        areas += [member for region in (*plan.regions, *plan.components) for member in (region.spot, region.whole)]
        areas += [member for bridge in plan.bridges for member in (bridge.whole, bridge.spot, bridge.undisturbed)]
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
    """The reference area by itself: level, heat flux and what takes it, and U where both air temperatures are known."""
    level = reference[:, :1]
    terms = terms_of(level, optics[0], plan.surroundings, values)
    flux = np.asarray(sum(terms.values()))[:, 0]
    results = {"reference": reference[:, 0], "reference_flux": flux}
    results |= {f"{FLUX_TERM}{name}": np.asarray(term)[:, 0] for name, term in terms.items()}
    if plan.air:
        results |= envelope.of_reference(level, flux, optics[0], plan.surroundings, values, plan.air)
    return _named("", results)


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
    terms = _mean_terms(region.whole, plan, values, temperatures)
    flux = np.asarray(sum(terms.values()))
    emissivity = region.whole.parts[0].optics[0]
    reference_flux = flux_of(at_centre[:, None], emissivity, plan.surroundings, values)[:, 0]
    results = {
        "extreme": extreme,
        "mean": mean,
        "delta": extreme - at_spot,
        "mean_delta": mean - at_centre,
        "flux": flux,
        "reference_flux": reference_flux,
        "excess_flux": flux - reference_flux,
    }
    results |= {f"{FLUX_TERM}{name}": term for name, term in terms.items()}
    if per_pixel is not None:
        results["area"] = _area(region, values, per_pixel)
        results["excess_heat"] = (flux - reference_flux) * results["area"]
        if plan.air:
            results["excess_heat_per_kelvin"] = results["excess_heat"] / plan.air.difference(values)
    around = plan.surroundings
    if plan.air:
        results |= envelope.of_region(mean[:, None], flux, reference_flux, emissivity, around, values, plan.air)
        if around.viewed_from == "inside":
            results |= envelope.factors(extreme[:, None], region.spot.parts[0].optics[0], around, values, plan.air)
    if plan.humidity:
        results |= envelope.margins(extreme, plan.humidity, values)
    return _named(region.name, results)


def _bound(
    region: Region, values: Columns, temperatures: _Temperatures, per_pixel: NDArray[np.float64] | None
) -> Numbers:
    """A region beyond the range where nothing can be compared: its bounds and its area."""
    results = {
        "extreme": temperatures.functionals(region.spot)[:, 0],
        "mean": temperatures.functionals(region.whole)[:, 0],
    }
    if per_pixel is not None:
        results["area"] = _area(region, values, per_pixel)
    return _named(region.name, results)


def _area(region: Region, values: Columns, per_pixel: NDArray[np.float64]) -> NDArray[np.float64]:
    """Area of a region (n,) [m²], its outline moved."""
    grown = 0.0 if region.outline is None else values[region.outline][:, 0] * region.rim
    return np.asarray(per_pixel * np.maximum(region.extent + grown, 0))


def _bridge(
    bridge: Bridge,
    plan: Plan,
    values: Columns,
    temperatures: _Temperatures,
    per_pixel: NDArray[np.float64] | None,
) -> Numbers:
    """A strip: how much more heat passes than through the undisturbed wall at its ends."""
    air = plan.air
    assert air is not None  # without both air temperatures there is no bridge to measure
    mean, extreme, undisturbed = (
        temperatures.functionals(member)[:, 0] for member in (bridge.whole, bridge.spot, bridge.undisturbed)
    )
    emissivity, around = bridge.undisturbed.parts[0].optics[0], plan.surroundings
    level = undisturbed[:, None]
    flux = np.asarray(sum(_mean_terms(bridge.whole, plan, values, temperatures).values()))
    flux_undisturbed = flux_of(level, emissivity, around, values)[:, 0]
    facing = values[around.air][:, 0]
    results = {
        "undisturbed": undisturbed,
        "extreme": extreme,
        "incidence_factor": np.asarray(incidence_factor(mean[:, None], undisturbed, facing)),
        "u_value": envelope.of_reference(level, flux_undisturbed, emissivity, around, values, air)["u_value"],
    }
    if around.viewed_from == "inside":
        results |= envelope.factors(extreme[:, None], bridge.spot.parts[0].optics[0], around, values, air)
    length = _length(bridge, plan, values, per_pixel)
    if length is not None:
        results["length"] = length
        results["linear_transmittance"] = np.asarray(
            linear_transmittance(flux[:, None], flux_undisturbed, length, air.difference(values))
        )
    return _named(f"{STRIP}{bridge.name}", results)


def _length(
    bridge: Bridge, plan: Plan, values: Columns, per_pixel: NDArray[np.float64] | None
) -> NDArray[np.float64] | None:
    """Length of a strip (n,) [m]; None without a scale."""
    across, down = bridge.span
    if plan.scale == "known_rectangle":
        return np.asarray(np.hypot(across * values["known_width"][:, 0], down * values["known_height"][:, 0]))
    return None if per_pixel is None else np.asarray(np.hypot(across, down) * np.sqrt(per_pixel))


def _component(
    region: Region,
    plan: Plan,
    values: Columns,
    temperatures: _Temperatures,
    spots: Mapping[str, NDArray[np.float64]],
) -> Numbers:
    hottest, ambient = spots[region.name], values[plan.ambient][:, 0]
    mean = temperatures.functionals(region.whole)[:, 0]
    rises = {"delta_ambient": hottest - ambient}
    results = {
        "max": hottest,
        "mean": mean,
        "flux": np.asarray(sum(_mean_terms(region.whole, plan, values, temperatures).values())),
    }
    facts, twin, t_twin = plan.facts.get(region.name, PartFacts()), plan.twins.get(region.name), None
    if twin is not None:
        factor = load_factor(twin.load_ratio, values["load_exponent"][:, 0]) if twin.load_ratio != 1 else 1.0
        rises["delta_similar"] = similar_rise(hottest, spots[twin.name], ambient, factor)
        results["relative_difference"] = electrical.relative_difference(rises["delta_similar"], rises["delta_ambient"])
        if twin.name != region.name:
            (other,) = [one for one in plan.components if one.name == twin.name]
            t_twin = temperatures.functionals(other.whole)[:, 0]
    calm = electrical.in_calm(rises, values) if plan.is_windy else {}
    over_air = calm.get("delta_ambient_in_calm", rises["delta_ambient"])
    results |= rises | calm | electrical.beside(facts, hottest, over_air, values)
    if facts.neighbours:
        others = [spots[name] for name in facts.neighbours]
        results["delta_neighbours"] = electrical.over_neighbours(hottest, others, values)
    around = (plan.ambient, plan.surroundings.radiant[0])
    results |= electrical.heat_of(facts, mean, t_twin, region.whole.parts[0].optics[0], around, values)
    return _named(region.name, results)


def _reference_at(
    plan: Plan, values: Columns, reference: NDArray[np.float64], lever: tuple[float, float]
) -> NDArray[np.float64]:
    """Reference temperature (n,) at a place: level and slopes, with what tilts the plane."""
    slope_x, slope_y = reference[:, 1], reference[:, 2]
    for name, along_x, along_y in plan.tilts:
        slope_x, slope_y = slope_x + values[name][:, 0] * along_x, slope_y + values[name][:, 0] * along_y
    return np.asarray(reference[:, 0] + slope_x * lever[0] + slope_y * lever[1])


def _mean_terms(
    member: Area, plan: Plan, values: Columns, temperatures: _Temperatures
) -> dict[str, NDArray[np.float64]]:
    """Mean heat flux (n,) [W m⁻²] over an area, by what takes it."""
    sums: dict[str, NDArray[np.float64]] = {}
    for part in member.parts:
        terms = terms_of(temperatures.of(part), part.optics[0], plan.surroundings, values)
        for name, term in terms.items():
            sums[name] = sums.get(name, 0.0) + (term * part.weights[0]).sum(axis=1)
    return sums


def _named(region: str, results: Mapping[str, NDArray[np.float64]]) -> Numbers:
    return {(region, name): number for name, number in results.items()}


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
