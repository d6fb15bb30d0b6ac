"""Numbers of an envelope as lines people read: what each is, its value, and why one is not given."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from irsurvey import numbers, texts
from irsurvey.assess.severity import AUTOMATIC_REFERENCE
from irsurvey.model import (
    Estimate,
    Finding,
    FrameReport,
    ReferenceReport,
    Report,
    RoomAir,
    StripReport,
    SurfaceAtRisk,
)
from irsurvey.numbers import SI, Style
from irsurvey.report import results
from irsurvey.report.sentences import in_style
from irsurvey.report.style import short
from irsurvey.texts import say

Record = Finding | ReferenceReport | RoomAir | StripReport

_YES_OR_NO = ("changed_with_pressure",)
_PATTERN = 90  # letters of a pattern in one line with what it takes
_LIKELY = 0.5
"""Probability from which a risk is told in the summary: more likely than not."""
_LEAST_CUE = 0.01
"""Of a cue: what is smaller differs from nothing by no more than the pixels do."""


@dataclass(frozen=True, slots=True)
class Fact:
    """One line: what it is, its value in words, and what must be known with it."""

    name: str
    text: str
    note: str = ""


def of_reference(reference: ReferenceReport, *, style: Style = SI) -> tuple[Fact, ...]:
    """Heat flux, film resistance and U-values of a reference area."""
    flux = _fact(reference, "heat_flux_w_m2", "estimate_of", style=style)
    return (
        *([Fact(flux.name, flux.text, terms(reference.heat_flux_terms_w_m2, style=style))] if flux else []),
        *_told(reference, ("film_resistance_m2k_w",), style=style),
        *_told(reference, ("u_value_w_m2k", "u_value_simple_w_m2k"), "estimate_from_moment", style=style),
        *_refused(reference.refusals, style),
    )


def of_finding(item: Finding, *, style: Style = SI) -> tuple[Fact, ...]:
    """What a finding means for the envelope: heat, U-values, temperature factors, moisture, pressure."""
    heat = Fact(say("heat_flux_goes"), terms(item.heat_flux_terms_w_m2, style=style))
    return (
        *([heat] if heat.text else []),
        *_told(item, ("excess_heat_w_k",), style=style),
        *_told(
            item, ("u_value_w_m2k", "u_value_increase_w_m2k", "u_value_from_contrast_w_m2k"), "estimate_of", style=style
        ),
        *_told(item, ("temperature_factor", "temperature_factor_at_0_25"), style=style),
        *_margin(item, "dew_point_margin_k", "condensation_probability", style),
        *_margin(item, "mould_margin_k", "mould_probability", style),
        *_told(item, ("pressure_change_k",), style=style),
        *_refused(item.refusals, style),
    )


def meaning(item: Finding, frame: FrameReport, cost: str, *, style: Style = SI) -> str:
    """What a finding of a frame is consistent with, what it risks and what it takes, in a line; `cost` in words.

    Heat is told where numbers may be relied on and the reference is confirmed; a risk where it is likely."""
    told = [short(texts.pattern(item.indication.pattern), _PATTERN)] if item.indication else []
    for key, probability in (("mould_likely", item.mould_probability), ("wet_likely", item.condensation_probability)):
        if probability is not None and probability >= _LIKELY:
            told.append(say(key, probability=results.chance(probability)))
    if item.excess_heat_w and frame.claim == "quantitative" and AUTOMATIC_REFERENCE not in item.flags:
        told.append(say("excess_heat", heat=results.reading(item, "excess_heat_w", style=style)))
    if cost:
        told.append(say("estimate_of", what=cost))
    line = "; ".join(told)
    return line[:1].upper() + line[1:]


def why(report: Report) -> str:
    """The key of `say` for the reason of what a survey may claim: numbers save in some frames, or the reason itself."""
    excepted = any(frame.claim != report.claim for frame in report.frames if frame.status != "failed")
    return "exceptions" if report.claim == "quantitative" and excepted else "why_claimed"


def mouldy(report: Report) -> tuple[FrameReport, ...]:
    """Frames in which the coldest spot of a finding, or of all that was inspected, likely has mould conditions."""
    return tuple(
        frame
        for frame in report.frames
        if any((finding.mould_probability or 0.0) >= _LIKELY for finding in frame.findings)
        or any(risk.risk == "mould" and (risk.probability or 0.0) >= _LIKELY for risk in frame.surface_at_risk)
    )


def of_strip(strip: StripReport, *, style: Style = SI) -> tuple[Fact, ...]:
    """What was measured along a strip."""
    keys = ("length_m", "undisturbed_c", "undisturbed_gradient_k_per_m", "extreme_c", "temperature_factor")
    judged = ("incidence_factor", "linear_transmittance_w_mk", "u_value_w_m2k")
    return (
        *_told(strip, keys, style=style),
        *_told(strip, judged, "estimate_of", style=style),
        *_refused(strip.refusals, style),
    )


def of_room(room: RoomAir, *, style: Style = SI) -> tuple[Fact, ...]:
    """Humidity of the room air, and the surface temperatures it asks for."""
    return tuple(_told(room, ("vapour_pressure_pa", "dew_point_c", "mould_surface_c"), style=style))


def share(risk: SurfaceAtRisk) -> str:
    """Share of the surface at risk, and what it may be: "3 % (1 % to 8 %)"."""
    value, low, high = (numbers.percent(part) for part in (risk.share, risk.share_low, risk.share_high))
    return f"{value} ({say('from_to', low=low, high=high)})"


def area(risk: SurfaceAtRisk, *, style: Style = SI) -> str:
    """The same as an area; "–" without a scale."""
    if risk.area_m2 is None or risk.area_low_m2 is None or risk.area_high_m2 is None:
        return numbers.NOTHING
    return numbers.area_range(risk.area_m2, risk.area_low_m2, risk.area_high_m2, style=style)


def terms(parts: dict[str, Estimate | None], *, style: Style = SI) -> str:
    """Where a heat flux goes: "20.1 ± 4.0 W/m² to the air by convection; …"."""
    told = (
        f"{numbers.measured(estimate, 'heat_flux_w_m2', style=style)} {texts.term(key)}"
        for key, estimate in parts.items()
        if estimate
    )
    return "; ".join(told)


def cues(evidence: dict[str, float], *, style: Style = SI) -> tuple[Fact, ...]:
    """The measured cues of a pattern; those nobody could measure are left out."""
    told = (Fact(texts.cue(key), _cue(key, value, style)) for key, value in evidence.items())
    return tuple(fact for fact in told if fact.text != numbers.NOTHING)


def _cue(key: str, value: float, style: Style) -> str:
    if key in _YES_OR_NO:
        return say("yes") if value else say("no")
    if 0 < abs(value) < _LEAST_CUE:
        return f"< {numbers.told(_LEAST_CUE, key, style=style)}"
    return numbers.told(value, key, 2, style=style)


def _told(record: Record, keys: Iterable[str], kind: str = "", *, style: Style) -> list[Fact]:
    return [fact for key in keys if (fact := _fact(record, key, kind, style=style))]


def _fact(record: Record, key: str, kind: str = "", *, style: Style) -> Fact | None:
    """One number that exists, with its interval; `kind` is the key of what says what kind of number it is."""
    if getattr(record, key) is None:
        return None
    if isinstance(record, Finding):
        text, drawn = results.reading(record, key, style=style), results.interval(record, key, style=style)
    else:
        estimate: Estimate | None = getattr(record, key)
        text = numbers.measured(estimate, key, style=style)
        drawn = numbers.interval_of(estimate, key, style=style)
    if text == numbers.NOTHING:
        return None
    told = f"{text}; {drawn}" if drawn else text
    return Fact(in_style(texts.name(key), style), say(kind, what=told) if kind else told)


def _margin(item: Finding, key: str, probability: str, style: Style) -> list[Fact]:
    """A margin of the coldest spot with the probability that there is none."""
    fact, chance = _fact(item, key, style=style), results.chance(getattr(item, probability))
    if not chance:
        return [fact] if fact else []
    told = say("at_least", value=chance) if results.is_bound(item, key) else chance
    if not fact:
        return [Fact(texts.name(probability), told)]
    return [Fact(fact.name, fact.text, say("at_the_moment", name=texts.inside(probability), chance=told))]


def _refused(refusals: dict[str, str], style: Style) -> list[Fact]:
    """What is not given, with why and what would make it possible; one line for all that share a remedy."""
    shared: dict[str, list[tuple[str, str]]] = {}
    for key, told in refusals.items():
        why, _, remedy = in_style(told, style).partition(": ")
        shared.setdefault(remedy or why, []).append((in_style(texts.name(key), style), why))
    return [_not_given(remedy, same) for remedy, same in shared.items()]


def _not_given(remedy: str, same: list[tuple[str, str]]) -> Fact:
    names, reasons = ("; ".join(dict.fromkeys(parts)) for parts in zip(*same, strict=True))
    return Fact(names, say("not_given"), reasons if remedy == reasons else f"{reasons}: {remedy}")
