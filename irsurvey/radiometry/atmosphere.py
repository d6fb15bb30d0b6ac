"""What the air between object and camera lets through, per band and for radiation of a given Planck temperature.

The absorptance is a mixture of three parts of the band, each of which grows with the path in its own way:

    1 − tau = F·(1 − exp(−weak)) + H·(1 − exp(−dry)) + (1 − F − H)·(1 − exp(−strong))
    weak, strong, dry = (k·line)^n + s·continuum + (q·gas)^m, each with its own k, n, s, q, m
    line = w·P^a·θ^b     continuum = w·(ρ/10 g m⁻³)·(1 + mu·W)     gas = (L/100 m)·P^c·θ^d
    w = ρ·L [kg m⁻² = mm of water]     P = p/1013.25 hPa     θ = 296 K/T_air     W = clip((296 K − T_air)/36 K, 0, 1)

F and H are quadratic in x = ln(T_source/293.15 K), so the absorptance of one scene is three numbers.  It grows
like √L near zero: the transmittance of a longer path is never a power of that of a shorter one.
Coefficients, their source and their limits: atmosphere.toml.
"""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike

from irsurvey.constants import STANDARD_PRESSURE, ZERO_CELSIUS
from irsurvey.radiometry.planck import Array, Band, numbers
from irsurvey.texts import state

ABSORPTANCE_U: Final = 0.15
"""Relative standard uncertainty of the absorptance 1 − tau in a fitted band (judgement)."""

_ABSORPTANCE_U_ELSEWHERE: Final = 0.30  # in a band served by the nearest fitted one (judgement)
_SOURCE_LOW, _SOURCE_HIGH, _SOURCE_REFERENCE = 213.0, 623.0, 293.15  # [K], the fit's range of sources
_EDGE_TOLERANCE_UM: Final = 1e-3  # edges are stated to 0.1 µm; this only forgives rounding


@dataclass(frozen=True, slots=True, eq=False)
class Absorptance:
    """Absorptance of an air path, constant + linear·x + square·x² with x = ln(T_source/293.15 K).

    Held constant outside sources of 213…623 K."""

    constant: Array
    linear: Array
    square: Array

    def at(self, t_source: ArrayLike) -> Array:
        """Absorptance for radiation of Planck temperature `t_source` [K]."""
        x = source(t_source)
        return np.asarray(self.constant + x * (self.linear + x * self.square))

    def slope(self, t_source: ArrayLike) -> Array:
        """Its derivative with the source temperature [K⁻¹]."""
        t_source = np.asarray(t_source, float)
        held = (t_source < _SOURCE_LOW) | (t_source > _SOURCE_HIGH)
        return np.where(held, 0.0, (self.linear + 2 * source(t_source) * self.square) / t_source)


def transmittance(
    t_source: ArrayLike,
    *,
    distance: ArrayLike,
    t_air: ArrayLike,
    vapour_density: ArrayLike,
    pressure: ArrayLike,
    band: Band,
    excess: ArrayLike = 0.0,
) -> Array:
    """Band transmittance of the air path for radiation of Planck temperature `t_source` [K].

    Distance [m], air temperature [K], vapour density [kg m⁻³], pressure [Pa]; all broadcast.  `excess` is a
    relative error of the absorptance: tau' = 1 − (1 − tau)(1 + excess).  Distance 0 gives exactly 1, whatever
    the air; a negative distance, vapour density, pressure or absolute temperature gives NaN.  Errors against
    LOWTRAN7 to 200 m at most 0.0025 / 0.0010 / 0.0056 (7.5–13 / 8–14 / 3–5 µm); see `validity_notes`.
    """
    path = absorptance(
        distance=distance, t_air=t_air, vapour_density=vapour_density, pressure=pressure, band=band, excess=excess
    )
    return np.asarray(1 - path.at(t_source))


