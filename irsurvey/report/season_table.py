"""What it costs: energy and money of a season as a table an owner can read."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Iterator, Mapping
from dataclasses import dataclass, replace

from irsurvey import numbers, texts
from irsurvey.model import Estimate, Finding, Report, SeasonReport, SeasonRow
from irsurvey.numbers import SI, Style
from irsurvey.report.sentences import in_style
from irsurvey.texts import say

_SMALL_KWH = 1.0
"""Several findings that surely take less a season share one line."""
_IN_SEASON = {"heating": "in_heating_season", "cooling": "in_cooling_season"}
_NAMED = 12  # findings without a row named one by one
_PATCH = {"hot": "warmer_patch", "cold": "colder_patch"}


@dataclass(frozen=True, slots=True)
class Line:
    """One row in words; `finding` and `frame` are the ids it links to, where it has any."""

    what: str
    note: str
    where: str
    energy: str
    cost: str
    finding: str | None = None
    frame: str | None = None


@dataclass(frozen=True, slots=True)
class Part:
    """Rows of one kind with their total."""

    heading: str
    first: str  # headings of the first two columns
    second: str
    lines: tuple[Line, ...]
    total: Line | None


@dataclass(frozen=True, slots=True)
class Table:
    """One season."""

    sense: str
    heading: str
    basis: str
    has_cost: bool
    parts: tuple[Part, ...]


def tables(report: Report, *, style: Style = SI) -> tuple[Table, ...]:
    """A table for each season that was estimated."""
    return tuple(_table(report, season, style) for season in report.seasons if season.findings or season.elements)


def notes(shown: tuple[Table, ...], report: Report) -> tuple[str, ...]:
    """How to read these tables, and what is not in them, in sentences."""
    told = [table.sense for table in shown] + ["estimate", "plus_minus", "twice"]
    told += ["both"] if any(len(table.parts) > 1 for table in shown) else []
    told += ["price"] if any(table.has_cost for table in shown) else []
    return (*_left_out(report), *(texts.owner(note) for note in told))


def _left_out(report: Report) -> Iterator[str]:
    """Which findings have no row in any season."""
    counted = {row.of for season in report.seasons for row in season.findings}
    found = (finding.id for frame in report.frames if frame.kind == "building" for finding in frame.findings)
    left = [id_ for id_ in found if id_ not in counted]
    if left:
        names = ", ".join(left[:_NAMED]) + (" …" if len(left) > _NAMED else "")
        yield say("not_in_the_table" if len(left) > 1 else "one_not_in_the_table", count=len(left), names=names)


def in_short(report: Report, *, style: Style = SI) -> dict[str, str]:
    """Finding id → what it costs in half a sentence, in the season in which it takes most."""
    rows = [
        (row, season) for season in report.seasons for row in season.findings if _energy(row, style) != numbers.NOTHING
    ]
    rows.sort(key=lambda entry: entry[0].energy_kwh.value if entry[0].energy_kwh else 0.0)
    told = {}
    for row, season in rows:
        cost = _cost(row, season, style)
        price = f" ({cost})" if cost != numbers.NOTHING else ""
        told[row.of] = f"{say(_IN_SEASON[season.sense], energy=_energy(row, style))}{price}"
    return told


def _table(report: Report, season: SeasonReport, style: Style) -> Table:
    findings = {finding.id: finding for frame in report.frames for finding in frame.findings}
    labels = {frame.id: frame.label for frame in report.frames}
    described = _descriptions(report.survey.get("element"))
    small = [row for row in season.findings if _is_small(row)]
    kept = season.findings if len(small) < 2 else [row for row in season.findings if not _is_small(row)]
    lines = [_of_finding(row, season, findings.get(row.of), labels.get(row.frame or "", ""), style) for row in kept]
    if len(small) > 1:
        lines.append(_gathered(small, season, style))
    doubtful = {frame.id for frame in report.frames if any(one.outcome == "not cleared" for one in frame.findings)}
    whole = tuple(_of_element(row, season, described, labels, doubtful, style) for row in season.elements)
    return Table(
        sense=season.sense,
        heading=texts.season(season.sense),
        basis=_basis(season, style),
        has_cost=season.price is not None,
        parts=tuple(
            part
            for part in (
                Part(
                    *(say("single_places"), say("place"), say("where")),
                    tuple(lines),
                    _total(season.findings_total, season, style),
                ),
                Part(
                    *(say("whole_parts"), say("part"), say("measured_at")),
                    whole,
                    _total(season.elements_total, season, style),
                ),
            )
            if part.lines
        ),
    )


def _line(row: SeasonRow, season: SeasonReport, what: str, where: str = "", *, style: Style) -> Line:
    return Line(what, "", where, _energy(row, style), _cost(row, season, style), frame=row.frame)


def _of_finding(row: SeasonRow, season: SeasonReport, finding: Finding | None, where: str, style: Style) -> Line:
    """A finding in an owner's words: a colder patch, and what it is consistent with."""
    line = _line(row, season, row.of, where, style=style)
    if finding is None:
        return line
    note = texts.pattern(finding.indication.pattern) if finding.indication else ""
    return replace(line, what=say(_PATCH[finding.sense], id=row.of), note=note, finding=row.of)


