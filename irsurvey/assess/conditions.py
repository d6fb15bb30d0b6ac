"""Were the conditions good enough: requirements as data, held against what was recorded."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from math import isnan
from typing import Final

from irsurvey.model.report import ConditionCheck

LEVELS: Final = ("not valid", "qualitative", "quantitative")
"""What a survey may claim, from least to most."""


@dataclass(frozen=True, slots=True)
class Requirement:
    """One requirement; the number recorded under `key`, in `unit`, must keep its bound."""

    check: str
    key: str
    unit: str
    source: str
    mark: str
    if_not_met: str  # the most that may then be claimed, one of LEVELS
    if_not_recorded: str
    at_least: float | None = None
    at_most: float | None = None

    @property
    def text(self) -> str:
        """The bound in one short phrase."""
        sign, bound = ("≥", self.at_least) if self.at_least is not None else ("≤", self.at_most)
        return f"{sign} {bound:g} {self.unit}"

    def verdict(self, value: float | None) -> str:
        """ "met", "not met", or "not recorded" where there is no value."""
        if value is None or isnan(value):
            return "not recorded"
        low_enough = self.at_most is None or value <= self.at_most
        high_enough = self.at_least is None or value >= self.at_least
        return "met" if low_enough and high_enough else "not met"


@dataclass(frozen=True, slots=True)
class RequirementSet:
    """The requirements of one standard for some methods of survey."""

    name: str
    kind: str
    methods: tuple[str, ...]
    requirements: tuple[Requirement, ...]


@cache
def requirement_sets() -> tuple[RequirementSet, ...]:
    """All built-in sets of requirements, by name."""
    folder = files("irsurvey.assess") / "conditions"
    tables = [tomllib.loads(entry.read_text("utf-8")) for entry in folder.iterdir() if entry.name.endswith(".toml")]
    sets = [
        RequirementSet(
            name=table["name"],
            kind=table["kind"],
            methods=tuple(table["methods"]),
            requirements=tuple(Requirement(**row) for row in table["requirement"]),
        )
        for table in tables
    ]
    return tuple(sorted(sets, key=lambda one: one.name))


def review(kind: str, method: str, recorded: Mapping[str, float | None], group: str = "") -> tuple[ConditionCheck, ...]:
    """One row per requirement for this kind and method of survey.

    `recorded` holds what is known, by the `key` of the requirement files: `air_difference_k` (its
    magnitude), `wind_m_s`, `hours_since_sun`, `hours_since_rain`; `load_ratio` (0…1).  What is absent,
    None or NaN was not recorded.
    """
    return tuple(
        ConditionCheck(
            group=group,
            check=one.check,
            requirement=one.text,
            value=None if one.verdict(recorded.get(one.key)) == "not recorded" else recorded.get(one.key),
            verdict=one.verdict(recorded.get(one.key)),
            source=f"{one.source} [{one.mark}]",
        )
        for one in _requirements(kind, method)
    )


def claim(kind: str, method: str, recorded: Mapping[str, float | None]) -> tuple[str, str]:
    """What may be claimed (one of LEVELS) and why: the least that any requirement leaves.

    `recorded` as for `review`.  Where no requirements exist for the method, the claim is qualitative.
    """
    requirements = _requirements(kind, method)
    if not requirements:
        return "qualitative", f"no requirements on the conditions are held for the method {method}"
    limits: list[tuple[str, str]] = []
    for one in requirements:
        value = recorded.get(one.key)
        verdict = one.verdict(value)
        if verdict == "not met":
            limits.append((one.if_not_met, f"{one.check}: {value:g} {one.unit}, required {one.text}"))
        elif verdict == "not recorded":
            limits.append((one.if_not_recorded, f"{one.check}: not recorded, required {one.text}"))
    level = min((limit for limit, _ in limits), key=LEVELS.index, default="quantitative")
    reasons = [reason for limit, reason in limits if limit == level]
    return level, "; ".join(reasons) or "all requirements on the conditions are met"


def _requirements(kind: str, method: str) -> tuple[Requirement, ...]:
    return tuple(
        requirement
        for one in requirement_sets()
        if one.kind == kind and method in one.methods
        for requirement in one.requirements
    )
