"""Criteria: named, versioned data files that turn one reported number into a class with an urgency."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, fields, replace
from difflib import get_close_matches
from functools import cache
from importlib.resources import files
from itertools import pairwise
from math import inf, isfinite
from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from irsurvey.errors import Fault, SurveyError
from irsurvey.model.report import ComponentReport, Finding
from irsurvey.texts import of_table

URGENCIES: Final[Mapping[int, str]] = {
    0: "none",
    1: "investigate",
    2: "plan a repair",
    3: "watch until repaired",
    4: "at once",
}
"""What each urgency asks for; the same scale for every criterion."""

MARKS: Final[Mapping[str, str]] = {
    "P": "published, value seen in a public text of the source",
    "S": "published, as quoted by a secondary text",
    "M": "from memory, not checked",
    "CP": "common practice of the trade",
    "C": "computed from the stated equation",
    "house": "house rule, no published source",
}
"""How far the figures of a table can be trusted."""

METHODS: Final[Mapping[str, tuple[str, ...]]] = {
    "building": ("envelope", "air-leakage", "roof-moisture"),
    "electrical": ("contact", "voltage-driven", "pv"),
}

ALWAYS: Final = ("absolute-limit", "absolute-limit-at-load")
"""Criteria that count wherever they suit, named or not: who states the limit of a part wants the part held against it.
A part without a stated limit is not judged by them."""

DEFAULTS: Final[Mapping[tuple[str, str], tuple[str, ...]]] = {
    ("building", "envelope"): ("building-contrast", "temperature-factor-ie"),  # the stricter of the two limits
    ("building", "air-leakage"): ("building-contrast",),
    ("building", "roof-moisture"): ("roof-moisture",),
    ("electrical", "contact"): ("neta-similar", "neta-ambient", "electrical-contrast", *ALWAYS),
    # tenths of a kelvin matter there: no table for contacts may be borrowed
    ("electrical", "voltage-driven"): ("voltage-driven", "absolute-limit"),
    ("electrical", "pv"): ("pv-modules", "absolute-limit"),
}
"""Criteria used where a survey names none that suits its kind and method."""

Own = tuple[tuple[str, str], ...]
"""Criteria files of a survey's own: (name of the file, its text) each."""


@dataclass(frozen=True, slots=True)
class SeverityClass:
    """One interval of a criterion's axis, in the unit the criterion's quantity ends in."""

    name: str
    statement: str
    urgency: int
    low: float = -inf
    high: float = inf
    holds_low: bool = False  # low itself belongs to this class (`at_least`)
    holds_high: bool = False  # high itself belongs to this class (`at_most`)


@dataclass(frozen=True, slots=True)
class Criterion:
    """One criterion: where it comes from, which number it judges, and its classes in ascending order."""

    name: str
    title: str
    edition: str
    kind: str
    methods: tuple[str, ...]
    applies_to: str  # "finding" | "component"
    quantity: str  # key of that finding or component in report.json
    sense: str  # "hot" | "cold" | "either": which deviations it judges
    source: str
    mark: str
    notes: str
    classes: tuple[SeverityClass, ...]
    viewed_from: str | None = None  # "inside" | "outside"; None: from anywhere
    classed_from: tuple[str, float] | None = None  # of a component: classed only where this number is at least that

    def suits(self, kind: str, method: str) -> bool:
        """Whether it judges surveys of this kind and method."""
        return self.kind == kind and method in self.methods

    @property
    def edges(self) -> tuple[float, ...]:
        """The values between classes, ascending."""
        return tuple(kind.high for kind in self.classes[:-1])

    @property
    def worse(self) -> int:
        """+1 where a higher value is worse, −1 where a lower one is, 0 where all classes are equally urgent."""
        last, first = self.classes[-1].urgency, self.classes[0].urgency
        return (last > first) - (last < first)


def class_index(value: ArrayLike, criterion: Criterion) -> NDArray[np.intp]:
    """Index into `criterion.classes` of each value, never rounded first; −1 where the value is NaN."""
    value = np.asarray(value, dtype=float)
    index = np.zeros(value.shape, dtype=np.intp)
    for kind in criterion.classes[1:]:
        index += value >= kind.low if kind.holds_low else value > kind.low
    return np.where(np.isnan(value), -1, index)


def class_of(value: float, criterion: Criterion) -> SeverityClass | None:
    """The class of one value; None where it is NaN."""
    index = int(class_index(value, criterion))
    return None if index < 0 else criterion.classes[index]


def criteria(own: Own = ()) -> dict[str, Criterion]:
    """All built-in criteria by name, and those of `own` files behind them.

    Raises `SurveyError` for an own file that is malformed or takes a name that is taken.
    """
    found = {criterion.name: criterion for criterion in _built_in()}
    for file, text in own:
        criterion = load_criterion(text, file)
        if criterion.name in found:
            raise SurveyError(_taken(criterion.name, f"{file}: name"))
        found[criterion.name] = criterion
    return found


