"""PV modules: what a warm part of one is consistent with, its rise at full sun, and its neighbours."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping, Sequence
from functools import cache
from importlib.resources import files
from math import isfinite, nan
from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.assess.indication import CueBounds
from irsurvey.model.report import Indication
from irsurvey.texts import of_table, state

STANDARD_IRRADIANCE: Final = 1000.0
"""Irradiance [W m⁻²] that rises are brought to."""
LEAST_IRRADIANCE: Final = 600.0
"""Irradiance [W m⁻²] below which a rise says too little to be brought to full sun [S]."""
MOST_NEIGHBOURS: Final = 10
LEAST_NEIGHBOURS: Final = 6
"""A module is held against the median of 6 to 10 sound neighbours [S]."""
_OUTLIER: Final = 3.0
"""Robust standard deviations above the median from which a neighbour is not sound [house]."""
_EQUAL: Final = 0.5
"""Least spread [K] taken among sound neighbours [house]: of nearly equal ones none is to be an outlier."""
_MAD_TO_SIGMA: Final = 1.4826


def scaled(delta: ArrayLike, irradiance: ArrayLike) -> NDArray[np.float64]:
    """A rise [K] at `irradiance` [W m⁻²] brought to 1000 W m⁻², in proportion; NaN below 600 W m⁻² [S]."""
    irradiance = np.asarray(irradiance, dtype=float)
    usable = np.where(irradiance >= LEAST_IRRADIANCE, irradiance, np.nan)
    return np.asarray(np.asarray(delta, dtype=float) * STANDARD_IRRADIANCE / usable)


def neighbours(index: int, centres: Sequence[ArrayLike], most: int = MOST_NEIGHBOURS) -> tuple[int, ...]:
    """Indices of the nearest modules to module `index`, nearest first, at most `most`; of equally near the earlier.

    centres (n, 2) [px] of the modules of one group."""
    places = np.asarray(centres, dtype=float).reshape(-1, 2)
    away = np.hypot(*(places - places[index]).T)
    order = np.argsort(np.round(away, 6), kind="stable")
    return tuple(int(k) for k in order[order != index][:most])


def sound(t: ArrayLike) -> NDArray[np.bool_]:
    """Which neighbours (n,) [K] are sound: known, and not hotter than the rest by what the rest does not vary."""
    t = np.asarray(t, dtype=float)
    known: NDArray[np.bool_] = np.isfinite(t)
    if not known.any():
        return known
    middle = np.median(t[known])
    spread = max(_MAD_TO_SIGMA * float(np.median(np.abs(t[known] - middle))), _EQUAL)
    return np.asarray(known & (t <= middle + _OUTLIER * spread))


def neighbour_reference(t: ArrayLike) -> float:
    """Median temperature [K] of the sound ones among neighbours (n,); NaN where fewer than six are."""
    t = np.asarray(t, dtype=float)
    kept = t[sound(t)]
    return float(np.median(kept)) if kept.size >= LEAST_NEIGHBOURS else nan


def pv_indication(shares: Mapping[str, float]) -> Indication:
    """What the warm part of a module is consistent with, the shares that say so, and how to verify it.

    shares: `warm_share` of the module's area; `along` and `across`, the extent of the warm part over two sides of the
    module; `centre_along` and `centre_across`, where its middle lies along them, 0 to 1; `filled`, the share of its own
    box that is warm.  Missing or NaN ones speak against every pattern that asks for them.
    """
    looks = (dict(shares), _turned(shares))
    best = max(
        ((row, look) for row in _table()["row"] for look in looks), key=lambda one: _fit(one[0], _with_thirds(one[1]))
    )
    row, look = best
    cues = _with_thirds(look)
    words = row if _fit(row, cues) >= _table()["least_fit"] else _table()["none"]
    used = [cue["name"] for cue in words.get("cue", ())] or list(shares)
    evidence = {name: float(cues[name]) for name in used if isfinite(cues.get(name, nan))}
    how = of_table(words["verify_by"])
    return Indication(words["pattern"], state("consistent", says=of_table(words["says"]), how=how), evidence, how)


def _fit(row: Mapping[str, Any], cues: Mapping[str, float]) -> float:
    """How well cues agree with one row, 0 to 1: as well as the weakest."""
    bounds = (CueBounds(cue["name"], cue["against"], cue["for"]) for cue in row["cue"])
    return min(one.fit(cues.get(one.name, nan)) for one in bounds)


def _turned(shares: Mapping[str, float]) -> dict[str, float]:
    """The same with the other side for the long one: a module seen at an angle may look turned."""
    other = {"along": "across", "across": "along", "centre_along": "centre_across", "centre_across": "centre_along"}
    return {other.get(name, name): value for name, value in shares.items()}


def _with_thirds(shares: Mapping[str, float]) -> dict[str, float]:
    """With `off_third`, how far its middle lies from the middle of the nearest third of the module."""
    centre = shares.get("centre_across", nan)
    return {**shares, "off_third": min(abs(centre - third) for third in (1 / 6, 1 / 2, 5 / 6))}


@cache
def _table() -> dict[str, Any]:
    return tomllib.loads((files("irsurvey.assess") / "pv.toml").read_text("utf-8"))
