"""What a report says about an envelope: its U-values, the room air, strips across its thermal bridges."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from typing import Any

from irsurvey.analysis.evidence import Evidence, celsius
from irsurvey.analysis.measurand import FLUX_TERM, STRIP
from irsurvey.analysis.strips import Drawn, gradient_per_metre
from irsurvey.analysis.surroundings import humidity_of, is_overcast, is_sunlit, sky_is_known
from irsurvey.assess.conditions import LEVELS
from irsurvey.assess.conformity import exceeds
from irsurvey.assess.envelope import INCREASE, Face, given
from irsurvey.assess.severity import AUTOMATIC_REFERENCE, MIRRORS, SATURATED
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.model import Estimate, RoomAir, Strip, StripReport
from irsurvey.texts import state

DISTURBED = "ends still have a gradient"

_AGAINST = {
    MIRRORS: "may_be_mirrored",
    SATURATED: "is_bound",
    AUTOMATIC_REFERENCE: "reference_not_confirmed",
}
"""Flags that leave a region without a thermal transmittance → what would make it possible, a key of `texts.state`."""

_TRANSMITTANCES = {
    "u_value_w_m2k": "u_value",
    "u_value_simple_w_m2k": "u_value_simple",
    "u_value_increase_w_m2k": "u_value_increase",
    "u_value_from_contrast_w_m2k": "u_value_from_contrast",
}
"""Key → number of the measurand."""
_HEAT = {
    "heat_flux_w_m2": "flux",
    "reference_heat_flux_w_m2": "reference_flux",
    "excess_heat_w_m2": "excess_flux",
    "excess_heat_w": "excess_heat",
    "excess_heat_w_k": "excess_heat_per_kelvin",
}
"""The same for the heat of a finding."""


def face(evidence: Evidence) -> Face:
    """What decides whether the face of this frame allows a thermal transmittance."""
    task, scene = evidence.task, evidence.planned.scene
    return Face(task.viewed_from, is_sunlit(scene), sky_is_known(task, scene), is_overcast(scene))


def transmittances(
    evidence: Evidence, region: str, flags: Collection[str] = ()
) -> tuple[dict[str, Estimate | None], dict[str, str]]:
    """Thermal transmittances of a region ("" the reference area) by key, and the refusals of those not given.

    `flags` are what is known against the region: what is mirrored, beyond the range, or held against a reference that
    nobody confirmed has none.
    """
    task, results = evidence.task, evidence.numbers.results
    found = {key: results.get((region, name)) for key, name in _TRANSMITTANCES.items()}
    if task.kind != "building":
        return dict.fromkeys(found), {}
    if task.pair is not None:
        return dict.fromkeys(found), _refused(found, state("with_a_fan"))
    if task.method != "envelope":
        return dict.fromkeys(found), _refused(found, state("not_envelope"))
    if evidence.planned.plan.air is None:
        return dict.fromkeys(found), {"u_value_w_m2k": state("needs_air")}
    for flag in (*flags, *((AUTOMATIC_REFERENCE,) if task.reference is None else ())):
        if flag in _AGAINST:
            return dict.fromkeys(found), _refused(found, state(_AGAINST[flag]))
    numbers, refusals = given(found, face(evidence))
    return withheld(evidence, numbers, refusals, unless="quantitative")


def withheld(
    evidence: Evidence, numbers: Mapping[str, Estimate | None], refusals: dict[str, str], unless: str
) -> tuple[dict[str, Estimate | None], dict[str, str]]:
    """Numbers of a building frame, none of them where it may claim less than `unless`; what is withheld is refused."""
    level, reason = evidence.claim
    if evidence.task.kind != "building" or LEVELS.index(level) >= LEVELS.index(unless):
        return dict(numbers), refusals
    why = state("conditions_forbid", claim=state(level), reason=reason)
    return dict.fromkeys(numbers), refusals | _refused(numbers, why)


def _refused(numbers: Mapping[str, Estimate | None], why: str) -> dict[str, str]:
    """Why each of the numbers that there are is not given."""
    return {key: why for key, number in numbers.items() if number is not None}


def envelope_of_finding(evidence: Evidence, name: str, sense: str, flags: Collection[str]) -> dict[str, Any]:
    """The fields of a finding that building surveys ask for; `flags` as in `transmittances`."""
    results = evidence.numbers.results
    numbers, refusals = transmittances(evidence, name, flags)
    numbers.pop("u_value_simple_w_m2k")
    heat, refusals = _heat(evidence, name, numbers[INCREASE], refusals, flags)
    is_cold = sense == "cold" and evidence.is_valid
    margins = {
        key: results.get((name, number)) if is_cold else None
        for key, number in (("dew_point_margin_k", "dew_point_margin"), ("mould_margin_k", "mould_margin"))
    }
    return {
        **heat,
        "heat_flux_terms_w_m2": {} if MIRRORS in flags else flux_terms(evidence, name),
        **numbers,
        **margins,
        "condensation_probability": _below(margins["dew_point_margin_k"]),
        "mould_probability": _below(margins["mould_margin_k"]),
        "refusals": refusals,
    }


def reference_heat(evidence: Evidence, refusals: dict[str, str]) -> dict[str, Any]:
    """The heat flux of the reference area and what takes it; adds to the refusals where it is withheld."""
    found = {"heat_flux_w_m2": evidence.numbers.results.get(("", "reference_flux"))}
    heat, told = withheld(evidence, found, {}, unless="qualitative")
    refusals |= told
    return {**heat, "heat_flux_terms_w_m2": flux_terms(evidence, "")}


def _heat(
    evidence: Evidence, name: str, increase: Estimate | None, refusals: dict[str, str], flags: Collection[str]
) -> tuple[dict[str, Estimate | None], dict[str, str]]:
    """Heat fluxes of a finding by key, and the refusals with those of what is withheld.

    What heat there is for each kelvin is as much a transmittance as the increase of U, and is given where that is.
    """
    found = {key: evidence.numbers.results.get((name, number)) for key, number in _HEAT.items()}
    if MIRRORS in flags:
        return dict.fromkeys(found), refusals | dict.fromkeys(found, state(_AGAINST[MIRRORS]))
    heat, told = withheld(evidence, found, {}, unless="qualitative")
    if increase is None and heat["excess_heat_w_k"] is not None:
        heat["excess_heat_w_k"] = None
        told["excess_heat_w_k"] = refusals.get(INCREASE, state("needs_air"))
    return heat, refusals | told


def flux_terms(evidence: Evidence, region: str) -> dict[str, Estimate | None]:
    """The heat flux of a region by what takes it; nothing where the heat flux itself is withheld."""
    if evidence.task.kind == "building" and not evidence.is_valid:
        return {}
    return {
        number.removeprefix(FLUX_TERM): estimate
        for (owner, number), estimate in evidence.numbers.results.items()
        if owner == region and number.startswith(FLUX_TERM)
    }


def room_air(evidence: Evidence) -> RoomAir | None:
    """The humidity of the room air and the surface temperatures it asks for; None where it is not known."""
    humidity = humidity_of(evidence.task, evidence.planned.scene)
    if humidity is None:
        return None
    results = evidence.numbers.results
    return RoomAir(
        how=state("humidity_class", number=humidity.humidity_class) if humidity.humidity_class else "measured",
        vapour_pressure_pa=results.get(("", "vapour_pressure")),
        dew_point_c=celsius(results.get(("", "dew_point"))),
        mould_surface_c=celsius(results.get(("", "mould_surface"))),
    )


def strip_reports(evidence: Evidence) -> Iterator[StripReport]:
    """The strips of a frame, in the order of the survey; one that cannot be measured says why."""
    drawn = {one.strip.name: one for one in evidence.planned.strips}
    for strip in evidence.task.strips:
        if strip.name in drawn:
            yield _measured(drawn[strip.name], evidence)
        else:
            why = state("strip_unreadable" if evidence.planned.plan.air else "needs_air")
            yield _report(strip, {}, {"incidence_factor": why}, (), ())


def _measured(drawn: Drawn, evidence: Evidence) -> StripReport:
    results, owner = evidence.numbers.results, f"{STRIP}{drawn.strip.name}"
    length = results.get((owner, "length"))
    ratios = {"u_value_w_m2k": "u_value", "incidence_factor": "incidence_factor"}  # over what little the wall lets pass
    numbers, refusals = given({key: results.get((owner, name)) for key, name in ratios.items()}, face(evidence))
    if length is None:
        refusals["linear_transmittance_w_mk"] = state("needs_scale")
    measured = {
        "linear_transmittance_w_mk": results.get((owner, "linear_transmittance")),
        **numbers,
    }
    measured, refusals = withheld(evidence, measured, refusals, unless="quantitative")
    found = {
        "length_m": length,
        "undisturbed_c": celsius(results.get((owner, "undisturbed"))),
        "undisturbed_gradient_k_per_m": gradient_per_metre(drawn, length),
        "extreme_c": celsius(results.get((owner, "extreme"))),
        "temperature_factor": results.get((owner, "temperature_factor")),
        **measured,
    }
    profile = tuple((float(at), float(t) - ZERO_CELSIUS) for at, t in enumerate(drawn.profile))
    return _report(drawn.strip, found, refusals, (DISTURBED,) if drawn.is_disturbed else (), profile)


def _report(
    strip: Strip,
    found: Mapping[str, Estimate | None],
    refusals: dict[str, str],
    flags: tuple[str, ...],
    profile: tuple[tuple[float, float], ...],
) -> StripReport:
    return StripReport(
        name=strip.name,
        from_=strip.start,
        to=strip.end,
        width_px=strip.width,
        length_m=found.get("length_m"),
        undisturbed_c=found.get("undisturbed_c"),
        undisturbed_gradient_k_per_m=found.get("undisturbed_gradient_k_per_m"),
        extreme_c=found.get("extreme_c"),
        temperature_factor=found.get("temperature_factor"),
        incidence_factor=found.get("incidence_factor"),
        linear_transmittance_w_mk=found.get("linear_transmittance_w_mk"),
        u_value_w_m2k=found.get("u_value_w_m2k"),
        refusals=refusals,
        flags=flags,
        profile=profile,
    )


def _below(margin: Estimate | None) -> float | None:
    """Probability that a margin is gone."""
    if margin is None or margin.u is None:
        return None
    return float(exceeds(margin.value, margin.u, 0.0, "cold"))
