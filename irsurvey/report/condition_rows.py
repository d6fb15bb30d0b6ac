"""The conditions of a survey as rows of a table: what was recorded, what it leaves to be claimed, what to record."""

from __future__ import annotations

from dataclasses import dataclass, replace

from irsurvey import numbers, texts
from irsurvey.assess.conditions import requirement_sets
from irsurvey.model import ConditionCheck
from irsurvey.numbers import SI, Style
from irsurvey.report.sentences import in_style

_KEPT = ("W/m²",)
"""Units of a condition that are the same in every style: of irradiance."""
_WORST_FIRST = ("not met", "not recorded", "met")


@dataclass(frozen=True, slots=True)
class Row:
    """One requirement and all groups that it found alike: what was recorded there, what to write down next time."""

    check: ConditionCheck
    groups: str
    recorded: str
    to_record: str
    leaves: str


def rows(review: tuple[ConditionCheck, ...], *, style: Style = SI) -> tuple[Row, ...]:
    """The rows of a review, what is not met first; groups that fared alike share one."""
    alike: dict[ConditionCheck, list[ConditionCheck]] = {}
    for check in review:
        alike.setdefault(replace(check, group="", value=None), []).append(check)
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
        replace(check, check=in_style(check.check, style), requirement=in_style(check.requirement, style)),
        groups=_listed([one.group for one in same], groups),
        recorded=numbers.with_symbol(_ends(tuple(ends)), to.symbol),
        to_record=((requirement and requirement.stated_by) or check.check) if check.verdict == "not recorded" else "",
        leaves=texts.kept(check.limits_to),
    )


def _ends(told: tuple[str, ...]) -> str:
    """A value, or the least and the largest of several."""
    return texts.say("from_to", low=told[0], high=told[1]) if len(told) > 1 else (told or (numbers.NOTHING,))[0]


def _listed(named: list[str], groups: int) -> str:
    """Groups by name, "all" where it is all of several; a frame outside every group has none."""
    if len(set(named)) == groups > 1:
        return texts.say("all_groups")
    return ", ".join(name for name in dict.fromkeys(named) if name)
