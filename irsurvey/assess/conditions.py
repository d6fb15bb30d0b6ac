"""Were the conditions good enough: requirements as data, held against what was recorded."""

from __future__ import annotations

import tomllib
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from difflib import get_close_matches
from functools import cache, reduce
from importlib.resources import files
from math import isfinite, isnan
from typing import Any, Final

from irsurvey.errors import Fault, SurveyError
from irsurvey.model.conclusions import ConditionCheck
from irsurvey.texts import of_table, state

LEVELS: Final = ("not valid", "qualitative", "quantitative")
"""What a survey may claim, from least to most."""

DEFAULTS: Final[Mapping[tuple[str, str], tuple[str, ...]]] = {
    ("building", "envelope"): ("en-13187",),
    ("building", "air-leakage"): ("astm-e1186",),
    ("building", "roof-moisture"): ("astm-c1153",),
    ("electrical", "contact"): ("nfpa-70b",),
    ("electrical", "voltage-driven"): (),
    ("electrical", "pv"): ("pv-inspection",),
}
"""Sets of requirements that count where a survey names none that suits its kind and method."""

ASSUMED: Final[Mapping[str, float]] = {"is_heavy": 1.0, "is_outside": 1.0, "is_heated": 0.0, "unheated_before": 0.0}
"""What `when` of a requirement takes for granted where nobody recorded it [house]: the stricter of the two, but for a
building, which is taken to have been heated unless the survey says otherwise."""

Recorded = Mapping[str, float | None]
"""What is known, by the `key` of the requirement files; what is absent, None or NaN was not recorded."""


@dataclass(frozen=True, slots=True)
class Requirement:
    """One requirement: the number recorded under `key`, in `unit`, must keep its bound.

    With `over` or `times` the bound is `at_least` divided by, or times, another recorded number, called `symbol`.  With
    `when` it applies only where the numbers recorded under those keys are these (see `ASSUMED`).  `short` names it in
    reasons, `stated_by` the keys of the survey file that state it.
    """

    check: str
    key: str
    unit: str
    source: str
    mark: str
    if_not_met: str  # the most that may then be claimed, one of LEVELS
    if_not_recorded: str
    at_least: float | None = None
    at_most: float | None = None
    below: float | None = None
    over: str = ""
    times: str = ""
    symbol: str = ""
    when: Mapping[str, float] = field(default_factory=dict)
    short: str = ""
    stated_by: str = ""

    def applies(self, recorded: Recorded) -> bool:
        """Whether it is asked under the circumstances recorded, or taken for granted."""
        return all(_given(recorded, key, ASSUMED[key]) == wanted for key, wanted in self.when.items())

    def is_assumed(self, recorded: Recorded) -> bool:
        """Whether nobody recorded some of the circumstances under which it is asked."""
        return any(_given(recorded, key) is None for key in self.when)

    def bound(self, recorded: Recorded) -> float | None:
        """The bound as a number; None where another number it depends on was not recorded or is not positive."""
        fixed = next(bound for bound in (self.at_least, self.at_most, self.below) if bound is not None)
        if not (self.over or self.times):
            return fixed
        other = _given(recorded, self.over or self.times)
        if other is None or not (isfinite(other) and other > 0):
            return None
        return fixed / other if self.over else fixed * other

    def text(self, recorded: Recorded) -> str:
        """The bound in one short phrase: "≥ 10 K", "≥ 3/U = 8.6 K"; without the number where that is not known."""
        sign = "≥" if self.at_least is not None else "≤" if self.at_most is not None else "<"
        bound = self.bound(recorded)
        if not self.symbol:
            return f"{sign} {bound:g} {self.unit}"
        product = f"{self.at_least:g}/{self.symbol}" if self.over else f"{self.at_least:g} {self.symbol}"
        return f"{sign} {product}" if bound is None else f"{sign} {product} = {bound:.3g} {self.unit}"

    def verdict(self, recorded: Recorded) -> str:
        """ "met", "not met", or "not recorded" where the number or its bound is not known."""
        value, bound = _given(recorded, self.key), self.bound(recorded)
        if value is None or bound is None:
            return "not recorded"
        if self.below is not None:
            return "met" if value < bound else "not met"
        is_met = value >= bound if self.at_least is not None else value <= bound
        return "met" if is_met else "not met"

    def allows(self, verdict: str) -> str | None:
        """The most that may be claimed because of a verdict; None where it is met."""
        return {"not met": self.if_not_met, "not recorded": self.if_not_recorded}.get(verdict)


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
            requirements=tuple(_requirement(row) for row in table["requirement"]),
        )
        for table in tables
    ]
    return tuple(sorted(sets, key=lambda one: one.name))


def standards_of(kind: str, method: str) -> tuple[str, ...]:
    """Names of the sets that count for a kind and method of survey by default."""
    return DEFAULTS.get((kind, method), ())


def suited(standards: Sequence[str], kind: str, method: str) -> tuple[str, ...]:
    """Those of the named sets that hold for this kind and method, or the default ones where none does.

    A survey may name sets for all its groups at once.  Raises `SurveyError` for a name that does not exist.
    """
    named = [_set(name) for name in standards]
    fitting = tuple(one.name for one in named if one.kind == kind and method in one.methods)
    return fitting or standards_of(kind, method)


