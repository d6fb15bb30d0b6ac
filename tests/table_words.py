"""The words and sentences of the data files of irsurvey/assess that a reader of a report sees."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterator
from importlib.resources import files
from importlib.resources.abc import Traversable
from typing import Any

ASSESS = files("irsurvey.assess")

_KEY = re.compile(r"\w+[._]\w[\w.]*")
"""A key of the survey file: "wind_m_s", "survey.client"."""


def table_words() -> dict[str, list[str]]:
    """File, or folder, of irsurvey/assess → its words; what two of them share stands with the first."""
    found = {
        "criteria": [word for table in _folder("criteria") for word in _of_criterion(table)],
        "limits.toml": [word for row in _table("limits.toml")["limit"] for word in _of_limit(row)],
        "conditions": [
            word for table in _folder("conditions") for row in table["requirement"] for word in _of_requirement(row)
        ],
        "indications.toml": list(_of_patterns(_table("indications.toml"))),
        "pv.toml": list(_of_patterns(_table("pv.toml"))),
        "repairs.toml": list(_leaves(_table("repairs.toml"))),
        "measurements.toml": [
            word for row in _table("measurements.toml")["measurement"] for word in _of_measurement(row)
        ],
        "checklist.toml": [word for row in _table("checklist.toml")["item"] for word in _of_item(row)],
    }
    seen: set[str] = set()
    once: dict[str, list[str]] = {}
    for place, words in found.items():
        once[place] = [word for word in dict.fromkeys(words) if word not in seen]
        seen.update(words)
    return once


def has_words(text: str) -> bool:
    """Whether there is anything to translate: more than numbers, units, keys and names in capitals."""
    return re.search(r"[a-z]{2}", _KEY.sub("", text)) is not None


def _worded(*texts: str) -> Iterator[str]:
    yield from (text for text in texts if has_words(text))


def _of_criterion(table: dict[str, Any]) -> Iterator[str]:
    yield from _worded(table["source"], table["edition"])
    for row in table["classes"]:
        yield from (row["name"], row["statement"])


def _of_limit(row: dict[str, Any]) -> Iterator[str]:
    yield row["what"]
    yield from _worded(row["source"], row["edition"])


def _of_requirement(row: dict[str, Any]) -> Iterator[str]:
    yield from (row["check"], *([row["short"]] if "short" in row else ()))
    yield from _worded(row.get("stated_by", ""), row["unit"], row["source"])


def _of_patterns(table: dict[str, Any]) -> Iterator[str]:
    """Rows, and what is said where none of them fits."""
    for row in (*table["row"], *(one for one in table.values() if isinstance(one, dict))):
        yield from (row["pattern"], row["says"], row["verify_by"])


def _of_measurement(row: dict[str, Any]) -> Iterator[str]:
    yield from (row["how"], row["gives"])
    for left in row.get("leaves", ()):
        yield left["term"].replace("_", " ")
        yield from _worded(left["unit"])


def _of_item(row: dict[str, Any]) -> Iterator[str]:
    yield row["item"]
    yield from _worded(row["stated_by"])


def _leaves(table: dict[str, Any]) -> Iterator[str]:
    for entry in table.values():
        yield from _leaves(entry) if isinstance(entry, dict) else (entry,)


def _folder(name: str) -> list[dict[str, Any]]:
    inside = sorted((entry for entry in (ASSESS / name).iterdir()), key=lambda entry: entry.name)
    return [_read(entry) for entry in inside if entry.name.endswith(".toml")]


def _table(name: str) -> dict[str, Any]:
    return _read(ASSESS / name)


def _read(entry: Traversable) -> dict[str, Any]:
    return tomllib.loads(entry.read_text("utf-8"))