def _of_element(
    row: SeasonRow,
    season: SeasonReport,
    described: Mapping[str, str],
    labels: Mapping[str, str],
    doubtful: Collection[str],
    style: Style,
) -> Line:
    """A part of the building; a note where the frame it was measured in holds something that is not cleared."""
    where = labels.get(row.frame or "", say("not_measured"))
    line = _line(row, season, described.get(row.of, row.of), where, style=style)
    return replace(line, note=say("measured_where_open", frame=row.frame)) if row.frame in doubtful else line


def _is_small(row: SeasonRow) -> bool:
    """Whether a row is surely too small for an owner to care."""
    energy = row.energy_kwh
    return bool(energy and energy.u is not None and energy.value + numbers.COVERAGE_FACTOR * energy.u < _SMALL_KWH)


def _gathered(small: list[SeasonRow], season: SeasonReport, style: Style) -> Line:
    """All rows that are too small to stand alone; their sum without ±, which only the total has."""
    energy, cost = (
        sum(estimate.value for row in small if (estimate := getattr(row, name))) for name in ("energy_kwh", "cost")
    )
    return Line(
        say("small_places", count=len(small), energy=numbers.number(_SMALL_KWH)),
        "",
        "",
        say("about", value=numbers.with_symbol(numbers.number(energy, 2, style=style), "kWh")),
        say("about", value=numbers.with_symbol(numbers.number(cost, 2, style=style), season.currency)),
    )


def _total(row: SeasonRow | None, season: SeasonReport, style: Style) -> Line | None:
    return _line(row, season, say("together"), style=style) if row else None


def _energy(row: SeasonRow, style: Style) -> str:
    return _amount(row.energy_kwh, row, "kWh", style)


def _cost(row: SeasonRow, season: SeasonReport, style: Style) -> str:
    return _amount(row.cost, row, season.currency, style)


def _amount(estimate: Estimate | None, row: SeasonRow, symbol: str, style: Style) -> str:
    told = (numbers.magnitude if row.order_of_magnitude else numbers.shown)(estimate, style=style)
    return numbers.with_symbol(told, symbol)


def _descriptions(elements: object) -> dict[str, str]:
    """Element id → its description, as the survey file has it."""
    listed: Iterable[object] = elements if isinstance(elements, list) else ()
    return {
        str(element["id"]): str(element["description"])
        for element in listed
        if isinstance(element, dict) and element.get("id") and element.get("description")
    }


def _basis(season: SeasonReport, style: Style) -> str:
    """What the estimate rests on, in a sentence or two."""
    days = numbers.measured(season.degree_days_kd, "degree_days_kd", unit=False, style=style)
    performance = (
        say("heating_efficiency", share=numbers.percent(season.efficiency))
        if season.sense == "heating"
        else say("cooling_performance", factor=numbers.number(season.efficiency, 2, style=style))
    )
    told = {
        "days": say("degree_days_fahrenheit" if style.units == "us" else "degree_days", count=days),
        "how": in_style(season.how, style),
        "performance": performance,
    }
    if season.price is None:
        return say("rests_on", **told)
    price = numbers.with_symbol(numbers.number(season.price, 3, style=style), season.currency)
    return say("rests_on_price", **told, price=price)