def absorptance(
    *,
    distance: ArrayLike,
    t_air: ArrayLike,
    vapour_density: ArrayLike,
    pressure: ArrayLike,
    band: Band,
    excess: ArrayLike = 0.0,
) -> Absorptance:
    """Absorptance of an air path as a function of source temperature; arguments as for `transmittance`."""
    fit = _fit(band)
    length, air, vapour = numbers(distance), numbers(t_air), numbers(vapour_density)
    compression, theta = numbers(pressure) / STANDARD_PRESSURE, 296 / air
    outer = np.multiply.outer  # appends the axis of the three parts
    with np.errstate(invalid="ignore", divide="ignore"):  # powers of what may not be negative: NaN, as promised
        line = vapour * length * compression**fit.a * theta**fit.b
        continuum = vapour * length * (vapour / 0.010) * (1 + fit.mu * np.minimum(np.maximum((296 - air) / 36, 0), 1))
        gas = length / 100 * compression**fit.c * theta**fit.d
        depths = outer(line, fit.k) ** fit.n + outer(continuum, fit.s) + outer(gas, fit.q) ** fit.m
    absorbed = -np.expm1(-np.where(np.equal(length, 0)[..., np.newaxis], 0.0, depths))
    terms, scale = absorbed @ fit.shares, 1 + numbers(excess)
    return Absorptance(scale * terms[..., 0], scale * terms[..., 1], scale * terms[..., 2])


def source(t_source: ArrayLike) -> Array:
    """The variable x = ln(T_source/293.15 K) of an `Absorptance`, held constant outside 213…623 K."""
    held = np.minimum(np.maximum(t_source, _SOURCE_LOW), _SOURCE_HIGH)
    return np.asarray(np.log(held / _SOURCE_REFERENCE))


def fitted_band(band: Band) -> tuple[str, bool]:
    """Name of the fitted band that serves `band` (low, high) [m], and whether it is that band itself.

    Otherwise the nearest: the smallest sum of the distances of both edges."""
    away = {name: np.abs(np.subtract(fit["edges_um"], np.multiply(band, 1e6))).sum() for name, fit in _fits().items()}
    nearest = min(away, key=away.__getitem__)
    return nearest, bool(away[nearest] < _EDGE_TOLERANCE_UM)


def absorptance_u(band: Band) -> float:
    """Relative standard uncertainty of the absorptance in this band."""
    return ABSORPTANCE_U if fitted_band(band)[1] else _ABSORPTANCE_U_ELSEWHERE


def validity_notes(distance: float, t_air: float, pressure: float) -> tuple[str, ...]:
    """What to tell people where a path [m], air temperature [K] or pressure [Pa] lies beyond the fit; () within it."""
    notes = (
        (distance > 500, state("flag_long_path", distance=f"{distance:.0f}")),
        (t_air > ZERO_CELSIUS + 50, state("flag_hot_air", air=f"{t_air - ZERO_CELSIUS:.0f}")),
        (pressure < 70_000, state("flag_thin_air", pressure=f"{pressure / 100:.0f}")),
    )
    return tuple(note for beyond, note in notes if beyond)


@dataclass(frozen=True, slots=True, eq=False)
class _Fit:
    """Coefficients of one band; arrays over its parts (weak, dry, strong), `shares` (part, power of x)."""

    a: float
    b: float
    c: float
    d: float
    mu: float
    k: Array
    n: Array
    s: Array
    q: Array
    m: Array
    shares: Array


@cache
def _fit(band: Band) -> _Fit:
    entry = _fits()[fitted_band(band)[0]]
    a, b, c, d, mu = (entry[key] for key in ("a", "b", "c", "d", "mu"))
    k, n, s, q, m = (np.array([entry[part][key] for part in ("weak", "dry", "strong")]) for key in "knsqm")
    F, H = np.array(entry["F"]), np.array(entry["H"])
    return _Fit(a, b, c, d, mu, k, n, s, q, m, shares=np.array([F, H, [1, 0, 0] - F - H]))


@cache
def _fits() -> dict[str, Any]:
    return tomllib.loads(files("irsurvey.radiometry").joinpath("atmosphere.toml").read_text(encoding="utf-8"))
