"""Randomised switchboard panels: rows of like parts under load, painted, blurred and seen with numpy and scipy alone.

What is drawn follows electrical practice: a rise grows as load^n with n from 1.6 to 2.0, a bad joint adds to it, a
cable carries part of it away, a bare bar mirrors its surroundings.  Sizes are pixels of a frame of 120 × 160,
temperatures kelvin, currents ampere.  A panel is made by its kind and seed alone.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

import forward
import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import gaussian_filter

from irsurvey.model import Component

Field = NDArray[np.float64]

SHAPE = (120, 160)
KELVIN = 273.15
FINE = 2
"""Points per pixel and axis at which a panel is painted, so that edges need not fall between pixels."""
Y, X = (axis / FINE - (FINE - 1) / (2 * FINE) for axis in np.indices((SHAPE[0] * FINE, SHAPE[1] * FINE), dtype=float))

_T = np.linspace(250.0, 620.0, 3701)
_WAVE = np.linspace(7.5e-6, 13e-6, 501)[:, None]
_RADIANCE = np.trapezoid(
    2 * forward.H * forward.C**2 / _WAVE**5 / np.expm1(forward.H * forward.C / (_WAVE * forward.K * _T)),
    _WAVE,
    axis=0,
)
"""Planck's law summed over 7.5–13 µm as in `forward`, up to what a failing joint reaches."""


@dataclass(frozen=True)
class Part:
    """One lug, fuse or breaker as it is painted: centre and size [px], emissivity, load and rating [A], rises [K]."""

    name: str
    group: str
    phase: str
    x: float
    y: float
    width: float
    height: float
    emissivity: float
    load: float
    rated: float
    rise: float  # above ambient air, as a sound part at this load
    excess: float = 0.0  # of a bad joint, at this load, where it is hottest
    cable: float = 0.0  # length below it [px]
    joint: float = 0.45  # radius of the bad joint over the part's width

    @property
    def box(self) -> tuple[float, float, float, float]:
        """Left, top, right, bottom [px]."""
        return (
            self.x - self.width / 2,
            self.y - self.height / 2,
            self.x + self.width / 2,
            self.y + self.height / 2,
        )


@dataclass(frozen=True, eq=False)
class Panel:
    """One picture: apparent temperatures without noise [K], and what a surveyor states and draws."""

    kind: str
    parts: tuple[Part, ...]
    t: Field
    noise: float
    ambient: float
    reflected: float
    emissivity: float  # as stated for everything that has none of its own
    components: tuple[Component, ...]
    stated: dict[str, Any]  # scene values besides
    reference: tuple[tuple[float, float], ...]
    range: tuple[float, float] | None = None

    @property
    def bad(self) -> Part | None:
        """The part with the bad joint."""
        return max(self.parts, key=lambda part: part.excess) if any(part.excess for part in self.parts) else None


def panel(kind: str, seed: int) -> Panel:
    """A panel of a kind of `KINDS`."""
    return KINDS[kind](np.random.default_rng([seed, sorted(KINDS).index(kind)]))


# --- kinds ------------------------------------------------------------------------------------------------------------


def _bad_joint(rng: np.random.Generator) -> Panel:
    """One bad joint; loads are alike or, in a third of the panels, stated as they differ; rows beside it are mild."""
    parts = _with_bad(_parts(rng, load=(0.45, 1.0), unbalanced=rng.random() < 1 / 3), rng, _excess(rng))
    row = next(part.group for part in parts if part.excess)
    beside = max((part.rise for part in parts if part.group != row), default=0.0)
    milder = min(1.0, rng.uniform(4.0, 9.0) / max(beside, 1e-9))  # of the rise of a row beside it
    parts = tuple(part if part.group == row else replace(part, rise=part.rise * milder) for part in parts)
    return _seen("bad joint", parts, rng)


def _beside_warm(rng: np.random.Generator) -> Panel:
    """One bad joint; rows beside it carry up to their rated load and are as warm as that makes them."""
    parts = _parts(rng, load=(0.45, 1.0), unbalanced=rng.random() < 1 / 3, least_groups=2)
    return _seen("bad joint beside warm rows", _with_bad(parts, rng, _excess(rng)), rng)


def _balanced(rng: np.random.Generator) -> Panel:
    """Sound parts under like loads, from hardly warm to rated load."""
    return _seen("balanced", _parts(rng, load=(0.42, 1.0)), rng)


def _unbalanced(rng: np.random.Generator) -> Panel:
    """Sound parts under unlike loads, as stated."""
    return _seen("unbalanced", _parts(rng, load=(0.45, 1.0), unbalanced=True), rng)


def _overload(rng: np.random.Generator) -> Panel:
    """Everything hot: sound parts above their rating, alike to a thousandth."""
    return _seen("overload", _parts(rng, load=(1.05, 1.5), least_rise=25.0, most_groups=2, scatter=0.001), rng)


