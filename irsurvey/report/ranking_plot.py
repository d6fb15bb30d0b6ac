"""Temperature differences in order, each with its uncertainty, against the edges of the classes they are judged by."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from math import isfinite

from irsurvey import numbers, texts
from irsurvey.assess.criteria import Criterion, criteria
from irsurvey.model import Finding, FrameTask
from irsurvey.numbers import SI, Style
from irsurvey.report import results
from irsurvey.report.axes import RIGHT, TICKS_ACROSS, Axis, Tick
from irsurvey.report.labels import component_mark
from irsurvey.report.ranking import Ranked, governing

LEFT_END = 12
"""Where the axis begins: names stand above their lines, so that they are legible on a telephone too."""
FIRST, STEP = 34, 29
"""Height of the first line, and from one to the next."""
MOST_ROWS = 20
"""Rows of one drawing, the largest differences; the table beside it has all."""

_QUANTITIES = ("mean_delta_k", "delta_k", "delta_similar_k", "delta_ambient_k", "delta_neighbours_k")
_ROOM = 1.06
_NAME = 34  # characters


@dataclass(frozen=True, slots=True)
class Row:
    """One difference: its name, where its value and the ends of its ± stand, and what it links to."""

    entry: Ranked
    name: str
    reading: str
    y: int
    at: float
    low: float
    high: float


@dataclass(frozen=True, slots=True)
class Edge:
    """Where a class begins; `text` is the value, `class_` what it is called."""

    at: float
    text: str
    class_: str


@dataclass(frozen=True, slots=True)
class Plot:
    """The rows of one criterion, the largest first, how many `more` there are, and the edges of its classes."""

    criterion: str
    quantity: str
    rows: tuple[Row, ...]
    more: int
    edges: tuple[Edge, ...]
    across: tuple[Tick, ...]
    bottom: int
    unit: str
    words: str


def plots(ranked: Iterable[Ranked], tasks: Iterable[FrameTask], *, style: Style = SI) -> tuple[Plot, ...]:
    """A drawing for each criterion that governs two results or more by a temperature difference.

    Differences are drawn by their size: whether warmer or colder, the table tells."""
    known = criteria(tuple(dict.fromkeys(own for task in tasks for own in task.own_criteria)))
    judged: dict[tuple[str, str], list[Ranked]] = {}
    for entry in ranked:
        one = governing(entry.item.assessments)
        if one and one.quantity in _QUANTITIES and _size(entry, one.quantity):
            judged.setdefault((one.criterion, one.quantity), []).append(entry)
    return tuple(
        _plot(criterion, quantity, entries, known, style)
        for (criterion, quantity), entries in judged.items()
        if len(entries) > 1
    )


def _size(entry: Ranked, quantity: str) -> float:
    """How large a difference is [K]; 0 for none, and for the coolest twin, against which the others stand."""
    estimate = getattr(entry.item, quantity, None)
    return abs(estimate.value) if estimate and isfinite(estimate.value) else 0.0


def _plot(name: str, quantity: str, entries: list[Ranked], known: Mapping[str, Criterion], style: Style) -> Plot:
    entries = sorted(entries, key=lambda entry: -_size(entry, quantity))
    shown = entries[:MOST_ROWS]
    factor = numbers.scale(quantity, style).factor
    reach = max(_size(entry, quantity) + _expanded(entry, quantity) for entry in shown)
    classes = known[name].classes[1:] if name in known else ()
    reach = max([reach, *(kind.low for kind in classes[:1])]) * _ROOM
    x = Axis(0.0, factor * reach, LEFT_END, RIGHT)
    edges = tuple(
        Edge(x.at(factor * kind.low), numbers.number(factor * kind.low, 3, style=style), texts.class_name(kind.name))
        for kind in classes
        if 0 < kind.low <= reach
    )
    rows = tuple(_row(entry, quantity, x, factor, FIRST + STEP * place, style) for place, entry in enumerate(shown))
    return Plot(
        criterion=name,
        quantity=texts.name(quantity),
        rows=rows,
        more=len(entries) - len(shown),
        edges=edges,
        across=x.ticks(TICKS_ACROSS, style=style),
        bottom=FIRST + STEP * (len(rows) - 1) + 14,
        unit=numbers.unit(quantity, style=style),
        words=_in_words(rows, quantity),
    )


def _expanded(entry: Ranked, quantity: str) -> float:
    u = getattr(entry.item, quantity).u
    return numbers.COVERAGE_FACTOR * u if u is not None and isfinite(u) else 0.0


def _row(entry: Ranked, quantity: str, x: Axis, factor: float, y: int, style: Style) -> Row:
    size, expanded = factor * _size(entry, quantity), factor * _expanded(entry, quantity)
    return Row(
        entry,
        name=_name(entry),
        reading=results.reading(entry.item, quantity, style=style),
        y=y,
        at=x.at(size),
        low=x.at(max(0.0, size - expanded)),
        high=x.at(size + expanded),
    )


def _name(entry: Ranked) -> str:
    if isinstance(entry.item, Finding):
        return entry.item.id
    name = f"{entry.item.name} ({component_mark(entry.place)}, {entry.frame.id})"
    return name if len(name) <= _NAME else f"{name[: _NAME - 1].rstrip()}…"


def _in_words(rows: tuple[Row, ...], quantity: str) -> str:
    told = ", ".join(f"{row.name} {row.reading}" for row in rows[:6])
    return texts.say("ranking_is", quantity=texts.name(quantity), told=f"{told}{' …' if len(rows) > 6 else ''}")
