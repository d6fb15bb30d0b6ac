"""Randomised walls seen from inside, with a defect, sound, or with a shiny cover: painted with numpy and scipy alone.

What is drawn follows descriptions of the trade (how a missing batt, a slab edge, a draught, a damp patch look), not the
cues that irsurvey measures.  Sizes are pixels of a frame of 120 × 160, temperatures kelvin.  A wall is made by its seed
alone.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import gaussian_filter, map_coordinates

Field = NDArray[np.float64]
Mask = NDArray[np.bool_]
Corners = tuple[tuple[float, float], ...]

SHAPE = (120, 160)
ROWS, COLUMNS = SHAPE
WALL_K = 291.15  # 18 °C
Y, X = np.indices(SHAPE, dtype=float)


@dataclass(frozen=True, eq=False)
class Wall:
    """One picture: temperatures without noise [K], what was drawn into it, what a surveyor would draw on it."""

    kind: str
    sort: str  # of its kind: "slab", "lintel", "glow" …
    t: Field
    noise: float
    delta: Field  # what the defect alone adds [K]
    reference: Corners
    openings: tuple[Corners, ...] = ()  # windows and doors, drawn to be left out
    covers: tuple[tuple[Corners, float], ...] = field(default=())  # shiny ones with their emissivity

    @property
    def defect(self) -> Mask:
        """Pixels that deviate by half of the largest deviation or more."""
        largest = np.abs(self.delta).max()
        return np.abs(self.delta) >= max(largest / 2, 1e-9)


def defect(kind: str, seed: int) -> Wall:
    """A wall with one defect of a kind of `DEFECTS`."""
    rng = np.random.default_rng([seed, sorted(DEFECTS).index(kind)])
    contrast = rng.uniform(1.5, 6.0)
    sort, delta, openings = DEFECTS[kind](rng)
    delta = delta / np.abs(delta).max() * contrast
    if not openings and rng.random() < 0.3:  # a window elsewhere, so that a window alone says nothing
        openings = _window_clear_of(np.abs(delta) > 0.1 * contrast, rng)
    t = _sound(rng) + delta
    for corners in openings:
        t = np.where(_inside(corners), WALL_K - rng.uniform(2, 5), t)
    return Wall(
        kind, sort, _seen(t, rng), rng.uniform(0.05, 0.1), delta, _reference(np.abs(delta), openings), openings
    )


def sound(seed: int) -> Wall:
    """A wall without any defect: uneven, layered, with studs, sometimes a picture on it, through a shading lens."""
    rng = np.random.default_rng([seed, 100])
    t = _sound(rng, most_layered=3.0, deepest_stud=0.45, most_uneven=0.12)
    if rng.random() < 0.3:  # a picture is a little warmer or colder than the wall beside it
        left, top = rng.uniform(70, 110), rng.uniform(20, 60)
        picture = _inside(_box(left, top, left + rng.uniform(15, 40), top + rng.uniform(12, 35)))
        t = t + rng.uniform(-0.45, 0.45) * gaussian_filter(picture.astype(float), 1.0)
    window = _window_clear_of(X < 60, rng) if rng.random() < 0.3 else ()
    for corners in window:
        t = np.where(_inside(corners), WALL_K - rng.uniform(2, 5), t)
    nothing = np.zeros(SHAPE)
    return Wall("sound", "wall", _seen(t, rng), rng.uniform(0.05, 0.1), nothing, _box(4, 4, 55, 115), window)


def reflection(seed: int) -> Wall:
    """A sound wall with shiny covers as warm as it: what they mirror is not what was stated for the room."""
    rng = np.random.default_rng([seed, 200])
    t = _sound(rng)
    shift = np.zeros(SHAPE)
    covers = []
    for left in (68.0, 114.0)[: int(rng.integers(1, 3))]:
        width, height = rng.uniform(14, 38), rng.uniform(14, 60)
        top = rng.uniform(8, 110 - height)
        corners = _box(left, top, left + width, top + height)
        emissivity = float(rng.uniform(0.08, 0.55))
        mirrored = rng.choice([-1, 1]) * rng.uniform(5, 14)  # a cold window or a warm person instead of the room
        uneven = 1 + 0.2 * _clouds(rng, 12) + rng.uniform(-0.3, 0.3) * (X - left) / width
        shift = np.where(_inside(corners), (1 - emissivity) * mirrored * uneven, shift)
        covers.append((corners, emissivity))
    return Wall(
        "reflection",
        "cover",
        _seen(t + shift, rng),
        rng.uniform(0.05, 0.1),
        shift,
        _box(4, 4, 55, 115),
        covers=tuple(covers),
    )


def inside(corners: Corners) -> Mask:
    """Pixels of a drawn convex outline."""
    return _inside(corners)


# ---- the kinds: each gives its sort, its shape (any height, either sign) and the openings that belong to it ----------


def _missing_insulation(rng: np.random.Generator) -> tuple[str, Field, tuple[Corners, ...]]:
    """Bays between framing without insulation: straight edges, a plateau that the air in the void makes uneven."""
    width, height = rng.uniform(20, 56), rng.uniform(24, 104)
    left = rng.uniform(50, 158 - width) if rng.random() < 0.85 else COLUMNS - width + rng.uniform(2, 12)
    top = rng.uniform(4, 117 - height) if rng.random() < 0.85 else rng.uniform(-12, -2)
    slump = rng.uniform(0.0, 0.35) * height if rng.random() < 0.25 else 0.0  # what has slid leaves a slanting edge
    corners = np.array([(left, top), (left + width, top + slump), (left + width, top + height), (left, top + height)])
    corners = corners + rng.uniform(-0.03, 0.03, (4, 2)) * [width, height]  # the view is not quite square
    corners = _turned(corners, rng.uniform(-4, 4))
    bay = _inside(tuple(map(tuple, corners))).astype(float)
    sort = "bay"
    if width > 36 and rng.random() < 0.3:  # two bays: the stud between them is still there
        sort = "two bays"
        bay *= 1 - rng.uniform(0.4, 0.7) * (np.abs(X - left - width / 2) < rng.uniform(1.0, 1.8))
    turning = rng.uniform(-0.06, 0.06) * (Y - top - height / 2) / height
    uneven = 1 + turning + rng.uniform(0.01, 0.04) * _clouds(rng, 8)
    return sort, -gaussian_filter(bay, rng.uniform(0.7, 2.0), mode="nearest") * uneven, ()


def _thermal_bridge(rng: np.random.Generator) -> tuple[str, Field, tuple[Corners, ...]]:
    """Something solid through the insulation: a bell across, even along."""
    sort = str(rng.choice(["slab", "column", "corner", "lintel"]))
    along_varies = 1 + rng.uniform(-0.25, 0.25) * (Y / ROWS - 0.5) + rng.uniform(0.01, 0.04) * _clouds(rng, 10)
    if sort == "lintel":
        long, deep = rng.uniform(70, 105), rng.uniform(8, 18)
        left, top = rng.uniform(40, 156 - long), rng.uniform(10, 50)
        beam = _inside(_box(left, top, left + long, top + deep)).astype(float)
        window = _box(left + 8, top + deep + 5, left + long - 8, 119.0)
        return sort, -gaussian_filter(beam, rng.uniform(2.0, 3.5)) * along_varies, (window,)
    offset = _offset_from_line(rng, upright=sort in ("column", "corner"))
    if sort == "corner":
        profile = np.exp(-np.abs(offset) / rng.uniform(4.0, 9.0))
    else:
        width = rng.uniform(3.0, 8.0) if sort == "slab" else rng.uniform(2.0, 4.5)
        profile = 0.85 * np.exp(-((offset / width) ** 2) / 2) + 0.15 * np.exp(-np.abs(offset) / (2.5 * width))
    if sort == "column" and rng.random() < 0.4:  # it ends below the ceiling
        profile = profile / (1 + np.exp((rng.uniform(10, 30) - Y) / rng.uniform(1.5, 4.0)))
    return sort, -gaussian_filter(profile, 0.7) * along_varies, ()


def _air_leakage(rng: np.random.Generator) -> tuple[str, Field, tuple[Corners, ...]]:
    """Cold air out of a joint: sharp where it comes out, feathered where it ends, uneven like a draught."""
    half, long, spread = rng.uniform(3, 22), rng.uniform(16, 48), rng.uniform(0.0, 0.3)
    drift, depth = rng.uniform(-0.35, 0.35), rng.uniform(1.5, 3.5)
    sort = str(rng.choice(["window", "joint"]))
    at, root = rng.uniform(70, 132), rng.uniform(20, 60)
    run = np.clip(Y - root, 0, None)
    across = np.abs(X - at - drift * run) / (half + spread * run)
    plume = np.where(run > 0, np.exp(-run / long), 0.0) * np.exp(-(across**depth))
    plume = plume * (1 + rng.uniform(0.05, 0.2) * _clouds(rng, 7))
    plume = gaussian_filter(plume, rng.uniform(0.6, 1.2))
    window = _box(at - half - rng.uniform(4, 16), 2.0, min(at + half + rng.uniform(4, 16), 157.0), root - 1)
    turned = int(rng.choice([0, 0, 1, 3]))  # out of a sill it falls; out of an upright joint it blows sideways
    if turned:
        window_mask = _inside(window)
        plume, window_mask = _sideways(plume, turned), _sideways(window_mask.astype(float), turned) > 0.5
        rows, columns = np.nonzero(window_mask)
        window = _box(float(columns.min()), float(rows.min()), float(columns.max()), float(rows.max()))
    return sort, -plume, (window,) if sort == "window" else ()


def _moisture(rng: np.random.Generator) -> tuple[str, Field, tuple[Corners, ...]]:
    """A damp patch: wicked out in tongues, weaker towards its rim."""
    size, at = rng.uniform(15, 34), (rng.uniform(80, 120), rng.uniform(40, 80))
    sort = "patch"
    if rng.random() < 0.2:
        sort, at = "from the floor", (at[0], 119 + rng.uniform(-8, 4))
    angle = np.arctan2(Y - at[1], X - at[0])
    radius = np.hypot((X - at[0]) / rng.uniform(0.8, 1.3), Y - at[1])
    rim = np.full(SHAPE, 1.0)
    for order in range(2, 14):
        rim = rim + rng.normal(0, 0.15 / order**0.5) * np.cos(order * angle + rng.uniform(0, 2 * np.pi))
    rim = np.clip(rim, 0.35, None) * (1 + rng.uniform(0.05, 0.15) * _clouds(rng, 2.5))
    inward = np.clip(1 - radius / (size * rim), 0, 1)
    patch = 1 - (1 - inward) ** rng.uniform(2.0, 5.0)
    patch = patch * (1 + rng.uniform(0.05, 0.15) * _clouds(rng, 6))
    return sort, -gaussian_filter(patch, rng.uniform(0.7, 1.5)), ()


def _no_typical_pattern(rng: np.random.Generator) -> tuple[str, Field, tuple[Corners, ...]]:
    """What is no defect of the wall: a lamp's glow, where a cupboard stood, a soft patch of air."""
    sort = str(rng.choice(["glow", "furniture", "soft patch"]))
    at = (rng.uniform(85, 120), rng.uniform(40, 80))
    if sort == "furniture":
        width, height = rng.uniform(30, 56), rng.uniform(40, 74)
        shadow = _inside(_box(at[0] - width / 2, at[1] - height / 2, at[0] + width / 2, at[1] + height / 2))
        return sort, -gaussian_filter(shadow.astype(float), rng.uniform(5, 9)), ()
    stretched = 1.0 if sort == "glow" else rng.uniform(1.0, 1.5)
    tilt, size = rng.uniform(0, np.pi), rng.uniform(7, 15)
    u = (X - at[0]) * np.cos(tilt) + (Y - at[1]) * np.sin(tilt)
    v = (Y - at[1]) * np.cos(tilt) - (X - at[0]) * np.sin(tilt)
    soft = np.exp(-((u / stretched) ** 2 + v**2) / (2 * size**2))
    sign = 1 if sort == "glow" else rng.choice([-1, 1])
    return sort, sign * soft * (1 + 0.03 * _clouds(rng, 8)), ()


