"""What the findings and the elements of a building cost in a season: estimates, made from finished records."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from math import hypot, isfinite

from irsurvey.assess.indication import MOISTURE, REFLECTION
from irsurvey.assess.severity import AUTOMATIC_REFERENCE, CONDITIONS, REFLECTIVE
from irsurvey.heat.season import cost, season_energy
from irsurvey.model import Element, Estimate, Finding, FrameReport, Season, SeasonReport, SeasonRow
from irsurvey.texts import state

_SURE_ENOUGH = 0.5
"""Relative standard uncertainty above which no more than the order of magnitude is told (house rule)."""
_STATED_U = 0.2
"""Relative standard uncertainty of a U-value that was designed or calculated, not measured (house rule)."""

_NO_LOSS = (REFLECTION, MOISTURE)
"""Patterns that are no heat through the wall: mirrored, stored, or drawn by evaporation."""


def seasons_of(
    seasons: Sequence[Season], frames: Sequence[FrameReport], elements: Sequence[Element]
) -> tuple[SeasonReport, ...]:
    """One report per season: findings by the heat they add, elements by what passes through their sound surface.

    Findings that may be no loss (reflections, moisture, what a fan drew in, an unconfirmed reference, a survey that is
    not valid) and those that lose less than the reference have no row.  One defect seen in two frames has two.
    """
    return tuple(_season(season, frames, elements) for season in seasons)


def _season(season: Season, frames: Sequence[FrameReport], elements: Sequence[Element]) -> SeasonReport:
    findings = [
        _row(season, finding.id, frame.id, finding.excess_heat_w_k)
        for frame in frames
        for finding in frame.findings
        if _counts(frame, finding)
    ]
    walls = [_row(season, element.id, frame, heat) for element, frame, heat in _losses(elements, frames)]
    for rows in (findings, walls):
        rows.sort(key=lambda row: (-(row.heat_w_k.value if row.heat_w_k else 0.0), row.of))
    return SeasonReport(
        sense=season.sense,
        degree_days_kd=Estimate(season.degree_days, season.degree_days * season.degree_days_u),
        how=season.how,
        efficiency=season.efficiency,
        price=season.price,
        currency=season.currency,
        findings=tuple(findings),
        elements=tuple(walls),
        findings_total=_total(season, state("all_findings"), findings),
        elements_total=_total(season, state("all_elements"), walls),
    )


def _counts(frame: FrameReport, finding: Finding) -> bool:
    """Whether a finding is a loss that may be summed up."""
    heat = finding.excess_heat_w_k
    uncertain = {AUTOMATIC_REFERENCE, CONDITIONS, REFLECTIVE}
    is_sure = frame.claim == "quantitative" and not uncertain & set(finding.flags)
    is_loss = finding.indication is None or finding.indication.pattern not in _NO_LOSS
    is_usual = frame.kind == "building" and frame.pair is None  # a fan makes leaks that the season does not have
    return is_usual and is_sure and is_loss and heat is not None and heat.value > 0


def _losses(
    elements: Iterable[Element], frames: Sequence[FrameReport]
) -> Iterator[tuple[Element, str | None, Estimate]]:
    """W/K of each element with a known area: by its measured U-value, of several the best known, else by the stated."""
    for element in elements:
        if not element.area:
            continue
        measured = [
            (frame.id, frame.reference.u_value_w_m2k)
            for frame in frames
            if frame.element == element.id and frame.reference and frame.pair is None
        ]
        known = [(frame, u) for frame, u in measured if u is not None and u.u is not None]
        best = min(known, key=lambda one: (one[1].u or 0.0) / one[1].value, default=None)
        if best is not None:
            yield element, best[0], _times(best[1], element.area)
        elif element.u_value is not None:
            yield element, None, Estimate(element.u_value * element.area, _STATED_U * element.u_value * element.area)


def _row(season: Season, of: str, frame: str | None, heat: Estimate | None) -> SeasonRow:
    """Energy and cost of a heat loss per kelvin, with everything about the season in the uncertainty."""
    if heat is None:
        return SeasonRow(of, frame, None, None, None, order_of_magnitude=True)
    energy = _scaled(
        float(season_energy(heat.value, season.degree_days, season.efficiency)),
        _relative(heat), season.degree_days_u, season.efficiency_u,
    )  # fmt: skip
    price = None
    if season.price is not None:
        price = _scaled(float(cost(energy.value, season.price)), _relative(energy), season.price_u)
    return SeasonRow(of, frame, heat, energy, price, order_of_magnitude=_relative(energy) > _SURE_ENOUGH)


def _total(season: Season, of: str, rows: Sequence[SeasonRow]) -> SeasonRow | None:
    """All rows together.  Their errors have the same causes (air, film, camera), so that their u add up, not their
    squares: the safe side."""
    heats = [row.heat_w_k for row in rows if row.heat_w_k is not None]
    if not heats:
        return None
    known = [heat.u for heat in heats if heat.u is not None]
    u = sum(known) if len(known) == len(heats) else None
    return _row(season, of, None, Estimate(sum(heat.value for heat in heats), u))


def _times(estimate: Estimate, factor: float) -> Estimate:
    return Estimate(estimate.value * factor, None if estimate.u is None else estimate.u * factor)


def _scaled(value: float, *relative: float) -> Estimate:
    together = hypot(*relative)
    return Estimate(value, abs(value) * together if isfinite(together) else None)


def _relative(estimate: Estimate) -> float:
    if estimate.u is None or not estimate.value:
        return float("inf")
    return estimate.u / abs(estimate.value)
