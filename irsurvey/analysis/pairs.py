"""A frame at a pressure difference compared with the same view without it: what changed, and by how much."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.correction import Corrected, Optics, air_path, correct
from irsurvey.analysis.imperfections import OUTLINE, perimeter
from irsurvey.analysis.regions import Screened, inspectable, nominal_noise, stretch_of
from irsurvey.anomalies import segment as segments
from irsurvey.anomalies.change import Changes, changes
from irsurvey.anomalies.noise import pixel_noise
from irsurvey.anomalies.patch import Patch
from irsurvey.errors import FrameError
from irsurvey.geometry.footprint import pixel_area, scale_from_length
from irsurvey.geometry.polygons import outline
from irsurvey.geometry.rectify import pixel_areas
from irsurvey.geometry.registration import RESIDUAL, Registration, laid_over, register
from irsurvey.model import (
    Estimate,
    Frame,
    FrameTask,
    KnownLength,
    KnownRectangle,
    PairReport,
    PressureChange,
    Quantity,
    Scene,
)
from irsurvey.radiometry.lookup import look_up
from irsurvey.radiometry.measurement import object_temperature, object_temperatures
from irsurvey.texts import state
from irsurvey.uncertainty import propagate

LEAST_CHANGE = 0.5
"""Smallest change [K] that counts when the survey states no ΔT [house]: half of the ΔT that counts within one frame,
as what is built in cancels; uncooled cameras drift unevenly by some tenths from one frame to the next (common
practice)."""
LEAST_AIR_DIFFERENCE = 5.0
"""Between indoor and outdoor air [K], below which a leak need not show (ASTM E1186 and practice, from memory)."""
_NOISES = 5.0
"""Noises of the difference that a change has at least."""
_DRIFT, _OPEN = "drift", ("registration_x", "registration_y", "resampling")
"""Names in the scene: of the drift, and of what laying one frame over the other leaves open [px, px, px²]."""
_RESAMPLING_U = 1 / 12
"""Linear interpolation at a share t between two pixels errs by f″ t (1 − t)/2, on average f″/12 along each axis."""

Columns = Mapping[str, NDArray[np.float64]]


@dataclass(frozen=True, slots=True)
class FindingChange:
    """What pressure did to a finding: mean change over its pixels [K], None where the two frames do not both show it.

    `changed` True: by more than 2u and no less than counts.  False: by less, whatever its uncertainty (2u), no part of
    it changed, and a leak would have shown.  None: neither can be said.
    """

    change: Estimate | None
    changed: bool | None


@dataclass(frozen=True, slots=True, eq=False)
class Paired:
    """Two frames of one view compared.

    `difference` (rows, columns) [K]: with pressure minus without, drift taken out, NaN where not both show it; None
    where the two could not be compared.  `patches` in the order of the report's changes, `findings` in that of the
    regions of the frame at pressure.  `leaks_show`: whether air that comes in or goes out at this pressure would show
    on the side seen; None: the side or the air temperatures are not known.
    """

    report: PairReport
    difference: NDArray[np.float32] | None
    patches: tuple[Patch, ...]
    findings: tuple[FindingChange, ...]
    leaks_show: bool | None


def compared(corrected: Corrected, screened: Screened, task: FrameTask, partner: Frame | None) -> Paired | None:
    """The frame of `task`, at pressure, minus its partner's; None without a pair.

    The two are registered by what their sensors saw, and the partner is corrected on this frame's grid for the surfaces
    drawn there.  A change is a difference of differences, propagated as one:

        change = [T(a₁) − T(a₀)] − [T(r₁) − T(r₀)] + drift + g_x x + g_y y + c z + noise

    a and r are the mean apparent temperatures of its pixels and of the steady area (the reference) with (1) and without
    (0) pressure.  Both frames move together in everything that the scene holds, so the camera's offset, its gain, the
    emissivity and the reflected temperature matter only by how they stretch the change itself.  `drift` (u: its noise
    and unevenness over the frame) and `noise` (of both frames, over n pixels) have the value 0, and so have x and y,
    the registration left open (rectangular within 0.3 px along each axis), times the mean gradient g that both frames
    show, and z, what interpolation between pixels takes off a peak (u 1/12 px²), times the mean curvature c there.
    """
    if task.pair is None or partner is None:
        return None
    try:
        before = correct(partner, task.pair.partner)
    except FrameError as error:
        return _not_compared(task, screened, state("pair_unreadable", error=error))
    return _compared(corrected, before, screened, task)


def _compared(corrected: Corrected, before: Corrected, screened: Screened, task: FrameTask) -> Paired:
    assert task.pair is not None
    seen, seen_before = (
        np.where(np.isnan(one.t), np.float32(np.nan), look_up(one.codes, one.apparent)) for one in (corrected, before)
    )
    registration = register(seen_before, seen)
    if not registration.accepted:
        return _not_compared(task, screened, registration.reason, registration)
    laid = laid_over(seen_before, registration)
    frames = _Frames(corrected, before, task, seen, laid)
    noise = _noise(before, screened, task)
    smallest = task.detection.min_delta or max(LEAST_CHANGE, _NOISES * noise)
    stretch = _stretches(corrected, task)
    amplified = (noise * stretch).astype(np.float32)[corrected.optics] if stretch.size > 1 else noise
    open_, blocked = inspectable(corrected, task)
    usable = open_ & ~blocked
    found = changes(
        corrected.t,
        frames.before(),
        amplified,
        usable=usable,
        steady=screened.reference_area,
        least=segments.least_delta(smallest, noise, amplified),
        misregistration=RESIDUAL,
        min_pixels=_min_pixels(task, screened),
    )
    if not abs(found.elsewhere - found.drift) <= smallest:
        return _not_compared(task, screened, _unsteady(found), registration)
    patches = sorted(found.patches, key=lambda one: -abs(float(np.nansum(one[1].of(found.difference)))))
    places = [patch.positions() for _, patch in patches] + [region.patch.positions() for region in screened.regions]
    steady = usable & ~np.isnan(found.difference)
    if (steady & screened.reference_area).any():
        steady &= screened.reference_area
    means = _means(frames, found, places, steady, noise * stretch)
    areas = _areas(task, corrected.scene, screened.t.shape, [patch for _, patch in patches])
    overlaps = [_overlapped(patch, screened) for _, patch in patches]
    shown = tuple(
        PressureChange(
            sense=sense,
            polygon=tuple((x + patch.left, y + patch.top) for x, y in outline(patch.mask)),
            pixels=patch.pixels,
            area_m2=area,
            mean_change_k=mean,
            finding=f"{task.id}-{overlap}" if overlap else None,
        )
        for (sense, patch), mean, area, overlap in zip(patches, means[: len(patches)], areas, overlaps, strict=True)
    )
    show = _leaks_show(task, corrected.scene)
    on_findings = tuple(
        FindingChange(mean, _changed(mean, smallest, number in overlaps, show))
        for number, mean in enumerate(means[len(patches) :], start=1)
    )
    report = PairReport(
        with_=task.pair.partner.id,
        pressure_pa=task.pair.pressure,
        accepted=True,
        reason="",
        correlation=registration.correlation,
        shift_px=registration.shift_px,
        rotation_deg=registration.rotation_deg,
        threshold_k=float(smallest),
        changes=shown,
    )
    return Paired(report, found.difference, tuple(patch for _, patch in patches), on_findings, show)


def _not_compared(task: FrameTask, screened: Screened, reason: str, registration: Registration | None = None) -> Paired:
    assert task.pair is not None
    tried = registration is not None and bool(np.isfinite(registration.correlation))
    report = PairReport(
        with_=task.pair.partner.id,
        pressure_pa=task.pair.pressure,
        accepted=False,
        reason=reason,
        correlation=registration.correlation if registration and tried else None,
        shift_px=registration.shift_px if registration and tried else None,
        rotation_deg=registration.rotation_deg if registration and tried else None,
        threshold_k=None,
        changes=(),
    )
    return Paired(report, None, (), tuple(FindingChange(None, None) for _ in screened.regions), None)


def _unsteady(found: Changes) -> str:
    if np.isnan(found.drift):
        return state("pair_no_common_pixel")
    return state("pair_reference_changed", change=f"{found.elsewhere - found.drift:+.1f}")


@dataclass(frozen=True, slots=True, eq=False)
class _Frames:
    """Both frames on the grid of the one at pressure, as apparent temperatures [K], and how each is corrected."""

    corrected: Corrected
    partner: Corrected
    task: FrameTask
    seen: NDArray[np.float32]
    laid: NDArray[np.float32]

    def others(self) -> dict[str, float]:
        """The partner's scene as far as it differs: the surfaces are this frame's, what is between was its own."""
        mine = self.corrected.scene.values()
        return {
            name: value - mine[name]
            for name, value in self.partner.scene.values().items()
            if name in mine and not name.startswith("emissivity")
        }

    def before(self) -> NDArray[np.float32]:
        """The partner in object temperature [K], corrected for the surfaces of this frame."""
        values = self.corrected.scene.values()
        values = {name: value + self.others().get(name, 0.0) for name, value in values.items()}
        t = np.full(self.laid.shape, np.nan, np.float32)
        path = air_path(values)
        for index, (emissivity, reflected) in enumerate(self.corrected.optics_names):
            part = (self.corrected.optics == index) & ~np.isnan(self.laid)
            seen = _as_read(self.laid[part].astype(np.float64), values, self.partner.pivot)
            t[part] = object_temperatures(seen, values[emissivity], values[reflected], path, self.task.camera.band)
        return t

    def change(self, parts: Sequence[_Part], values: Columns) -> NDArray[np.float64]:
        """T(a₁) − T(a₀) of an area (n, 1) [K] for n scenes."""
        others = self.others()
        before = {name: value + others.get(name, 0.0) for name, value in values.items()}
        total = np.zeros((1, 1))
        for part in parts:
            now = self._object(part.seen, part.optics, values, self.corrected.pivot)
            total = total + part.share * (now - self._object(part.laid, part.optics, before, self.partner.pivot))
        return np.asarray(total)

    def _object(self, seen: float, optics: Optics, values: Columns, pivot: float) -> NDArray[np.float64]:
        emissivity, reflected = (values[name] for name in optics)
        band = self.task.camera.band
        return object_temperature(_as_read(seen, values, pivot), emissivity, reflected, air_path(values), band)


@dataclass(frozen=True, slots=True)
class _Part:
    """Pixels of an area under one optics: mean apparent temperatures with and without pressure [K], its share."""

    optics: Optics
    seen: float
    laid: float
    share: float


def _as_read(seen: Any, values: Mapping[str, Any], pivot: float) -> Any:
    return seen + values["camera_offset"] + values["camera_gain"] * (seen - pivot)


Places = tuple[NDArray[np.intp], NDArray[np.intp]]


def _parts(frames: _Frames, rows: NDArray[np.intp], columns: NDArray[np.intp]) -> tuple[_Part, ...]:
    optics = frames.corrected.optics[rows, columns]
    seen, laid = frames.seen[rows, columns].astype(np.float64), frames.laid[rows, columns].astype(np.float64)
    return tuple(
        _Part(
            frames.corrected.optics_names[index],
            float(seen[optics == index].mean()),
            float(laid[optics == index].mean()),
            float((optics == index).mean()),
        )
        for index in np.flatnonzero(np.bincount(optics))
    )


def _means(
    frames: _Frames,
    found: Changes,
    places: Sequence[Places],
    steady: NDArray[np.bool_],
    noises: NDArray[np.float64],
) -> list[Estimate | None]:
    """Mean change [K] of each place, by the model in `compared`; None where less than half of it is known.

    noises: of the difference [K], by the index of the optics.
    """
    scene, reference = frames.corrected.scene, _parts(frames, *np.nonzero(steady))
    own = [
        Quantity(_DRIFT, 0.0, found.drift_u),
        *(Quantity(name, 0.0, RESIDUAL / 3**0.5, distribution="rectangular") for name in _OPEN[:2]),
        Quantity(_OPEN[2], 0.0, _RESAMPLING_U),
    ]
    curvature = np.gradient(found.slopes[0], axis=1) + np.gradient(found.slopes[1], axis=0)
    nominal = {name: np.full((1, 1), value) for name, value in scene.values().items()}
    drift = float(frames.change(reference, nominal)[0, 0])
    wanted: list[tuple[int, tuple[_Part, ...], float, list[float]]] = []
    for number, (rows, columns) in enumerate(places):
        known = ~np.isnan(found.difference[rows, columns])
        if 2 * np.count_nonzero(known) < rows.size:
            continue
        at = rows[known], columns[known]
        variance = float((noises[frames.corrected.optics[at]] ** 2).mean())
        own.append(Quantity(f"noise:change {number}", 0.0, (variance / at[0].size) ** 0.5))
        parts = _parts(frames, *at)
        # The map's own mean: that of many temperatures is not quite the temperature of their mean.
        mean = float(found.difference[at].astype(np.float64).mean())
        rest = mean - (float(frames.change(parts, nominal)[0, 0]) - drift)
        wanted.append((number, parts, rest, [float(one[at].mean()) for one in (*found.slopes, curvature)]))

    def model(values: Columns) -> NDArray[np.float64]:
        common = values[_DRIFT] - frames.change(reference, values)
        results = [
            frames.change(parts, values)
            + common
            + rest
            + values[f"noise:change {number}"]
            + sum(values[name] * factor for name, factor in zip(_OPEN, factors, strict=True))
            for number, parts, rest, factors in wanted
        ]
        return np.concatenate(results, axis=1)

    means: list[Estimate | None] = [None] * len(places)
    estimates = propagate(model, scene.with_(*own)).estimates() if wanted else ()
    for (number, *_), estimate in zip(wanted, estimates, strict=True):
        means[number] = estimate
    return means


def _areas(task: FrameTask, scene: Scene, shape: tuple[int, ...], patches: Sequence[Patch]) -> list[Estimate | None]:
    """Area [m²] of each patch, as uncertain as the scale and the place of its outline; None without a scale."""
    extents = [_extent(task, shape, patch) for patch in patches]
    rims = [
        extent * perimeter(patch) / patch.pixels if OUTLINE in scene else 0.0
        for extent, patch in zip(extents, patches, strict=True)
    ]

    def model(values: Columns) -> NDArray[np.float64]:
        moved = values.get(OUTLINE, np.zeros((1, 1)))
        return np.asarray(_unit_area(task, values) * np.maximum(extents + moved * rims, 0.0))

    return list(propagate(model, scene).estimates()) if patches else []


def _extent(task: FrameTask, shape: tuple[int, ...], patch: Patch) -> float:
    """Pixels of a patch or, with a known rectangle, the share of that rectangle it covers."""
    if isinstance(task.known_scale, KnownRectangle):
        return float(patch.of(pixel_areas((shape[0], shape[1]), task.known_scale.corners, 1.0, 1.0)).sum())
    return float(patch.pixels)


def _unit_area(task: FrameTask, values: Columns) -> NDArray[np.float64]:
    """What one unit of an extent stands for (n, 1) [m²]; NaN without a scale."""
    if isinstance(task.known_scale, KnownRectangle):
        return values["known_width"] * values["known_height"]
    if isinstance(task.known_scale, KnownLength):
        side = scale_from_length(task.known_scale.start, task.known_scale.end, values["known_length"])
        return np.asarray(side) ** 2
    if "ifov" in values and (values["distance"] > 0).all():
        return np.asarray(pixel_area(values["distance"], values["ifov"], values.get("view_angle", 0.0)))
    return np.full((next(iter(values.values())).shape[0], 1), np.nan)


def _stretches(corrected: Corrected, task: FrameTask) -> NDArray[np.float64]:
    """How much noise each optics has, in that of the first."""
    all_of = np.array([stretch_of(corrected, task, index) for index in range(len(corrected.optics_names))])
    return np.asarray(np.nan_to_num(all_of / all_of[0], nan=1e3))


def _noise(before: Corrected, screened: Screened, task: FrameTask) -> float:
    """Noise of the difference [K] where the emissivity is the frame's own: that of both frames."""
    assert task.pair is not None
    partner = task.pair.partner
    stretch = stretch_of(before, partner, 0)
    stated = nominal_noise(partner, before.pivot + before.scene["camera_offset"].value) * stretch
    main = ~np.isnan(before.t) & (before.optics == 0)
    seen = pixel_noise(before.t, main if main.any() else ~np.isnan(before.t), 0.0)
    return float(np.hypot(screened.noise, np.nanmax([seen, stated, 1e-4])))


