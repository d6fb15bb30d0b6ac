"""The levels of the survey file, survey → group → frame: what counts for one frame, and where it was stated."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from irsurvey.survey.schema import Document, Frame, Group

DEPTH = {"survey": 0, "group": 1, "frame": 2, "surface": 3}
_ALTERNATIVES = (
    {"reflected_c", "reflected_from"},
    {"emissivity", "material"},
    {"min_pixels", "min_area_m2"},
    {"distance_m", "distance_fraction"},
    {"wind_m_s", "wind_fraction"},
    {"known_length_m", "known_length_fraction"},
)
"""Keys that say the same thing in different ways: a level that states one drops the others of the levels above."""


@dataclass(frozen=True, slots=True)
class Stated:
    """A value of the survey file, its source as reports name it, and how deep the level lies that states it."""

    value: Any
    source: str
    depth: int


@dataclass(frozen=True, slots=True)
class Levels:
    """What speaks about one frame."""

    document: Document
    group: Group | None
    frame: Frame
    id: str

    def tables(self) -> tuple[tuple[str, Document | Group | Frame], ...]:
        """(source, table) from the survey down to the frame."""
        survey: tuple[str, Document | Group | Frame] = ("survey", self.document)
        group: tuple[tuple[str, Document | Group | Frame], ...] = (("group", self.group),) if self.group else ()
        return (survey, *group, ("frame", self.frame))

    def stated(self, name: str, logged: Mapping[str, Mapping[str, float]] | None = None) -> dict[str, Stated]:
        """Keys of the table `name`, the lowest level last.

        `logged`: values of the logs by source; at its own level a log counts before a constant.
        """
        result: dict[str, Stated] = {}
        for source, table in self.tables():
            own = {k: Stated(v, source, DEPTH[source]) for k, v in getattr(table, name).stated().items()}
            _lay_over(result, own)
            _lay_over(result, {k: Stated(v, "log", DEPTH[source]) for k, v in (logged or {}).get(source, {}).items()})
        return result

    def choice(self, name: str) -> Stated | None:
        """The key `name` of the lowest level that states it; at survey level it stands in [survey] or on top."""
        found = None
        for source, table in self.tables():
            is_top = isinstance(table, Document) and name in table.survey.model_fields_set
            place = table.survey if isinstance(table, Document) and is_top else table
            if name in place.model_fields_set:
                found = Stated(getattr(place, name), source, DEPTH[source])
        return found

    def name(self, key: str) -> str | None:
        """The key `key` of the frame, else of its group, which the survey as a whole cannot state."""
        found = self.choice(key)
        return None if found is None or found.source == "survey" else found.value

    def where(self, source: str, key: str) -> str:
        """Key path of a key at a level."""
        if source == "group" and self.group:
            return f"group[{self.group.id}].{key}"
        return f"frame[{self.id}].{key}" if source == "frame" else key


def _lay_over(below: dict[str, Stated], above: Mapping[str, Stated]) -> None:
    for dropped in _dropped(above):
        below.pop(dropped, None)
    below.update(above)


def _dropped(keys: Iterable[str]) -> set[str]:
    keys = set(keys)
    return {key for alternatives in _ALTERNATIVES if alternatives & keys for key in alternatives - keys}