def _uneven_overload(rng: np.random.Generator) -> Panel:
    """The same, alike to half a percent in load and in rise: up to 1.5 K of 80 K."""
    return _seen("uneven overload", _parts(rng, load=(1.05, 1.5), least_rise=25.0, most_groups=2), rng)


def _hot_and_bad(rng: np.random.Generator) -> Panel:
    """A group above its rating, with a bad joint in it."""
    parts = _parts(rng, load=(1.05, 1.5), least_rise=25.0, most_groups=1)
    return _seen("overload and a bad joint", _with_bad(parts, rng, _excess(rng)), rng)


def _low_load(rng: np.random.Generator) -> Panel:
    """A joint that would be bad at load, at a tenth to under two fifths of it."""
    load = rng.uniform(0.08, 0.38)
    excess = rng.uniform(15.0, 60.0) * load ** rng.uniform(1.6, 2.0)
    return _seen("low load", _with_bad(_parts(rng, load=(load, load), most_groups=2), rng, excess), rng)


def _bare_bar(rng: np.random.Generator) -> Panel:
    """Bare metal, its emissivity known to a few hundredths, with a bad joint."""
    parts = _parts(rng, load=(0.45, 1.0), emissivity=(0.06, 0.45), most_groups=1)
    return _seen("bare bar", _with_bad(parts, rng, _excess(rng)), rng)


def _saturated(rng: np.random.Generator) -> Panel:
    """A bad joint beyond the end of the camera's range."""
    parts = _with_bad(_parts(rng, load=(0.45, 1.0)), rng, rng.uniform(40.0, 90.0))
    return _seen("saturated", parts, rng, saturates=True)


def _small(rng: np.random.Generator) -> Panel:
    """Parts of one to two and a half pixels, smaller than a spot of three, with a bad joint."""
    parts = _parts(rng, load=(0.45, 1.0), width=(1.0, 2.4), height=(1.0, 2.4), cables=False, most_groups=2)
    return _seen("too small", _with_bad(parts, rng, _excess(rng)), rng)


def _small_joint(rng: np.random.Generator) -> Panel:
    """Parts of good size, with a bad joint of about a pixel somewhere in one of them."""
    parts = _with_bad(_parts(rng, load=(0.45, 1.0)), rng, rng.uniform(20.0, 60.0), joint=(0.3, 0.7))
    return _seen("too small a joint", parts, rng)


KINDS: dict[str, Callable[[np.random.Generator], Panel]] = {
    "bad joint": _bad_joint,
    "bad joint beside warm rows": _beside_warm,
    "balanced": _balanced,
    "bare bar": _bare_bar,
    "low load": _low_load,
    "overload": _overload,
    "overload and a bad joint": _hot_and_bad,
    "saturated": _saturated,
    "too small": _small,
    "too small a joint": _small_joint,
    "unbalanced": _unbalanced,
    "uneven overload": _uneven_overload,
}


def _excess(rng: np.random.Generator) -> float:
    """From where ANSI/NETA prints "probable deficiency" (4 K over a similar component) to glowing [K]."""
    return float(np.exp(rng.uniform(np.log(4.0), np.log(60.0))))


# --- parts ------------------------------------------------------------------------------------------------------------


def _parts(
    rng: np.random.Generator,
    *,
    load: tuple[float, float],
    unbalanced: bool = False,
    width: tuple[float, float] = (8.0, 15.0),
    height: tuple[float, float] = (9.0, 17.0),
    emissivity: tuple[float, float] = (0.86, 0.95),
    least_rise: float = 0.0,
    least_groups: int = 1,
    most_groups: int = 3,
    cables: bool = True,
    scatter: float = 0.005,
) -> tuple[Part, ...]:
    """Rows of three or four phases, one below the other, each row under a load of its own.

    `scatter` is how much loads that are called alike differ, and joints that are called sound, relative.
    """
    phases = int(rng.integers(3, 5))
    groups = int(rng.integers(least_groups, most_groups + 1))
    pitch_y = (SHAPE[0] - 24) / groups
    parts: list[Part] = []
    for group in range(groups):
        w, h = rng.uniform(*width), min(rng.uniform(*height), pitch_y - 14)
        cable = rng.uniform(4.0, pitch_y - h - 6) if cables and rng.random() < 0.6 else 0.0
        step = w + rng.uniform(max(3.0, 0.25 * w), min(12.0, (SHAPE[1] - 20 - phases * w) / phases))
        left = rng.uniform(8 + w / 2, SHAPE[1] - 8 - w / 2 - (phases - 1) * step)
        top = 8 + h / 2 + group * pitch_y
        share, exponent = rng.uniform(*load), rng.uniform(1.6, 2.0)
        rated, rated_rise = rng.choice([63, 100, 160, 250, 400]), rng.uniform(20.0, 50.0)
        rated_rise = max(rated_rise, least_rise / share**exponent)
        coating = rng.uniform(*emissivity)
        for phase in range(phases):
            ratio = share * (rng.uniform(0.6, 1.0) if unbalanced else 1 + scatter * rng.uniform(-1.0, 1.0))
            parts.append(
                Part(
                    name=f"row {group + 1} phase {phase + 1}",
                    group=f"row {group + 1}",
                    phase=str(phase + 1),
                    x=left + phase * step,
                    y=top,
                    width=w,
                    height=h,
                    emissivity=float(coating + scatter * rng.uniform(-0.5, 0.5)),
                    load=float(rated * ratio),
                    rated=float(rated),
                    rise=float(rated_rise * ratio**exponent * (1 + scatter * rng.uniform(-1.0, 1.0))),
                    cable=float(cable),
                )
            )
    return tuple(parts)