DEFECTS: dict[str, Callable[[np.random.Generator], tuple[str, Field, tuple[Corners, ...]]]] = {
    "missing or displaced insulation": _missing_insulation,
    "thermal bridge": _thermal_bridge,
    "air leakage": _air_leakage,
    "moisture": _moisture,
    "no typical pattern": _no_typical_pattern,
}


# ---- walls ------------------------------------------------------------------------------------------------------


def _sound(
    rng: np.random.Generator, *, most_layered: float = 1.2, deepest_stud: float = 0.3, most_uneven: float = 0.08
) -> Field:
    """A wall without defect: warmer towards the ceiling, faint studs, gently uneven."""
    t = WALL_K + rng.uniform(0, most_layered) * (0.5 - Y / ROWS) + rng.uniform(-0.2, 0.2) * (X / COLUMNS - 0.5)
    t = t + rng.uniform(0.02, most_uneven) * _clouds(rng, rng.uniform(8, 20))
    if rng.random() < 0.7:
        apart, start, deep = rng.uniform(28, 60), rng.uniform(0, 30), rng.uniform(0.08, deepest_stud)
        for at in np.arange(start, COLUMNS, apart):
            t = t - deep * np.exp(-(((X - at) / 2.0) ** 2) / 2)
    return np.asarray(t)


