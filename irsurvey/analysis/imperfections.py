"""What keeps the mean of some pixels from being the temperature of the area they stand for, term by term.

Each function returns shifts of the area's apparent temperature, (scene name, kelvin per unit of it), and the
quantities among them that are the area's own.
"""

from __future__ import annotations

from dataclasses import replace
from math import erf, inf, log, pi, sqrt
from typing import Any

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.anomalies.patch import Patch
from irsurvey.anomalies.reference import Reference
from irsurvey.anomalies.shape import Spot
from irsurvey.model import Quantity, Scene

POINT_SPREAD = 0.7
"""Standard deviation [px] of the blur of a lens: 0.5 to 0.8 px, see the small-target readings of electrical surveys."""
_PROFILE_PIXELS = 4000
SELECTION = Quantity("selection", 0.0, 1 / 3**0.5, low=-1.0, high=1.0, distribution="rectangular")
"""How far picking the extreme spot among noisy ones has gone, of what it can: rectangular, common to a frame."""
SIZE_OF_SOURCE = "size_of_source"
OUTLINE = "outline"

Shifts = tuple[tuple[str, float], ...]
Tilts = tuple[tuple[str, float, float], ...]
"""(scene name, slopes in x and y of the reference plane per unit of it [K px⁻¹])."""
Own = tuple[Quantity, ...]


def of_spot(
    name: str,
    spot: Spot,
    patch: Patch,
    sense: str,
    *,
    noise: float,
    contrast: float,
    scene: Scene,
    shape: tuple[int, ...],
) -> tuple[Shifts, Own]:
    """A measurement spot: noise [K, apparent, per pixel] over its pixels, shading where it lies, blur, selection.

    `contrast` [K] is what it deviates from its surroundings by, in apparent temperature; `noise` too.
    """
    own = Quantity(f"noise:{name} spot", 0.0, noise / spot.rows.size**0.5)
    sign = 1.0 if sense == "hot" else -1.0
    choices = max(patch.pixels / spot.rows.size, 1.0)  # about as many independent spots were there to choose from
    # The largest of n normal deviations is about √(2 ln n) of them: the chosen spot may owe as much to noise.
    picked = -sign * own.u * sqrt(2 * log(choices))
    shifts = (
        (own.name, 1.0),
        *shading(spot.rows, spot.columns, shape),
        (SIZE_OF_SOURCE, contrast * _lost_inside(patch)),
        (SELECTION.name, picked),
    )
    return _known(shifts, scene, own), (own,)


def of_whole(
    name: str, patch: Patch, t: NDArray[np.float32], stretch: float, *, noise: float, contrast: float, scene: Scene
) -> tuple[Shifts, Own]:
    """All pixels of a region: their noise averages out, shading, blur at its rim, and where its outline lies.

    t (rows, columns) [K], `stretch` = ∂T/∂T_app.
    """
    own = Quantity(f"noise:{name} whole", 0.0, noise / patch.pixels**0.5)
    outline = _outline(name, scene)
    rows, columns = patch.positions()
    lost = min(perimeter(patch) * POINT_SPREAD / (sqrt(2 * pi) * patch.pixels), 1.0)
    shifts = (
        (own.name, 1.0),
        *shading(rows, columns, t.shape),
        (SIZE_OF_SOURCE, contrast * lost),
        *((quantity.name, _per_pixel_of_outline(patch, t) / stretch) for quantity in outline),
    )
    return _known(shifts, scene, own, *outline), (own, *outline)


def of_reference(
    reference: Reference, area: NDArray[np.bool_], t: NDArray[np.float32], stretch: float, scene: Scene
) -> tuple[Shifts, Tilts, Own]:
    """The reference area: the standard errors of its fit, shading over it, and where its outline was drawn.

    Where a plane was fitted shading tilts it too, and is then partly taken out of differences by it.
    """
    own = Quantity("noise:reference", 0.0, reference.u_level / stretch)
    slopes = tuple(
        Quantity(name, 0.0, u) for name, u in zip(("slope_x", "slope_y"), reference.u_slope, strict=True) if u > 0
    )
    outline = _outline("reference", scene)
    kernel = np.ones((3, 3), np.uint8)
    drawn = area.view(np.uint8)
    inner = cv2.erode(drawn, kernel, borderValue=0).view(np.bool_) & ~np.isnan(t)
    outer = cv2.dilate(drawn, kernel).view(np.bool_) & ~np.isnan(t)
    moved = float(np.median(t[inner][::7]) - np.median(t[outer][::7])) / 2 if inner.any() else 0.0
    if slopes:  # functionals of the very pixels the plane was fitted to
        over_area = profiles(reference.rows, reference.columns, t.shape)
        levels = tuple((name, float(reference.weights[0] @ profile)) for name, profile in over_area)
        tilts = tuple(
            (name, float(reference.weights[1] @ profile) * stretch, float(reference.weights[2] @ profile) * stretch)
            for name, profile in over_area
            if name in scene
        )
    else:
        rows, columns = np.nonzero(area)
        levels, tilts = shading(rows, columns, t.shape), ()
    shifts = ((own.name, 1.0), *levels, *((quantity.name, moved / stretch) for quantity in outline))
    own_tilts = tuple((one.name, float(one.name == "slope_x"), float(one.name == "slope_y")) for one in slopes)
    return _known(shifts, scene, own, *outline), (*tilts, *own_tilts), (own, *slopes, *outline)