def _with_bad(
    parts: tuple[Part, ...], rng: np.random.Generator, excess: float, joint: tuple[float, float] | None = None
) -> tuple[Part, ...]:
    """The same with one bad joint; `joint` is its radius [px], else about half of the part's width."""
    bad = int(rng.integers(len(parts)))
    radius = rng.uniform(0.4, 0.7) if joint is None else rng.uniform(*joint) / parts[bad].width
    return tuple(
        replace(part, excess=float(excess), joint=float(radius)) if k == bad else part for k, part in enumerate(parts)
    )


# --- what the camera sees ---------------------------------------------------------------------------------------------


def _seen(kind: str, parts: tuple[Part, ...], rng: np.random.Generator, saturates: bool = False) -> Panel:
    ambient = KELVIN + rng.uniform(12.0, 32.0)
    reflected = ambient + rng.uniform(-1.0, 2.0)
    t = ambient + rng.uniform(0.0, 1.0) * Y / SHAPE[0]
    emissivity = np.full(t.shape, 0.92)
    for part in parts:
        _paint(part, t, emissivity, ambient)
    level = emissivity * _radiance(t) + (1 - emissivity) * _radiance(reflected)
    level = gaussian_filter(level, FINE * rng.uniform(0.5, 0.9))
    level = level.reshape(SHAPE[0], FINE, SHAPE[1], FINE).mean(axis=(1, 3))
    apparent = np.interp(level, _RADIANCE, _T)
    coating = float(np.mean([part.emissivity for part in parts]))
    stated = {"ambient": (ambient, 0.5), "reflected": (reflected + rng.normal(0, 0.5), 0.5), "air": (ambient, 0.5)}
    bare = coating < 0.6
    u = 0.03 if bare else 0.02
    known = float(np.clip(coating + rng.normal(0, u / 2), 0.04, 0.97))
    if bare:
        stated["emissivity:bars"] = (known, u)
    hottest = max(parts, key=lambda part: part.rise + part.excess)
    end = ambient + hottest.rise + 0.6 * hottest.excess
    return Panel(
        kind=kind,
        parts=parts,
        t=apparent,
        noise=float(rng.uniform(0.03, 0.08)),
        ambient=ambient,
        reflected=reflected,
        emissivity=0.92 if bare else known,
        components=tuple(_drawn(part, rng, "emissivity:bars" if bare else "emissivity") for part in parts),
        stated=stated,
        reference=((4.0, SHAPE[0] - 9.0), (SHAPE[1] - 5.0, SHAPE[0] - 9.0), (SHAPE[1] - 5.0, 117.0), (4.0, 117.0)),
        range=(253.15, float(end)) if saturates else None,
    )


def _paint(part: Part, t: Field, emissivity: Field, ambient: float) -> None:
    """One part with its cable, and its bad joint: half of what is too much spreads over all of the part."""
    left, top, right, bottom = part.box
    inside = (left <= X) & (right > X) & (top <= Y) & (bottom > Y)
    distance = np.hypot(X - part.x, Y - part.y) / (part.joint * part.width)
    spread = 0.5 if part.joint * part.width > 1 else 0.0
    own = part.rise + part.excess * (spread + (1 - spread) * np.exp(-0.5 * distance**2))
    t[inside] = ambient + own[inside]
    emissivity[inside] = part.emissivity
    cable = (np.abs(X - part.x) < part.width / 4) & (bottom <= Y) & (bottom + part.cable > Y)
    end = part.rise + part.excess * spread * np.exp(-0.5 * (part.height / 2 / (part.joint * part.width)) ** 2)
    fading = 0.3 + 0.4 * np.exp(-(Y - bottom) / max(part.cable, 1.0))
    t[cable] = ambient + end * fading[cable]


def _drawn(part: Part, rng: np.random.Generator, emissivity: str) -> Component:
    """The outline a surveyor draws around a part: up to a pixel too large or too small on each side."""
    slip = rng.uniform(-1.0, 1.0, 4) if min(part.width, part.height) > 4 else np.zeros(4)
    left, top, right, bottom = np.add(part.box, slip)
    corners = ((left, top), (right, top), (right, bottom), (left, bottom))
    polygon = tuple((float(x), float(y)) for x, y in corners)
    return Component(
        part.name, polygon, part.group, part.phase, load=part.load, rated=part.rated, emissivity=emissivity
    )


def _radiance(t: Any) -> Any:
    return np.interp(t, _T, _RADIANCE)