def _seen(t: Field, rng: np.random.Generator) -> Field:
    """Through a lens: a little blurred, darker in the corners."""
    radius = ((X - (COLUMNS - 1) / 2) ** 2 + (Y - (ROWS - 1) / 2) ** 2) / ((COLUMNS**2 + ROWS**2) / 4)
    return np.asarray(gaussian_filter(t, 0.6, mode="nearest") - rng.uniform(0, 0.3) * radius**2)


def _clouds(rng: np.random.Generator, grain: float) -> Field:
    """Gentle clouds with a standard deviation of 1, cut off at 2."""
    clouds = gaussian_filter(rng.normal(size=SHAPE), grain, mode="reflect")
    return np.clip(clouds / clouds.std(), -2, 2)


def _reference(height: Field, openings: tuple[Corners, ...]) -> Corners:
    """The largest margin of the frame, at its left, right, top or bottom, that is clear of defect and openings."""
    busy = height > 0.03 * height.max()
    for corners in openings:
        busy |= _inside(corners)
    rows, columns = np.nonzero(busy)
    gap = 4
    margins = {
        (columns.min() - gap) * ROWS: _box(2, 2, columns.min() - gap, ROWS - 3),
        (COLUMNS - columns.max() - gap) * ROWS: _box(columns.max() + gap, 2, COLUMNS - 3, ROWS - 3),
        (rows.min() - gap) * COLUMNS: _box(2, 2, COLUMNS - 3, rows.min() - gap),
        (ROWS - rows.max() - gap) * COLUMNS: _box(2, rows.max() + gap, COLUMNS - 3, ROWS - 3),
    }
    return margins[max(margins)]


