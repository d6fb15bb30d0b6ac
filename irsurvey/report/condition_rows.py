"""The conditions of a survey as rows of a table: what was recorded, what it leaves to be claimed, what to record."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace

from irsurvey import numbers, texts
from irsurvey.assess.conditions import requirement_sets
from irsurvey.model import ConditionCheck
from irsurvey.numbers import SI, Style
from irsurvey.report.sentences import in_style

_KEPT = ("W/m²",)
"""Units of a condition that are the same in every style: of irradiance."""
_DERIVED = re.compile(r"(?P<rule>.+) = (?P<bound>\d[\d.]*(e[+-]\d+)?) \S+")
"""A rule and the bound that it gives with the numbers of an element."""
_LAST_NUMBER = re.compile(r"(?P<number>\d[\d.,]*(e[+-]\d+)?)\s\S+$")
_WORST_FIRST = ("not met", "not recorded", "met")


@dataclass(frozen=True, slots=True)
class Row:
    """One requirement and all groups that it found alike: what was recorded there, what to write down next time.

    Elements of one group have bounds of their own, by their U-value or time constant: of several, the check names the
    least and the largest."""

    check: ConditionCheck
    groups: str
    recorded: str
    to_record: str
    leaves: str

    @property
    def is_met(self) -> bool:
        return self.check.verdict == "met"


def rows(review: tuple[ConditionCheck, ...], *, style: Style = SI) -> tuple[Row, ...]:
    """The rows of a review, what is not met first; groups that fared alike share one."""
    alike: dict[ConditionCheck, list[ConditionCheck]] = {}
    for check in review:
        alike.setdefault(replace(check, group="", value=None, requirement=_rule(check)), []).append(check)
    groups = {check.group for check in review}
    ordered = sorted(alike.values(), key=lambda same: _WORST_FIRST.index(same[0].verdict))
    return tuple(_row(same, len(groups), style) for same in ordered)


def _row(same: list[ConditionCheck], groups: int, style: Style) -> Row:
    check = same[0]
    known = {
        words: one
        for group in requirement_sets()
        for one in group.requirements
        for words in (one.check, texts.state("check_assumed", check=one.check))
    }
    requirement = known.get(check.check)
    values = sorted(one.value for one in same if one.value is not None)
    to = (
        numbers.Scale(symbol)
        if (symbol := requirement.unit if requirement else "") in _KEPT
        else (numbers.expressed(symbol, style))
    )
    ends = dict.fromkeys(
        numbers.number(to.factor * value + to.shift, 3, style=style) for value in (values[:1] + values[-1:])
    )
    return Row(
        replace(check, check=in_style(check.check, style), requirement=_required(same, style)),
        groups=_listed([one.group for one in same], groups),
        recorded=numbers.with_symbol(_ends(tuple(ends)), to.symbol),
        to_record=((requirement and requirement.stated_by) or check.check) if check.verdict == "not recorded" else "",
        leaves=texts.kept(check.limits_to),
    )


def _rule(check: ConditionCheck) -> str:
    """A requirement without the bound that follows from an element's own numbers: "≥ 3/U" of "≥ 3/U = 8.57 K"."""
    derived = _DERIVED.fullmatch(check.requirement)
    return derived["rule"] if derived else check.requirement


def _required(same: list[ConditionCheck], style: Style) -> str:
    """What is required, in words; where bounds differ, from the least to the largest: "≥ 3/U = 1.07 to 14.3 K"."""
    bounds = {_bound(one): one.requirement for one in same}
    least, largest = (in_style(bounds[end], style) for end in (min(bounds), max(bounds)))
    low, high = (_LAST_NUMBER.search(words) for words in (least, largest))
    if least == largest or not (low and high):
        return least
    return least[: low.start()] + texts.say("from_to", low=low["number"], high=high[0])


def _bound(check: ConditionCheck) -> float:
    """The number of a derived bound; the same for all where there is none, as then all requirements are alike."""
    derived = _DERIVED.fullmatch(check.requirement)
    return float(derived["bound"]) if derived else 0.0


def _ends(told: tuple[str, ...]) -> str:
    """A value, or the least and the largest of several."""
    return texts.say("from_to", low=told[0], high=told[1]) if len(told) > 1 else (told or (numbers.NOTHING,))[0]


def _listed(named: list[str], groups: int) -> str:
    """Groups by name, "all" where it is all of several; a frame outside every group has none."""
    if len(set(named)) == groups > 1:
        return texts.say("all_groups")
    return ", ".join(name for name in dict.fromkeys(named) if name)