def _min_pixels(task: FrameTask, screened: Screened) -> int | NDArray[np.float32]:
    """As for the findings of a frame: a count, or pixel areas in units of the least area that counts."""
    if task.detection.min_area and screened.pixel_area is not None:
        areas = (screened.pixel_area / task.detection.min_area).astype(np.float32)
        return np.broadcast_to(areas, screened.t.shape)
    return task.detection.min_pixels


def _overlapped(patch: Patch, screened: Screened) -> int | None:
    """Number of the finding that a change overlaps most."""
    drawn = np.zeros(screened.t.shape, np.bool_)
    drawn[patch.box] = patch.mask
    shared = [int(np.count_nonzero(region.patch.of(drawn))) for region in screened.regions]
    return int(np.argmax(shared)) + 1 if any(shared) else None


def _leaks_show(task: FrameTask, scene: Scene) -> bool | None:
    """Whether a leak would show on the side seen: air of the other side must come through it, and be of another
    temperature.  From inside at lower pressure inside, from outside at higher."""
    pressure = task.pair.pressure if task.pair else 0.0
    values = scene.values()
    if task.viewed_from is None or "indoor_air" not in values or "outdoor_air" not in values:
        return None
    comes_through = pressure < 0 if task.viewed_from == "inside" else pressure > 0
    return comes_through and abs(values["indoor_air"] - values["outdoor_air"]) >= LEAST_AIR_DIFFERENCE


def _changed(mean: Estimate | None, least: float, has_change: bool, leaks_show: bool | None) -> bool | None:
    if mean is None or mean.u is None:
        return None
    size, margin = abs(mean.value), 2 * mean.u
    if size > margin and size >= least:
        return True
    if size + margin < least and not has_change and leaks_show:
        return False
    return None
