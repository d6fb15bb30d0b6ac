"""Heat storage in a layered slab: how long it takes to forget what happened before."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np

H_INSIDE: Final = 7.69
"""Film coefficient inside, convection and radiation together [W m⁻² K⁻¹]: 1/0.13 (ISO 6946, horizontal flow [P])."""
H_OUTSIDE: Final = 25.0
"""The same outside: 1/0.04 (ISO 6946 [P])."""
HEAVY: Final = 3 * 3600.0
"""Time constant [s] from which a construction counts as heavy [house]: framed walls stay below it, masonry does not."""

CLASSES: Final[dict[str, float]] = {"light": 2 * 3600.0, "medium": 12 * 3600.0, "heavy": 24 * 3600.0}
"""Time constant [s] of a construction known only by its mass [house], on the slow side of what goes by that name.

As `time_constant` computes them: framed walls 0.7 to 1.8 h; 200 mm of aerated concrete 5 h, insulated cavity walls of
two leaves of brick 6 to 8 h; 500 mm of granite 19 h, 200 mm of concrete insulated outside 22 h.  Thicker masonry
insulated outside is slower than its class: state its layers."""

_CELLS = 40
"""Cells in each layer; τ comes out high, of one slab by π²/(12·40²) = 0.05 % at most, faces held."""


def time_constant(
    layers: Sequence[tuple[float, float]], *, h_inside: float = H_INSIDE, h_outside: float = H_OUTSIDE
) -> float:
    """Slowest time constant [s] of a slab between two airs: the last of a disturbance fades as exp(−t/τ).

    `layers` from inside to outside, each its thermal resistance [m² K W⁻¹] and heat capacity per area [J m⁻² K⁻¹]; an
    air layer has no capacity, a metal sheet hardly any resistance.  Film coefficients [W m⁻² K⁻¹].  0 where nothing
    stores heat, NaN where a number is negative, not finite or, for a film coefficient, not positive.

    τ is the largest eigenvalue of the integral operator whose kernel is the temperature at x due to a unit flow of
    heat released at x′ between airs held at zero, r(x)·(R − r(x′))/R for x before x′, r the resistance from the inner
    air and R the whole; the integral is taken by the midpoint rule.  Green's function of steady conduction, as in
    Carslaw & Jaeger (1959) [M].
    """
    given = np.array(layers, dtype=float).reshape(-1, 2)
    films = np.array([h_inside, h_outside], dtype=float)
    if not (np.isfinite(given).all() and (given >= 0).all() and np.isfinite(films).all() and (films > 0).all()):
        return float("nan")
    storing = given[given[:, 1] > 0]
    before = 1 / films[0] + np.cumsum(given[:, 0]) - given[:, 0]  # resistance from the inner air to each layer's face
    whole = 1 / films[0] + given[:, 0].sum() + 1 / films[1]
    middles = (np.arange(_CELLS) + 0.5) / _CELLS
    r = (before[given[:, 1] > 0, None] + storing[:, :1] * middles).ravel()
    root = np.sqrt(np.repeat(storing[:, 1] / _CELLS, _CELLS))
    kernel = np.minimum.outer(r, r) * (whole - np.maximum.outer(r, r)) / whole
    return float(np.linalg.eigvalsh(root[:, None] * kernel * root).max(initial=0.0))


def class_time_constant(mass: str) -> float:
    """Time constant [s] to reckon with where only the mass is known: "light", "medium" or "heavy"; else KeyError."""
    return CLASSES[mass]