def chosen(names: tuple[str, ...], kind: str, method: str, own: Own = ()) -> tuple[Criterion, ...]:
    """The criteria among `names` and `own` for this kind and method of survey, with the default ones for findings, for
    components, where none of them judges these.

    A survey may name criteria for all its groups at once, building and electrical.  An own one may be named by its file
    or by its name, and counts in any case: it was given to be used.  So do those of `ALWAYS`.
    Raises `SurveyError` for a name that does not exist, and as `criteria` does.
    """
    known = criteria(own)
    by_file = dict(zip((file for file, _ in own), list(known)[len(known) - len(own) :], strict=True))
    faults = [
        Fault("criteria", "the name of a criterion", repr(name), _nearest(name, known, "see `irsurvey criteria`"))
        for name in names
        if name not in known and name not in by_file
    ]
    if faults:
        raise SurveyError(*faults)
    named = [*(by_file.get(name, name) for name in names), *by_file.values()]
    suited = [name for name in named if name not in ALWAYS and known[name].suits(kind, method)]
    judged = {known[name].applies_to for name in suited}
    # what is hot outside any component is judged also where only criteria for components were named
    suited += [name for name in DEFAULTS.get((kind, method), ()) if known[name].applies_to not in judged]
    always = [name for name in ALWAYS if known[name].suits(kind, method)]
    return tuple(known[name] for name in dict.fromkeys([*suited, *always]))


def criterion_faults(text: str) -> list[Fault]:
    """What is wrong with the text of a criteria file of a survey's own, `where` being the key in it; empty: nothing."""
    try:
        criterion = load_criterion(text, "")
    except SurveyError as error:
        return [replace(fault, where=fault.where.removeprefix(": ")) for fault in error.faults]
    return [_taken(criterion.name, "name")] if criterion.name in criteria() else []


def load_criterion(text: str, where: str) -> Criterion:
    """The criterion written in a TOML text; `where` names its file in messages.

    Raises `SurveyError` with all faults at once, each naming file and key: a field missing, unknown or
    not understood, an urgency outside 0…4, classes that leave a gap, overlap, or whose urgency turns
    back along the axis (then a value known only as "at least" could not be classed safely).
    """
    try:
        table = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise SurveyError(Fault(where, "a criterion in TOML", str(error))) from error
    rows = table.pop("classes", [])
    faults = list(_field_faults(table, _FIELDS, _OPTIONAL, f"{where}: "))
    if not faults:
        faults = list(_meaning_faults(table, where))
    if not (isinstance(rows, list) and len(rows) > 1 and all(isinstance(row, dict) for row in rows)):
        raise SurveyError(*faults, Fault(f"{where}: classes", "at least two [[classes]] tables", repr(rows)))
    row_faults = [fault for k, row in enumerate(rows) for fault in _row_faults(row, f"{where}: classes[{k + 1}]")]
    if row_faults:
        raise SurveyError(*faults, *row_faults)
    classes = tuple(sorted(map(_severity_class, rows), key=lambda kind: (kind.low, not kind.holds_low)))
    faults += _axis_faults(classes, f"{where}: classes")
    if faults:
        raise SurveyError(*faults)
    table["methods"] = tuple(table["methods"])
    table |= {key: of_table(table[key]) for key in ("source", "edition")}
    if "classed_from" in table:
        table["classed_from"] = (table["classed_from"]["quantity"], float(table["classed_from"]["at_least"]))
    return Criterion(**table, classes=classes)


@cache
def _built_in() -> tuple[Criterion, ...]:
    folder = files("irsurvey.assess") / "criteria"
    texts = {entry.name: entry.read_text("utf-8") for entry in folder.iterdir() if entry.name.endswith(".toml")}
    return tuple(load_criterion(texts[name], name) for name in sorted(texts))


Check = tuple[Callable[[Any], bool], str]
"""Whether a value will do, and what was expected, in words."""


def _one_of(*options: str) -> Check:
    return (lambda value: value in options), "one of " + ", ".join(options)


def _is_number(value: object) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool) and isfinite(value)


_TEXT: Final[Check] = (lambda value: isinstance(value, str) and bool(value.strip())), "a text"
_NUMBER: Final[Check] = _is_number, "a number"
_CONDITION: Final[Check] = (
    (
        lambda value: (
            isinstance(value, dict) and value.keys() == {"quantity", "at_least"} and _is_number(value["at_least"])
        )
    ),
    "{ quantity = the key of a component's number, at_least = a number }",
)
_NAME: Final[Check] = (
    (lambda value: isinstance(value, str) and re.fullmatch(r"[a-z0-9][a-z0-9.-]{0,63}", value) is not None),
    "small letters, digits, dots and hyphens",
)
_URGENCY: Final[Check] = (lambda value: type(value) is int and value in URGENCIES), "a whole number from 0 to 4"
_TEXTS: Final[Check] = (
    (lambda value: isinstance(value, list) and bool(value) and all(isinstance(item, str) for item in value)),
    "a list of methods",
)

