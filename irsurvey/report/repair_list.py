"""The repair list as people work through it: what, where, how urgent and how sure, with both pictures."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from pathlib import Path

from irsurvey import numbers, texts
from irsurvey.model import ComponentReport, FrameTask, RepairItem, Report
from irsurvey.numbers import SI, Style
from irsurvey.report import pictures, results
from irsurvey.report.labels import component_mark
from irsurvey.report.pictures import Picture
from irsurvey.report.ranking import Ranked, governing
from irsurvey.texts import say

_JUDGED = {
    "similar": "delta_similar_k",
    "ambient": "delta_ambient_k",
    "reference": "delta_k",
    "neighbours": "delta_neighbours_k",
}
"""Basis of a difference → the number of a component or finding that it is."""


@dataclass(frozen=True, slots=True)
class Line:
    """One item in words; `entry` is the finding or component it names, `mark` its letter or number on the picture."""

    item: RepairItem
    entry: Ranked | None
    mark: str
    spot: str
    sure: str
    delta: str
    basis: str
    load: str
    thermal: Picture | None = None
    photo: Picture | None = None


@dataclass(frozen=True, slots=True)
class Shown:
    """The list in two parts: what asks for something, and what is only not cleared, in tables without pictures."""

    repair: tuple[Line, ...]
    again: tuple[Line, ...]


def shown(
    report: Report,
    ranked: Iterable[Ranked],
    tasks: Mapping[str, FrameTask],
    out: Path,
    *,
    style: Style = SI,
    pictured: int | None = None,
) -> Shown:
    """The list of a report, both parts in its order; `pictured`: so many have pictures, the first; None: all."""
    entries = {(entry.frame.id, entry.item.key): entry for entry in ranked}
    listed = [(item, _line(item, entries.get((item.frame, item.key)), style)) for item in report.repairs]
    urgent = [(item, line) for item, line in listed if item.urgency]
    with_pictures = urgent if pictured is None else urgent[:pictured]
    frames = {item.frame for item, _ in with_pictures} & tasks.keys()
    photos = {id_: pictures.photograph(tasks[id_], pictures.THUMBNAIL_SIDE) for id_ in sorted(frames)}
    return Shown(
        repair=(
            *(_pictured(line, photos.get(item.frame), out) for item, line in with_pictures),
            *(line for _, line in urgent[len(with_pictures) :]),
        ),
        again=tuple(line for item, line in listed if not item.urgency),
    )


def _line(item: RepairItem, entry: Ranked | None, style: Style) -> Line:
    mark, spot = "", ""
    if entry:
        key = "max_c" if isinstance(entry.item, ComponentReport) else "extreme_c"
        spot = results.reading(entry.item, key, style=style)
        mark = component_mark(entry.place) if isinstance(entry.item, ComponentReport) else str(entry.place)
    return Line(
        item,
        entry,
        mark,
        spot=spot.strip(numbers.NOTHING),
        sure=results.chance(item.confidence),
        delta=_delta(item, entry, style),
        basis=_basis(item, entry, style),
        load=results.load(entry.item if entry else None, item.load_a, item.rated_a, style=style),
    )


def _pictured(line: Line, photo: Picture | None, out: Path) -> Line:
    if line.entry is None:
        return replace(line, photo=photo)
    words = say("thermal_picture_of", what=line.item.what[:80], mark=line.mark, frame=line.item.frame)
    thermal = pictures.around(line.entry.frame, line.entry.item.polygon, words, out)
    return replace(line, thermal=thermal, photo=photo)


def _delta(item: RepairItem, entry: Ranked | None, style: Style) -> str:
    """The difference with its unit, and with ≥ or ≤ where the reading is only a bound; "" where there is none."""
    text = numbers.measured(item.delta_k, "delta_k", style=style)
    if text == numbers.NOTHING:
        return ""
    if _is_reference(item, entry):
        return say("is_the_reference")
    return results.bounded(entry.item, _JUDGED.get(item.delta_basis, ""), text) if entry else text


def _is_reference(item: RepairItem, entry: Ranked | None) -> bool:
    """Whether its difference is the one from itself."""
    return item.delta_basis == "similar" and entry is not None and results.is_coolest(entry.item)


def _basis(item: RepairItem, entry: Ranked | None, style: Style) -> str:
    """What a difference was taken against, and the one brought to calm air where that decides."""
    if _is_reference(item, entry):
        return ""
    twin = entry.item.similar_to if entry and isinstance(entry.item, ComponentReport) else None
    words = texts.basis(item.delta_basis)
    if twin and item.delta_basis == "similar":
        words = f"{words}, {twin}"
    decides = governing(entry.item.assessments) if entry else None
    if entry is None or decides is None or not decides.quantity.endswith("_in_calm_k"):
        return words
    calm = numbers.measured(getattr(entry.item, decides.quantity), "delta_k", style=style)
    return say("calm_decides", basis=words, delta=calm)