def bounded_tilts(reference: Reference, area: NDArray[np.bool_], stretch: float, scene: Scene) -> Own:
    """The tilts of lens shading, no larger than a reference area without a gradient leaves room for.

    One that would show as a gradient of more than `hidden` over the area is not there: what is left is taken as
    rectangular within it.
    """
    if any(reference.slope):
        return ()
    rows, columns = (np.flatnonzero(area.any(axis=axis)) for axis in (1, 0))
    corners = np.array([rows[0], rows[-1]]), np.array([columns[0], columns[-1]])
    bounded = []
    for name, profile in profiles(*corners, area.shape)[1:]:
        span = float(np.ptp(profile))
        limit = reference.hidden / stretch / span / sqrt(3) if span > 0 else inf
        if name in scene and scene[name].u > limit:
            bounded.append(replace(scene[name], u=limit, distribution="rectangular"))
    return tuple(bounded)


def shading(rows: NDArray[np.intp], columns: NDArray[np.intp], shape: tuple[int, ...]) -> Shifts:
    """Lens shading of an area: where its pixels lie in the lens, on average (every k-th: the profiles are smooth)."""
    stride = max(1, rows.size // _PROFILE_PIXELS)
    rows, columns = rows[::stride], columns[::stride]
    return tuple((name, float(profile.mean())) for name, profile in profiles(rows, columns, shape))


def profiles(
    rows: NDArray[np.intp], columns: NDArray[np.intp], shape: tuple[int, ...]
) -> tuple[tuple[str, NDArray[Any]], ...]:
    """Lens shading at pixels: radial with the fourth power of the distance from the centre, and two tilts."""
    y = np.asarray((rows - (shape[0] - 1) / 2) / max((shape[0] - 1) / 2, 1))
    x = np.asarray((columns - (shape[1] - 1) / 2) / max((shape[1] - 1) / 2, 1))
    ratio = shape[0] / shape[1]
    radial = ((x**2 + (ratio * y) ** 2) / (1 + ratio**2)) ** 2
    return ("shading", radial), ("shading_x", x), ("shading_y", y)


def perimeter(patch: Patch) -> float:
    """Length of a region's outline [px]: how much its area grows when the outline moves out by one pixel."""
    grown = cv2.dilate(np.pad(patch.mask, 1).view(np.uint8), cv2.getStructuringElement(cv2.MORPH_CROSS, (3, 3)))
    return float(np.count_nonzero(grown) - patch.pixels)


def _outline(name: str, scene: Scene) -> Own:
    """The outline of one area: each lies where it lies, as uncertain as the survey says [px]."""
    return (replace(scene[OUTLINE], name=f"{OUTLINE}:{name}"),) if OUTLINE in scene else ()


def _known(shifts: Shifts, scene: Scene, *own: Quantity) -> Shifts:
    """Without what the scene does not hold, and without what moves nothing."""
    names = {quantity.name for quantity in own} | {SELECTION.name}
    return tuple((name, factor) for name, factor in shifts if factor != 0 and (name in names or name in scene))


def _lost_inside(patch: Patch) -> float:
    """Share of the contrast that blur takes from the widest part of a region: 1 − erf(a/(√2 σ))² for a square target.

    a, half its side, is the greatest distance to the outline.  The extreme lies where blur took least, so what it
    lost is no more than that.
    """
    distance = cv2.distanceTransform(np.pad(patch.mask, 1).view(np.uint8), cv2.DIST_L2, 5)
    return 1 - erf(max(float(distance.max()) - 0.5, 0.5) / (sqrt(2) * POINT_SPREAD)) ** 2


def _per_pixel_of_outline(patch: Patch, t: NDArray[np.float32]) -> float:
    """Change of a region's mean [K] per pixel that its outline moves outwards."""
    rows, columns = patch.box
    top, left = min(rows.start, 1), min(columns.start, 1)
    around = t[rows.start - top : rows.stop + 1, columns.start - left : columns.stop + 1]
    bottom, right = around.shape[0] - top - patch.mask.shape[0], around.shape[1] - left - patch.mask.shape[1]
    drawn = np.pad(patch.mask, ((top, bottom), (left, right))).view(np.uint8)
    kernel = np.ones((3, 3), np.uint8)
    measured = ~np.isnan(around)
    outer = cv2.dilate(drawn, kernel).view(np.bool_) & measured
    inner = cv2.erode(drawn, kernel, borderValue=1).view(np.bool_) & measured
    if not inner.any():
        inner = drawn.view(np.bool_) & measured
    return float(around[outer].mean() - around[inner].mean()) / 2