_FIELDS: Final[Mapping[str, Check]] = {
    "name": _NAME,
    "title": _TEXT,
    "edition": _TEXT,
    "kind": _one_of(*METHODS),
    "methods": _TEXTS,
    "applies_to": _one_of("finding", "component"),
    "quantity": _TEXT,
    "sense": _one_of("hot", "cold", "either"),
    "source": _TEXT,
    "mark": _one_of(*MARKS),
    "notes": _TEXT,
}
_OPTIONAL: Final[Mapping[str, Check]] = {
    "viewed_from": _one_of("inside", "outside"),
    "classed_from": _CONDITION,
}
_ROW: Final[Mapping[str, Check]] = {"name": _TEXT, "statement": _TEXT, "urgency": _URGENCY}
_BOUNDS: Final[Mapping[str, Check]] = dict.fromkeys(("at_least", "above", "at_most", "below"), _NUMBER)

QUANTITIES: Final[Mapping[str, tuple[str, ...]]] = {
    applies_to: tuple(entry.name for entry in fields(record) if entry.type == "Estimate | None")
    for applies_to, record in (("finding", Finding), ("component", ComponentReport))
}
"""What a criterion may judge: every measured number that a finding or a component has in report.json."""


def _taken(name: str, where: str) -> Fault:
    return Fault(where, "a name that no other criterion has", repr(name), "give it a name of its own")


def _nearest(name: str, known: Mapping[str, object], otherwise: str) -> str:
    close = get_close_matches(name, known, 1)
    return f"did you mean {close[0]!r}?" if close else otherwise


def _field_faults(
    table: dict[str, Any], required: Mapping[str, Check], optional: Mapping[str, Check], prefix: str
) -> Iterator[Fault]:
    known = {**required, **optional}
    for key in required:
        if key not in table:
            yield Fault(prefix + key, required[key][1], "nothing", "add it")
    for key, value in table.items():
        if key not in known:
            yield Fault(prefix + key, "a known key", repr(key), _nearest(key, known, "remove it"))
        elif not known[key][0](value):
            yield Fault(prefix + key, known[key][1], repr(value))


def _meaning_faults(table: dict[str, Any], where: str) -> Iterator[Fault]:
    """Fields that are well formed but do not fit each other."""
    allowed = METHODS[table["kind"]]
    if set(table["methods"]) - set(allowed):
        yield Fault(f"{where}: methods", "some of " + ", ".join(allowed), repr(table["methods"]))
    quantities = QUANTITIES[table["applies_to"]]
    if table["quantity"] not in quantities:
        yield Fault(f"{where}: quantity", "one of " + ", ".join(quantities), repr(table["quantity"]))
    condition = table.get("classed_from", {}).get("quantity")
    if condition is not None and table["applies_to"] != "component":
        yield Fault(f"{where}: classed_from", "a criterion for components", table["applies_to"], "remove it")
    elif condition is not None and condition not in quantities:
        yield Fault(f"{where}: classed_from.quantity", "one of " + ", ".join(quantities), repr(condition))


def _row_faults(row: dict[str, Any], where: str) -> Iterator[Fault]:
    found = list(_field_faults(row, _ROW, _BOUNDS, f"{where}."))
    yield from found
    for pair in (("at_least", "above"), ("at_most", "below")):
        if all(key in row for key in pair):
            yield Fault(f"{where}.{pair[1]}", f"{pair[0]} or {pair[1]}", "both", "keep one")
    if not found and _severity_class(row).low >= _severity_class(row).high:
        yield Fault(where, "a lower bound below its upper bound", repr(row["name"]) + " without any value in it")


def _severity_class(row: dict[str, Any]) -> SeverityClass:
    return SeverityClass(
        name=row["name"],
        statement=of_table(row["statement"]),
        urgency=row["urgency"],
        low=float(row.get("at_least", row.get("above", -inf))),
        high=float(row.get("at_most", row.get("below", inf))),
        holds_low="at_least" in row,
        holds_high="at_most" in row,
    )


def _axis_faults(classes: tuple[SeverityClass, ...], where: str) -> Iterator[Fault]:
    """What keeps the classes, in ascending order, from covering the whole axis once, in order of urgency."""
    names = [kind.name for kind in classes]
    if len(set(names)) < len(names):
        yield Fault(f"{where}.name", "a name of its own for every class", ", ".join(names))
    if classes[0].low != -inf:
        yield Fault(where, "a class for every value", f"none below {classes[0].low:g}", "leave out its lower bound")
    if classes[-1].high != inf:
        yield Fault(where, "a class for every value", f"none above {classes[-1].high:g}", "leave out its upper bound")
    for left, right in pairwise(classes):
        both = f"{left.name!r} and {right.name!r}"
        if left.high < right.low or (left.high == right.low and not (left.holds_high or right.holds_low)):
            yield Fault(where, "a class for every value", f"a gap between {both}", "close it: at_most meets above")
        elif left.high > right.low or (left.holds_high and right.holds_low):
            yield Fault(where, "one class for every value", f"an overlap of {both}", "part them: at_most meets above")
    urgencies = [kind.urgency for kind in classes]
    if urgencies not in (sorted(urgencies), sorted(urgencies, reverse=True)):
        yield Fault(f"{where}.urgency", "an urgency that only rises or only falls along the axis", str(urgencies))
