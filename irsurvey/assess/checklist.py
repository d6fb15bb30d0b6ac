"""What a complete report states, and which of it this one does."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Final

from irsurvey.model.conclusions import ChecklistItem
from irsurvey.texts import of_table

REPORTS: Final = ("simplified report", "full report")
"""Kinds of report an item may be asked by; a full one states what a simplified one does, and more."""


@dataclass(frozen=True, slots=True)
class Asked:
    """One item of checklist.toml; `stated_by`: the keys of the survey file that would state it, or what makes it."""

    name: str
    item: str
    asked_by: str  # one of REPORTS
    stated_by: str


@cache
def asked() -> tuple[Asked, ...]:
    """All items of a complete report, those of a simplified one first (EN 13187 as applied [S])."""
    table = tomllib.loads((files("irsurvey.assess") / "checklist.toml").read_text("utf-8"))
    return tuple(
        Asked(row["name"], of_table(row["item"]), row["asked_by"], of_table(row["stated_by"])) for row in table["item"]
    )


def checklist(present: Mapping[str, str]) -> tuple[ChecklistItem, ...]:
    """Every item, present where the report states it.

    `present`: where the report states an item, by its name; absent or empty: it does not.  KeyError for a name that is
    no item's.
    """
    items = {one.name: one for one in asked()}
    for name in present:
        items[name]
    return tuple(
        ChecklistItem(one.item, one.asked_by, bool(present.get(name)), present.get(name) or one.stated_by)
        for name, one in items.items()
    )