def _window_clear_of(busy: Mask, rng: np.random.Generator) -> tuple[Corners, ...]:
    """A window well away from what is there, if one fits."""
    for _ in range(20):
        left, top = rng.uniform(40, 130), rng.uniform(2, 90)
        corners = _box(left, top, min(left + rng.uniform(18, 40), 157.0), min(top + rng.uniform(18, 40), 117.0))
        around = _box(corners[0][0] - 8, corners[0][1] - 8, corners[2][0] + 8, corners[2][1] + 8)
        if not (_inside(around) & busy).any():
            return (corners,)
    return ()


def _box(left: float, top: float, right: float, bottom: float) -> Corners:
    return ((left, top), (right, top), (right, bottom), (left, bottom))


def _inside(corners: Corners) -> Mask:
    """Pixels inside or on a convex outline, clockwise as seen."""
    within = np.ones(SHAPE, bool)
    for (x0, y0), (x1, y1) in zip(corners, corners[1:] + corners[:1], strict=True):
        within &= (x1 - x0) * (Y - y0) - (y1 - y0) * (X - x0) >= 0
    return within


def _turned(corners: NDArray[np.float64], degrees: float) -> NDArray[np.float64]:
    c, s = np.cos(np.radians(degrees)), np.sin(np.radians(degrees))
    centre = corners.mean(axis=0)
    return np.asarray((corners - centre) @ [[c, s], [-s, c]] + centre)


def _offset_from_line(rng: np.random.Generator, *, upright: bool) -> Field:
    """Distance of every pixel from a line right across the frame."""
    tilt = np.radians(rng.uniform(-8, 8))
    if upright:
        return (X - rng.uniform(75, 125)) * np.cos(tilt) + (Y - 60) * np.sin(tilt)
    return (Y - rng.uniform(45, 80)) * np.cos(tilt) + (X - 80) * np.sin(tilt)


def _sideways(field_: Field, quarters: int) -> Field:
    """The picture turned by quarters about a point right of the middle, its corners cut off."""
    at = (95.0, 55.0)
    c, s = round(np.cos(quarters * np.pi / 2)), round(np.sin(quarters * np.pi / 2))
    x, y = X - at[0], Y - at[1]
    return np.asarray(map_coordinates(field_, [at[1] - s * x + c * y, at[0] + c * x + s * y], order=1, cval=0.0))