def review(standards: Sequence[str], recorded: Recorded, group: str = "") -> tuple[ConditionCheck, ...]:
    """One row for each requirement of these sets that applies under what was recorded.

    Keys of `recorded`: air_difference_k, air_difference_24h_min_k, hours_difference_held, outdoor_change_24h_k,
    outdoor_change_survey_k, indoor_change_survey_k, hours_steady, hours_since_sun, hours_since_rain, wind_m_s,
    irradiance_w_m2, pressure_difference_pa (magnitudes), hours_furniture_clear, time_constant_h, u_value_w_m2k,
    load_ratio (0…1), and the yes or no (1 or 0) of `ASSUMED`.
    """
    return tuple(
        ConditionCheck(
            group=group,
            check=_check(one, recorded),
            requirement=one.text(recorded),
            value=None if verdict == "not recorded" else recorded.get(one.key),
            verdict=verdict,
            source=f"{one.source} [{one.mark}]",
            limits_to=one.allows(verdict),
        )
        for one, verdict in _judged(standards, recorded)
    )


def claim(standards: Sequence[str], kind: str, method: str, recorded: Recorded) -> tuple[str, str]:
    """What may be claimed (one of LEVELS) and why: the least that any requirement leaves.

    Of the named sets those count that suit the kind and method (see `suited`); `recorded` as for `review`.  Where no
    requirements exist, the claim is qualitative.  The reason names what fails at the level that decides, then what
    nobody recorded, with the keys that would state it; what several sets ask of one thing is told together.
    """
    names = suited(standards, kind, method)
    if not names:
        return "qualitative", state("no_requirements", method=method)
    judged = [(one, verdict) for one, verdict in _judged(names, recorded) if verdict != "met"]
    level = min((one.allows(verdict) or LEVELS[-1] for one, verdict in judged), key=LEVELS.index, default=LEVELS[-1])
    deciding = [(one, verdict) for one, verdict in judged if one.allows(verdict) == level]
    failed: dict[tuple[str, str], list[str]] = {}
    for one, verdict in deciding:
        if verdict == "not met":
            told = _check(one, recorded), f"{_given(recorded, one.key):.4g} {one.unit}"
            failed.setdefault(told, []).append(one.text(recorded))
    not_met = [
        state("requirement_not_met", check=check, value=value, bound=reduce(_both, dict.fromkeys(bounds)))
        for (check, value), bounds in failed.items()
    ]
    missing = dict.fromkeys(_named(one) for one, verdict in deciding if verdict == "not recorded")
    unknown = [state("requirement_not_recorded", what=", ".join(missing))] if missing else []
    reasons = [*not_met, *unknown]
    if level != LEVELS[-1]:
        return level, "; ".join(reasons)
    if missing:
        return level, state("requirements_met_as_recorded", missing=reasons[0])
    return level, state("requirements_met")


def overall(frames: Iterable[tuple[str, str, str]]) -> tuple[str, str]:
    """What a whole survey may claim and why, from its frames, each given as its id, level and reason.

    The level that more than half of the frames reach; those that may claim less are named, and so are their reasons:
    one sunlit wall does not take the claim from the others, nor they give theirs to it.  To be given the frames that
    were analysed; without any the survey is not valid.
    """
    frames = tuple(frames)
    if not frames:
        return "not valid", state("none_analysed")
    ordered = sorted((claimed for _, claimed, _ in frames), key=LEVELS.index)
    level = ordered[(len(ordered) - 1) // 2]
    told: dict[tuple[str, str], list[str]] = {}
    for frame, claimed, reason in frames:
        if LEVELS.index(claimed) <= LEVELS.index(level) and (claimed != level or level != LEVELS[-1]):
            told.setdefault((claimed, reason), []).append(frame)
    if not told:
        return level, "; ".join(dict.fromkeys(reason for _, claimed, reason in frames if claimed == level))
    if len(told) == 1 and len(next(iter(told.values()))) == len(frames):
        return level, next(iter(told))[1]
    exceptions = [
        f"{_listed(ids)}: {reason}"
        if claimed == level
        else state("frames_claim", frames=_listed(ids), claim=state(claimed), reason=reason)
        for (claimed, reason), ids in sorted(told.items(), key=lambda one: LEVELS.index(one[0][0]))
    ]
    return level, "; ".join(exceptions)


_LISTED = 6
"""Frames named one by one in the reason for a whole survey; more are counted."""


def _listed(ids: Sequence[str]) -> str:
    listed = ", ".join(ids[:_LISTED])
    return state("frames_and_more", frames=listed, count=len(ids) - _LISTED) if len(ids) > _LISTED else listed


def _requirement(row: Mapping[str, Any]) -> Requirement:
    """One row of a file, its words as the table of texts has them."""
    words = {key: of_table(row[key]) for key in ("check", "short", "stated_by", "unit", "source") if key in row}
    return Requirement(**{**row, **words})


def _judged(standards: Sequence[str], recorded: Recorded) -> Iterator[tuple[Requirement, str]]:
    for name in standards:
        for one in _set(name).requirements:
            if one.applies(recorded):
                yield one, one.verdict(recorded)


def _set(name: str) -> RequirementSet:
    known = {one.name: one for one in requirement_sets()}
    if name not in known:
        close = get_close_matches(name, known, 1)
        remedy = f"did you mean {close[0]!r}?" if close else ", ".join(known)
        raise SurveyError(Fault("standards", "the name of a set of requirements", repr(name), remedy))
    return known[name]


def _given(recorded: Recorded, key: str, otherwise: float | None = None) -> float | None:
    value = recorded.get(key)
    return otherwise if value is None or isnan(value) else value


def _check(one: Requirement, recorded: Recorded) -> str:
    return state("check_assumed", check=one.check) if one.is_assumed(recorded) else one.check


def _both(one: str, other: str) -> str:
    return state("bounds", one=one, other=other)


def _named(one: Requirement) -> str:
    words = one.short or one.check
    return f"{words} ({one.stated_by})" if one.stated_by else words
