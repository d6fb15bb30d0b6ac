"""Absolute limits: what the materials and insulation that meet in a part bear, and what is left of it at a load."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from difflib import get_close_matches
from functools import cache
from importlib.resources import files
from types import MappingProxyType
from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.constants import ZERO_CELSIUS
from irsurvey.errors import Fault, SurveyError
from irsurvey.texts import of_table

LOAD_EXPONENTS: Final = (1.6, 2.0)
"""A rise grows as load^n: 2 for a constant resistance with linear loss, 1.6 for free convection alone [S]."""


@dataclass(frozen=True, slots=True)
class Limit:
    """The highest temperature [K] of one part, as its surface shows it, and the rise [K] allowed at rated load.

    `t_sure` is below `t_max` where it is only known within a range how much cooler than what the limit holds for the
    surface is: above `t_max` the limit is exceeded, up to `t_sure` it is kept.  `rise` None: none is stated that grows
    with load.  `mark` says how far to trust it (`criteria.MARKS`); of a limit made of two parts there may be two.
    """

    name: str
    what: str
    t_max: float
    t_sure: float
    rise: float | None
    source: str
    edition: str
    mark: str
    notes: str = ""


@cache
def limits() -> Mapping[str, Limit]:
    """All built-in limits by name, in the order of the table."""
    table = tomllib.loads((files("irsurvey.assess") / "limits.toml").read_text("utf-8"))
    return MappingProxyType({row["name"]: _limit(row) for row in table["limit"]})


def lowest(names: Sequence[str]) -> Limit:
    """The limit of a part in which all these meet: the lowest temperature and the lowest rise of any of them [S].

    Where the two come from different limits the name, source and mark tell both.
    Raises `SurveyError` for a name that does not exist, and without any name.
    """
    known = limits()
    faults = [
        Fault("limits", "the name of an absolute limit", repr(name), _nearest(name))
        for name in names
        if name not in known
    ]
    if faults or not names:
        raise SurveyError(*(faults or [Fault("limits", "the name of an absolute limit", "none")]))
    found = [known[name] for name in dict.fromkeys(names)]
    least = min(found, key=lambda limit: (limit.t_max, float("inf") if limit.rise is None else limit.rise))
    by_rise = [(limit.rise, limit) for limit in found if limit.rise is not None]
    rise, of_rise = min(by_rise, key=lambda one: one[0], default=(None, least))
    least = replace(least, t_sure=min(limit.t_sure for limit in found))
    if rise is None or rise == least.rise:
        return least
    return replace(
        least,
        name=f"{least.name} + {of_rise.name}",
        what=f"{least.what}; {of_rise.what}",
        rise=rise,
        source=f"{least.source}; {of_rise.source}",
        edition=f"{least.edition}; {of_rise.edition}",
        mark=least.mark if least.mark == of_rise.mark else f"{least.mark}; {of_rise.mark}",
        notes=" ".join(filter(None, (least.notes, of_rise.notes))),
    )


def allowed_now(
    limit: Limit, t_ambient: ArrayLike, load_ratio: ArrayLike
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Lowest and highest temperature [K] a part may have at this load (over rated) and ambient air, n from 2.0 to 1.6.

    T_ambient + rise·(load/rated)^n, and never more than the limit itself: a cool day does not buy rise.  Nor does a
    load above rating, which counts as rated.  NaN for a load that is negative or not known.  A limit without a rise
    allows the same at any load.
    """
    t_ambient, load_ratio = np.broadcast_arrays(np.asarray(t_ambient, dtype=float), np.asarray(load_ratio, dtype=float))
    if limit.rise is None:
        return np.full(t_ambient.shape, limit.t_sure), np.full(t_ambient.shape, limit.t_max)
    share = np.minimum(np.where(load_ratio >= 0, load_ratio, np.nan), 1.0)
    most, least = (t_ambient + limit.rise * share**n for n in LOAD_EXPONENTS)
    return np.minimum(least, limit.t_sure), np.minimum(most, limit.t_max)


def _limit(row: Mapping[str, Any]) -> Limit:
    least, most = row.get("cooler_k", (0.0, 0.0))
    return Limit(
        name=row["name"],
        what=of_table(row["what"]),
        t_max=row["max_c"] - least + ZERO_CELSIUS,
        t_sure=row["max_c"] - most + ZERO_CELSIUS,
        rise=float(row["rise_k"]) if "rise_k" in row else None,
        source=of_table(row["source"]),
        edition=of_table(row["edition"]),
        mark=row["mark"],
        notes=row.get("notes", ""),
    )


def _nearest(name: str) -> str:
    close = get_close_matches(name, limits(), 1)
    return f"did you mean {close[0]!r}?" if close else "one of " + ", ".join(limits())
