"""What the pattern of a finding is consistent with, from its measured cues; an indication, never a diagnosis."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from math import isfinite, isnan, nan
from typing import Any, Final

from irsurvey.assess.severity import LEAST_EMISSIVITY
from irsurvey.model.report import Indication
from irsurvey.texts import of_table, state

NO_PATTERN: Final = "no typical pattern"
REFLECTION: Final = "possible reflection"
MOISTURE: Final = "moisture"
_OF_A_SHAPE: Final = "four_sidedness"
"""A cue that every region has whose shape could be measured."""


@dataclass(frozen=True, slots=True)
class CueBounds:
    """Where one cue speaks against a pattern and where it speaks fully for it."""

    name: str
    against: float
    supports: float
    may_be_unknown: bool = False

    def fit(self, value: float) -> float:
        """0 where it speaks against, 1 where it speaks for it, in proportion between."""
        if isnan(value):
            return float(self.may_be_unknown)
        return min(max((value - self.against) / (self.supports - self.against), 0.0), 1.0)


@dataclass(frozen=True, slots=True)
class Look:
    """One look of a pattern: the cues that must agree on it, and when it can be at all."""

    pattern: str
    says: str
    verify_by: str
    sense: str  # "loss" | "cold" | "hot"
    methods: tuple[str, ...]
    mark: str
    cues: tuple[CueBounds, ...]
    changes_with_pressure: bool = False

    def fit(self, cues: Mapping[str, float]) -> float:
        """How well cues agree with it, 0 to 1: as well as the weakest; 1 where none is asked for."""
        return min((one.fit(cues.get(one.name, nan)) for one in self.cues), default=1.0)


@cache
def looks() -> tuple[Look, ...]:
    """All looks of `indications.toml`, in its order."""
    return tuple(
        Look(
            pattern=row["pattern"],
            says=row["says"],
            verify_by=row["verify_by"],
            sense=row["sense"],
            methods=tuple(row["methods"]),
            mark=row["mark"],
            cues=tuple(
                CueBounds(cue["name"], cue["against"], cue["for"], cue.get("may_be_unknown", False))
                for cue in row.get("cue", ())
            ),
            changes_with_pressure=row.get("changes_with_pressure", False),
        )
        for row in _table()["row"]
    )


def indicate(
    cues: Mapping[str, float],
    *,
    method: str,
    viewed_from: str | None,
    sense: str,
    emissivity: float,
    is_glass: bool,
    pressure_change: bool | None,
    outward: bool = True,
) -> Indication:
    """What a region is consistent with, the cues that say so, and how to verify it.

    cues by name, NaN where not measured; sense "hot" or "cold"; emissivity the lowest of its surfaces, in band;
    pressure_change: whether it changed between two frames with and without a pressure difference, None where none
    were compared; outward: whether heat flows from inside to outside, as in a heated building.  A reflecting surface
    shows no pattern of its own; a change with the pressure is air, whatever its shape.
    """
    if is_glass or not emissivity >= LEAST_EMISSIVITY:  # an unknown emissivity is a low one
        return _said("reflection", {"emissivity": emissivity})
    if pressure_change:
        return _said("pressure", {"changed_with_pressure": 1.0, **cues})
    is_loss = sense == ("cold" if (viewed_from != "outside") == outward else "hot")
    possible = [
        look for look in looks() if method in look.methods and _is_possible(look, sense, is_loss, pressure_change)
    ]
    best = max(possible, key=lambda look: look.fit(cues), default=None)
    known = {} if pressure_change is None else {"changed_with_pressure": 0.0}
    if best is not None and best.fit(cues) >= _table()["least_fit"]:
        used = [one.name for one in best.cues] or list(cues)
        evidence = known | {name: cues.get(name, nan) for name in used}
        return _indication(best.pattern, best.says, best.verify_by, evidence)
    if isnan(cues.get(_OF_A_SHAPE, nan)):
        return _said("unclear", known | dict(cues))
    return _said("none" if is_loss else "other_sense", known | dict(cues))


def _is_possible(look: Look, sense: str, is_loss: bool, pressure_change: bool | None) -> bool:
    agrees = {"loss": is_loss, "cold": sense == "cold", "hot": sense == "hot"}[look.sense]
    return agrees and not (look.changes_with_pressure and pressure_change is False)


def _said(what: str, evidence: Mapping[str, float]) -> Indication:
    words = _table()[what]
    return _indication(words["pattern"], words["says"], words["verify_by"], evidence)


def _indication(pattern: str, says: str, verify_by: str, evidence: Mapping[str, float]) -> Indication:
    measured = {name: float(value) for name, value in evidence.items() if isfinite(value)}
    how = of_table(verify_by)
    return Indication(pattern, state("consistent", says=of_table(says), how=how), measured, how)


@cache
def _table() -> dict[str, Any]:
    return tomllib.loads((files("irsurvey.assess") / "indications.toml").read_text("utf-8"))
