"""A reviewer's decisions file, format 1: read, checked against the report, every fault told at once."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import fields
from datetime import date
from difflib import get_close_matches
from math import isfinite
from pathlib import Path
from typing import Any, Final

from irsurvey.assess.criteria import URGENCIES, Criterion
from irsurvey.errors import Fault, UsageError
from irsurvey.model import ComponentReport, Decision, Estimate, Finding, Report, Review
from irsurvey.report import reading
from irsurvey.report.reading import told
from irsurvey.report.review.standing import (
    COMMENTED,
    DECISIONS,
    URGENCY,
    Reviewable,
    identity,
    reviewable,
    title,
)

FORMAT: Final = 1
LONGEST: Final = 20_000
"""Characters of a text in a decisions file, and what the page lets a reviewer write."""

_LARGEST = 100_000_000  # bytes: a thousand times what a report of a thousand frames needs without comments
_KEYS = ("format", "tool", "survey", "report", "reviewer", "date", "decisions")
_OF_DECISION = ("key", "id", "frame", "decision", "criterion", "class", "urgency", "comment", "on")
_EXPORTED = "export the decisions from the page of the report again"
_NUMBERS = {
    URGENCY,
    *(f.name for record in (Finding, ComponentReport) for f in fields(record) if str(f.type) == "Estimate | None"),
}
"""What decisions may be made on: every measured number of a finding or component."""
_IDENTITY = re.compile(r"[0-9a-f]{64}")
_HALF_PAIRS = re.compile(r"[\ud800-\udfff]")


def read(path: Path, report: Report, known: Mapping[str, Criterion]) -> Review:
    """The decisions in a file, for this report or another version of it; `known`: criteria by name.

    Raises UsageError with every fault of the file."""
    content = _content(path)
    faults: list[Fault] = []
    review = _Reader(path.name, faults, report, known).review(content)
    if faults:
        raise UsageError(*faults)
    assert review is not None  # only faults leave nothing
    return review


def _content(path: Path) -> Any:
    try:
        if path.stat().st_size > _LARGEST:
            raise UsageError(Fault(path.name, "a file of at most 100 MB", "a larger one", _EXPORTED))
        return reading.parsed(path.read_bytes())
    except OSError as error:
        raise UsageError(Fault(path.name, "a decisions file", error.strerror or str(error), _EXPORTED)) from error
    except (ValueError, RecursionError) as error:
        raise UsageError(Fault(path.name, "a decisions file in JSON", f"no JSON ({error})", _EXPORTED)) from error


class _Reader:
    """One pass over one file; what is wrong is added to `faults`."""

    def __init__(self, where: str, faults: list[Fault], report: Report, known: Mapping[str, Criterion]) -> None:
        self.top = where
        self.faults = faults
        self.known = known
        self.identity = identity(report)
        self.title = _whole(title(report))
        self.items = {one.key: one for one in reviewable(report)}

    def review(self, content: Any) -> Review | None:
        if not isinstance(content, dict):
            self._fault(self.top, "a decisions file, a table of its own", told(content), _EXPORTED)
            return None
        self._keys(content, _KEYS, self.top, needed=_KEYS)
        if "format" in content and (content["format"] != FORMAT or isinstance(content["format"], bool)):
            self._fault(f"{self.top}: format", str(FORMAT), told(content["format"]), "update irsurvey")
        self._tool(content)
        survey = self._text(content, "survey", self.top)
        reviewer = self._text(content, "reviewer", self.top, remedy="say who decided")
        day = self._date(content)
        made_on = content.get("report")
        if "report" in content and not (isinstance(made_on, str) and _IDENTITY.fullmatch(made_on)):
            self._fault(f"{self.top}: report", "the 64 figures that name a report", told(made_on), _EXPORTED)
        decisions = self._decisions(content, is_same=made_on == self.identity)
        if not self.faults and survey != self.title and not any(made.key in self.items for made in decisions):
            remedy = "name the folder of the report they were made on"
            self._fault(f"{self.top}: survey", told(self.title), told(survey), remedy)
        return Review(reviewer.strip(), day, str(made_on), decisions)

    def _tool(self, content: Mapping[str, Any]) -> None:
        tool = content.get("tool", {"name": "irsurvey"})
        if not isinstance(tool, dict) or tool.get("name") != "irsurvey":
            got = told(tool.get("name") if isinstance(tool, dict) else tool)
            self._fault(f"{self.top}: tool.name", '"irsurvey"', got, _EXPORTED)

    def _date(self, content: Mapping[str, Any]) -> str:
        day = content.get("date", "2000-01-01")
        try:
            # fromisoformat takes 20260118 as well; one form sorts
            if isinstance(day, str) and date.fromisoformat(day).isoformat() == day:
                return day
        except ValueError:
            pass
        self._fault(f"{self.top}: date", 'a date such as "2026-01-18"', told(day))
        return ""

    def _decisions(self, content: Mapping[str, Any], *, is_same: bool) -> tuple[Decision, ...]:
        listed = content.get("decisions", [])
        if not isinstance(listed, list):
            self._fault(f"{self.top}: decisions", "a list", told(listed), _EXPORTED)
            return ()
        if not listed and "decisions" in content:
            self._fault(f"{self.top}: decisions", "at least one decision", "none", "decide something first")
        tables = [entry for entry in listed if isinstance(entry, dict)]
        keys = Counter(entry["key"] for entry in tables if isinstance(entry.get("key"), str))
        made = []
        for place, entry in enumerate(listed, 1):
            where = f"{self.top}: decisions[#{place}]"
            if not isinstance(entry, dict):
                self._fault(where, "a table", told(entry), _EXPORTED)
                continue
            made.append(self._decision(entry, where, is_same=is_same))
            if keys.pop(made[-1].key, 1) > 1:
                self._fault(f"{where}.key", "one decision for each key", f"several for {told(made[-1].key)}")
        return tuple(made)

    def _decision(self, entry: Mapping[str, Any], where: str, *, is_same: bool) -> Decision:
        self._keys(entry, _OF_DECISION, where, needed=("key", "id", "frame", "decision", "on"))
        key, name, frame = (self._text(entry, field, where) for field in ("key", "id", "frame"))
        comment = self._text(entry, "comment", where, may_be_empty=True)
        kind = entry.get("decision", COMMENTED)
        if kind not in DECISIONS:
            remedy = _nearest(kind, DECISIONS)
            self._fault(f"{where}.decision", " or ".join(map(told, DECISIONS)), told(kind), remedy)
        if kind == COMMENTED and "decision" in entry and not comment.strip():
            self._fault(f"{where}.comment", "what is said of it, as nothing is decided", "nothing")
        one = self.items.get(key)
        if is_same and key:
            self._match(one, key, name, frame, where)
        criterion, class_, urgency = self._reclassified(entry, kind, one, where, is_same=is_same)
        on = self._numbers(entry, where)
        return Decision(key, name, frame, str(kind), criterion, class_, urgency, comment, on)

    def _match(self, one: Reviewable | None, key: str, name: str, frame: str, where: str) -> None:
        """Of the report the file says it was made on, each key, id and frame must be there as they are named."""
        if one is None:
            self._fault(f"{where}.key", "a key of this report", told(key), _nearest(key, self.items))
            return
        for field, given, real in (("id", name, one.id), ("frame", frame, one.frame.id)):
            if given and given != _whole(real):
                self._fault(f"{where}.{field}", told(real), told(given), f"it is what the key {told(key)} belongs to")

    def _reclassified(
        self, entry: Mapping[str, Any], kind: object, one: Reviewable | None, where: str, *, is_same: bool
    ) -> tuple[str | None, str | None, int | None]:
        """The criterion and class, and the urgency, that something was given."""
        class_, urgency = entry.get("class"), entry.get("urgency")
        if kind != "reclassified":
            for field in ("criterion", "class", "urgency"):
                if entry.get(field) is not None:
                    self._fault(f"{where}.{field}", "nothing, as it is not reclassified", told(entry[field]))
            return None, None, None
        if (class_ is None) == (urgency is None):
            got = "neither" if class_ is None else "both"
            self._fault(where, "a class or an urgency it is reclassified to", got, "give one of the two")
            return None, None, None
        if urgency is not None and (type(urgency) is not int or urgency not in URGENCIES):
            self._fault(f"{where}.urgency", "0, 1, 2, 3 or 4", told(urgency))
        if class_ is None:
            if entry.get("criterion") is not None:
                self._fault(f"{where}.criterion", "nothing without a class", told(entry["criterion"]))
            return None, None, urgency if type(urgency) is int else None
        return self._class(entry, one, where, is_same=is_same)

    def _class(
        self, entry: Mapping[str, Any], one: Reviewable | None, where: str, *, is_same: bool
    ) -> tuple[str | None, str | None, int | None]:
        """A class by its name and that of its criterion, which may be left out: then the first that has such a class.

        Of another version of the report it may be a class of any criterion; of this one it is one of its own."""
        class_, criterion = self._text(entry, "class", where), entry.get("criterion")
        judging = [assessment.criterion for assessment in one.item.assessments] if one else []
        names = list(dict.fromkeys(name for name in judging if name in self.known))
        names += [] if is_same else [name for name in self.known if name not in names]
        if criterion is not None and criterion not in names:
            remedy = _nearest(criterion, names)
            self._fault(f"{where}.criterion", "a criterion that judges it", told(criterion), remedy)
            return None, None, None
        names = names if criterion is None else [criterion]
        classes = [(name, kind) for name in names for kind in self.known[name].classes]
        for name, kind in classes:
            if kind.name == class_:
                return name, class_, kind.urgency
        if class_:
            expected = "a class of its criterion" if criterion is None else f"a class of {criterion}"
            remedy = _nearest(class_, (kind.name for _, kind in classes)) or "give an urgency instead"
            self._fault(f"{where}.class", expected, told(class_), remedy)
        return None, None, None

    def _numbers(self, entry: Mapping[str, Any], where: str) -> dict[str, Estimate | None]:
        on = entry.get("on", {})
        if not isinstance(on, dict):
            self._fault(f"{where}.on", "a table of numbers", told(on), _EXPORTED)
            return {}
        found: dict[str, Estimate | None] = {}
        for name, given in on.items():
            at = f"{where}.on.{told(name)[1:-1]}"
            if name not in _NUMBERS:
                self._fault(at, "a number of a finding or component", "an unknown one", _nearest(name, _NUMBERS))
            elif given is None:
                found[name] = None
            elif not isinstance(given, dict) or given.keys() != {"value", "u"}:
                self._fault(at, '{"value": …, "u": …} or null', told(given), _EXPORTED)
            elif not _is_number(given["value"]):
                self._fault(f"{at}.value", "a number", told(given["value"]), _EXPORTED)
            elif given["u"] is not None and not (_is_number(given["u"]) and given["u"] >= 0):
                self._fault(f"{at}.u", "a number of at least 0, or null", told(given["u"]), _EXPORTED)
            else:
                u = given["u"]
                found[name] = Estimate(float(given["value"]), None if u is None else float(u))
        return found

    def _keys(self, table: Mapping[str, Any], known: tuple[str, ...], where: str, *, needed: tuple[str, ...]) -> None:
        for key in table:
            if key not in known:
                self._fault(where, "a known key", f"the unknown key {told(key)}", _nearest(key, known))
        for key in needed:
            if key not in table:
                self._fault(f"{where}{': ' if where == self.top else '.'}{key}", "a value", "nothing", _EXPORTED)

    def _text(
        self, table: Mapping[str, Any], key: str, where: str, *, may_be_empty: bool = False, remedy: str = ""
    ) -> str:
        """A text; "" where it is at fault, or is missing, which `_keys` tells."""
        found = table.get(key)
        at = f"{where}{': ' if where == self.top else '.'}{key}"
        if key not in table or (found is None and may_be_empty):
            return ""
        if not isinstance(found, str):
            self._fault(at, "text", told(found), remedy)
        elif not found.strip() and not may_be_empty:
            self._fault(at, "text that is not empty", told(found), remedy)
        elif len(found) > LONGEST:
            self._fault(at, f"text of at most {LONGEST} characters", f"{len(found)}", "shorten it")
        else:
            return _whole(found)
        return ""

    def _fault(self, where: str, expected: str, got: str, remedy: str = "") -> None:
        self.faults.append(Fault(where, expected, got, remedy))


def _whole(text: str) -> str:
    """A text in which halves of surrogate pairs, which no file can hold, are replaced."""
    return _HALF_PAIRS.sub("\ufffd", text)


def _is_number(value: object) -> bool:
    if isinstance(value, bool) or not isinstance(value, int | float):
        return False
    try:
        return isfinite(float(value))
    except OverflowError:
        return False


def _nearest(word: object, known: Iterable[str]) -> str:
    close = get_close_matches(word, list(known), n=1, cutoff=0.5) if isinstance(word, str) and len(word) < 200 else []
    return f"did you mean {told(close[0])}?" if close else ""
