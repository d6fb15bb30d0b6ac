"""Numbers of an envelope as lines people read: what each is, its value, and why one is not given."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from irsurvey import numbers
from irsurvey.model import Estimate, Finding, ReferenceReport, RoomAir, StripReport, SurfaceAtRisk
from irsurvey.report import results, texts

Record = Finding | ReferenceReport | RoomAir | StripReport

_YES_OR_NO = ("changed_with_pressure",)
_NOT_GIVEN = "not given"


@dataclass(frozen=True, slots=True)
class Fact:
    """One line: what it is, its value in words, and what must be known with it."""

    name: str
    text: str
    note: str = ""


def of_reference(reference: ReferenceReport) -> tuple[Fact, ...]:
    """Heat flux, film resistance and U-values of a reference area."""
    flux = _fact(reference, "heat_flux_w_m2", "an estimate")
    return (
        *([Fact(flux.name, flux.text, terms(reference.heat_flux_terms_w_m2))] if flux else []),
        *_told(reference, ("film_resistance_m2k_w",)),
        *_told(reference, ("u_value_w_m2k", "u_value_simple_w_m2k"), "an estimate from one moment"),
        *_refused(reference.refusals),
    )


def of_finding(item: Finding) -> tuple[Fact, ...]:
    """What a finding means for the envelope: heat, U-values, temperature factors, moisture, pressure."""
    heat = Fact("Heat flux goes", terms(item.heat_flux_terms_w_m2))
    return (
        *([heat] if heat.text else []),
        *_told(item, ("excess_heat_w_k",)),
        *_told(item, ("u_value_w_m2k", "u_value_increase_w_m2k", "u_value_from_contrast_w_m2k"), "an estimate"),
        *_told(item, ("temperature_factor", "temperature_factor_at_0_25")),
        *_margin(item, "dew_point_margin_k", "condensation_probability"),
        *_margin(item, "mould_margin_k", "mould_probability"),
        *_told(item, ("pressure_change_k",)),
        *_refused(item.refusals),
    )


def of_strip(strip: StripReport) -> tuple[Fact, ...]:
    """What was measured along a strip."""
    keys = ("length_m", "undisturbed_c", "undisturbed_gradient_k_per_m", "extreme_c", "temperature_factor")
    judged = ("incidence_factor", "linear_transmittance_w_mk", "u_value_w_m2k")
    return (*_told(strip, keys), *_told(strip, judged, "an estimate"), *_refused(strip.refusals))


def of_room(room: RoomAir) -> tuple[Fact, ...]:
    """Humidity of the room air, and the surface temperatures it asks for."""
    return tuple(_told(room, ("vapour_pressure_pa", "dew_point_c", "mould_surface_c")))


def share(risk: SurfaceAtRisk) -> str:
    """Share of the surface at risk, and what it may be: "3 % (1 % to 8 %)"."""
    value, low, high = (numbers.percent(part) for part in (risk.share, risk.share_low, risk.share_high))
    return f"{value} ({low} to {high})"


def area(risk: SurfaceAtRisk) -> str:
    """The same as an area; "–" without a scale."""
    if risk.area_m2 is None or risk.area_low_m2 is None or risk.area_high_m2 is None:
        return numbers.NOTHING
    return numbers.area_range(risk.area_m2, risk.area_low_m2, risk.area_high_m2)


def terms(parts: dict[str, Estimate | None]) -> str:
    """Where a heat flux goes: "20.1 ± 4.0 W/m² to the air by convection; …"."""
    told = (
        f"{numbers.measured(estimate, 'heat_flux_w_m2')} {texts.term(key)}"
        for key, estimate in parts.items()
        if estimate
    )
    return "; ".join(told)


def cues(evidence: dict[str, float]) -> tuple[Fact, ...]:
    """The measured cues of a pattern; those nobody could measure are left out."""
    told = (Fact(texts.cue(key), _cue(key, value)) for key, value in evidence.items())
    return tuple(fact for fact in told if fact.text != numbers.NOTHING)


def _cue(key: str, value: float) -> str:
    if key in _YES_OR_NO:
        return "yes" if value else "no"
    return numbers.with_unit(numbers.number(value, 2), key)


def _told(record: Record, keys: Iterable[str], word: str = "") -> list[Fact]:
    return [fact for key in keys if (fact := _fact(record, key, word))]


def _fact(record: Record, key: str, word: str = "") -> Fact | None:
    """One number that exists, with its interval and what kind of number it is."""
    if getattr(record, key) is None:
        return None
    if isinstance(record, Finding):
        text, drawn = results.reading(record, key), results.interval(record, key)
    else:
        text, drawn = numbers.measured(getattr(record, key), key), numbers.interval_of(getattr(record, key), key)
    if text == numbers.NOTHING:
        return None
    told = f"{text}; {drawn}" if drawn else text
    return Fact(texts.name(key), f"{told}, {word}" if word else told)


def _margin(item: Finding, key: str, probability: str) -> list[Fact]:
    """A margin of the coldest spot with the probability that there is none."""
    fact, chance = _fact(item, key), results.chance(getattr(item, probability))
    if not chance:
        return [fact] if fact else []
    bound = "at least " if results.is_bound(item, key) else ""
    name = texts.inside(probability)
    if not fact:
        return [Fact(texts.name(probability), f"{bound}{chance}")]
    return [Fact(fact.name, fact.text, f"{name} at the moment of the survey: {bound}{chance}")]


def _refused(refusals: dict[str, str]) -> list[Fact]:
    """What is not given, with why and what would make it possible; one line for all that share a remedy."""
    shared: dict[str, list[tuple[str, str]]] = {}
    for key, told in refusals.items():
        why, _, remedy = told.partition(": ")
        shared.setdefault(remedy or why, []).append((texts.name(key), why))
    return [_not_given(remedy, same) for remedy, same in shared.items()]


def _not_given(remedy: str, same: list[tuple[str, str]]) -> Fact:
    names, reasons = ("; ".join(dict.fromkeys(parts)) for parts in zip(*same, strict=True))
    return Fact(names, _NOT_GIVEN, reasons if remedy == reasons else f"{reasons}: {remedy}")
