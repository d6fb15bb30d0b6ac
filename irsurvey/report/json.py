"""report.json: the records written out field by field, read back, and described by a JSON Schema."""

from __future__ import annotations

import json
from dataclasses import fields, is_dataclass
from math import isfinite
from numbers import Integral, Real
from pathlib import Path
from typing import Any

from irsurvey import files
from irsurvey.model import Estimate, FrameTask, Report
from irsurvey.numbers import unit

SIGNIFICANT_DIGITS = 7
"""Enough for a temperature to 0.1 mK, and what a single-precision map carries."""

_LINE = 120
"""Characters up to which a list or record stands on one line; one of numbers alone always does."""

_CLAIMS = ["quantitative", "qualitative", "not valid"]
_WORDS = {
    "FrameReport.status": ["analysed", "failed"],
    "Decision.decision": ["accepted", "rejected", "reclassified", "open", "commented"],
    "ReviewStatus.status": ["open", "accepted", "rejected", "reclassified", "asked again", "gone"],
    "FrameReport.kind": ["building", "electrical"],
    "FrameReport.claim": _CLAIMS,
    "Report.claim": _CLAIMS,
    "ReferenceReport.how": ["polygon", "automatic"],
    "Finding.sense": ["hot", "cold"],
    "Finding.outcome": ["not cleared", "act"],
    "ComponentReport.outcome": ["cleared", "not cleared", "act"],
    "Assessment.verdict": ["pass", "conditional pass", "conditional fail", "fail", None],
    "ConditionCheck.verdict": ["met", "not met", "not recorded"],
    "ConditionCheck.limits_to": [*_CLAIMS, None],
    "ChecklistItem.asked_by": ["simplified report", "full report"],
    "SeasonReport.sense": ["heating", "cooling"],
    "PressureChange.sense": ["hot", "cold"],
    "RepairItem.delta_basis": ["similar", "ambient", "reference", "neighbours"],
    "PopulationAlarm.how": ["median", "mean"],
}
"""Record and key → all it may hold."""

_MEANINGS = {
    "reviews": "what reviewers decided, by date; what was measured stays as it is",
    "review_status": "where each finding and component stands after them; empty without reviews",
    "Decision.on": "the numbers the decision was made on",
    "ReviewStatus.moved": "numbers that moved beyond their U since, so that the reviewer is asked again",
    "urgency": "0 none, 1 investigate, 2 repair as time permits, 3 watch closely, 4 at once",
    "Assessment.verdict": "the number against the edge where action begins, guard band 2u; null: no class or no u",
    "outcome": "what is done about it; cleared only where the number stays 2u clear of where action begins",
    "exceeds_threshold": "probability that its ΔT truly exceeds the smallest that counts",
    "flips": "changes of single inputs, within 2u, that would change the governing class, the likeliest first",
    "budgets": "number → the inputs its uncertainty comes from, the largest first",
    "interval_95": "ends of the 95 % interval, where it was drawn or is not value ± 1.96 u",
    "input": "key of an input of the frame, or of what is one area's own (noise, outline)",
    "sensitivity": "change of the number per unit of the input",
    "contribution": "standard uncertainty of the number from this input alone",
    "BudgetTerm.share": "of the variance of the number; negative where a correlation takes from it",
    "Flip.change": "added to the input, in the unit its key ends in",
    "Input.from": "where the value comes from",
    "u_from": "where its standard uncertainty comes from",
    "next_visit": "single measurements that would settle open decisions, the one that settles most first",
    "settles": "ids of findings and keys of components",
    "draws": "of a Monte Carlo propagation",
    "Report.claim": "what more than half of its frames may claim; which may claim less is told in claim_reason",
    "claim_reason": "why no more may be claimed",
    "limits_to": "the most that may be claimed because of this requirement; null where it takes nothing",
    "heat_flux_terms_w_m2": "parts of the heat flux by what takes the heat: convection, radiation:<what it faces>",
    "film_resistance_m2k_w": "of the face seen, convection and radiation together",
    "ReferenceReport.u_value_w_m2k": "from the heat flux, between environmental temperature and the air behind",
    "u_value_simple_w_m2k": "from surface and air temperatures with the conventional film resistance",
    "u_value_increase_w_m2k": "over that of the reference area",
    "u_value_from_contrast_w_m2k": "the stated U-value of the element plus the increase",
    "refusals": "number that is not given → why, and what would make it possible",
    "excess_heat_w_k": "excess heat per kelvin between indoor and outdoor air",
    "Finding.temperature_factor": "of the coldest spot, at the film resistance seen",
    "temperature_factor_at_0_25": "the same at 0.25 m²·K/W, which limits assume",
    "dew_point_margin_k": "coldest spot minus dew point of the room air",
    "mould_margin_k": "coldest spot minus the least surface temperature against mould",
    "condensation_probability": "probability that the coldest spot is at the dew point or below, at that moment",
    "mould_probability": "probability that the air at the coldest spot is at 80 % humidity or above, at that moment",
    "pressure_change_k": "mean over the finding, with the pressure minus without",
    "Indication.pattern": "what it is consistent with; an indication, never proof",
    "Indication.evidence": "the measured cues",
    "element": "id of the building element in the survey",
    "RoomAir.how": "where its humidity comes from: measured, or humidity class 1 to 5 (ISO 13788)",
    "mould_surface_c": "surface temperature below which the air at it is at 80 % humidity or more",
    "SurfaceAtRisk.risk": "condensation, mould, or the name of a criterion",
    "SurfaceAtRisk.share": "of the surface inspected that is at the limit or below",
    "share_low": "of the surface inspected with all margins raised by 2u: the least that may be at risk",
    "share_high": "of the surface inspected with all margins lowered by 2u: the most that may be at risk",
    "area_low_m2": "with all margins raised by 2u",
    "area_high_m2": "with all margins lowered by 2u",
    "SurfaceAtRisk.probability": "that the coldest spot is at the limit or below",
    "StripReport.from": "start of the strip: x, y [px]",
    "StripReport.to": "end of the strip: x, y [px]",
    "undisturbed_gradient_k_per_m": "the steeper of its ends that should be undisturbed",
    "incidence_factor": "heat through the strip over that through as much undisturbed wall",
    "linear_transmittance_w_mk": "Ψ: heat per metre of the bridge beyond that of the undisturbed wall",
    "profile": "distance from the start [px], temperature [°C]",
    "with": "id of the frame of the same view without the pressure difference",
    "PairReport.pressure_pa": "inside minus outside while this frame was taken",
    "accepted": "whether the two could be laid over each other well enough to be compared",
    "correlation": "of the two pictures, laid over each other",
    "PairReport.threshold_k": "the smallest change that counts",
    "PressureChange.finding": "id of the finding it overlaps most",
    "PressureChange.sense": "whether it is warmer or colder with the pressure",
    "seasons": "estimates that carry one moment over to a heating or cooling season",
    "SeasonRow.of": "id of a finding or of an element",
    "cost": "in the currency of the season",
    "order_of_magnitude": "true where it is too uncertain for more than its power of ten",
    "efficiency": "of the heating; of cooling, its seasonal performance factor",
    "price": "per kWh, in the currency of the season",
    "checklist": "what a complete report states, and whether this one does",
    "Assessment.quantity": "key of the number that the criterion judges",
    "similar_to": "name of the coolest comparable twin; null for that one itself, and without a twin",
    "at_rated_load": "its rise as the load grows to the rating: the band for load exponents 1.6 to 2.0",
    "delta_similar_in_calm_k": "brought to 1 m/s of wind; a correction that may raise a class, never lower it",
    "delta_ambient_in_calm_k": "brought to 1 m/s of wind; a correction that may raise a class, never lower it",
    "relative_difference_percent": "difference from its twin over its own rise above ambient air",
    "above_limit_k": "spot maximum minus the absolute limit; negative below it",
    "above_allowed_k": "spot maximum minus what is allowed at this load and ambient; negative below it",
    "delta_neighbours_k": "of a PV cell or module: over the median of its neighbours, brought to 1000 W/m²",
    "is_found": "found by the program, not drawn in the survey",
    "limit": "of all materials and insulation that meet in it, the lowest limit",
    "LimitReport.name": "name in the table of limits",
    "max_c": "highest mean over a whole measurement spot",
    "LimitReport.max_c": "highest temperature allowed",
    "rise_k": "allowed above ambient air at rated load",
    "allowed_now_c": "allowed at this load and ambient: the band for load exponents 1.6 to 2.0",
    "joint": "heat of the joint, an estimate; what flows off along the conductor is not in it",
    "JointHeat.form": "what it was taken for: cylinder, plate, sphere, or a stated area",
    "power_w": "given off by its surface, to the air and by radiation",
    "excess_power_w": "given off beyond what its twin gives off",
    "excess_resistance_uohm": "beyond its twin, at least: heat that flows off along the conductor is not in it",
    "voltage_drop_mv": "over the excess resistance at this load: at least this much",
    "yearly_loss_kwh": "of the excess, were this load carried all year: at least this much",
    "trend": "its rise over the surveys, brought to rated load and one ambient",
    "TrendReport.points": "date (ISO 8601), rise over ambient air [K], at rated load where load makes the heat",
    "slope_k_per_year": "Theil–Sen: the median of the slopes of all pairs",
    "slope_low_k_per_year": "lower end of the 95 % interval",
    "slope_high_k_per_year": "upper end of the 95 % interval",
    "change_k": "since the last survey",
    "is_significant": "whether the change is more than its uncertainty (2u) explains",
    "repairs": "parts that ask for something, what to repair first first, then those that are only not cleared",
    "RepairItem.key": "of the finding or component",
    "RepairItem.confidence": "probability that its urgency is this or a higher one",
    "delta_basis": "what the difference was taken against",
    "inspect_again": "when and how to look again: after the repair, or because it was not cleared",
    "populations": "components of one group over all frames, held against what is usual among them",
    "PopulationAlarm.count": "components in the group",
    "PopulationAlarm.how": "median: median + k·1.4826·MAD; mean: prediction limit of Student's t, for few",
    "alarm_k": "rise above which one stands out, at rated load where at least five state load and rating",
    "exceeding": "keys of the components above it",
    "cautions": "to be read before anybody acts on the report",
    "ChecklistItem.where": "what it was found in, or the key of the survey file that would state it",
}
"""Key, or record and key → what it means, where its name alone does not say so."""


def plain(record: Any) -> dict[str, Any]:
    """A record as a dict ready for JSON, keys in field order, a trailing underscore of a name dropped.

    Numbers keep 7 significant digits; NaN and infinities become None, and so does an estimate without a
    finite value.  The survey inside a report stays as it was read."""
    written = {field.name.removesuffix("_"): _plain(getattr(record, field.name)) for field in fields(record)}
    if isinstance(record, Report):
        written["survey"] = _finite(record.survey)
    return written


def text(record: Any) -> str:
    """A record as JSON text, one key a line, but on one line what is short or numbers alone (an outline, an estimate,
    a term of a budget); the same record gives the same text."""
    return _written(plain(record)) + "\n"


def write(report: Report, _tasks: tuple[FrameTask, ...], out: Path) -> Path:
    """Write OUT/report.json, whole or not at all, and return its path."""
    path = out / "report.json"
    files.write_bytes(path, text(report).encode("utf-8", "replace"))  # half a surrogate pair has no UTF-8
    return path


def read(path: Path) -> dict[str, Any]:
    """The contents of a report.json."""
    contents: dict[str, Any] = json.loads(path.read_bytes())
    return contents


def report_schema() -> dict[str, Any]:
    """JSON Schema (draft 2020-12) of report.json, made from the records themselves."""
    from pydantic import TypeAdapter

    schema = TypeAdapter(Report).json_schema(mode="serialization")
    for name, record in {"Report": schema, **schema["$defs"]}.items():
        record["properties"] = {
            key.removesuffix("_"): _described(name, key.removesuffix("_"), value)
            for key, value in record["properties"].items()
        }
        record["required"] = [key for key in record["properties"] if key != "interval_95"]
        record["additionalProperties"] = False
    return {"$schema": "https://json-schema.org/draft/2020-12/schema", **schema}


def _plain(value: Any) -> Any:
    if isinstance(value, Estimate) and not isfinite(value.value):
        return None
    if isinstance(value, Estimate) and value.interval_95 is None:
        return {"value": _plain(value.value), "u": _plain(value.u)}
    if is_dataclass(value):
        return plain(value)
    if isinstance(value, dict):
        return {key: _plain(entry) for key, entry in value.items()}
    if isinstance(value, tuple | list):
        return [_plain(entry) for entry in value]
    if isinstance(value, bool | str | None):
        return value
    if isinstance(value, Integral):
        return int(value)
    if isinstance(value, Real):
        return float(f"{value:.{SIGNIFICANT_DIGITS}g}") + 0.0 if isfinite(value) else None  # + 0.0: no minus zero
    raise TypeError(f"no JSON for {type(value).__name__}")


def _finite(value: Any) -> Any:
    """What was read from the survey file, unrounded; TOML knows NaN and infinity, JSON does not."""
    if isinstance(value, dict):
        return {key: _finite(entry) for key, entry in value.items()}
    if isinstance(value, list):
        return [_finite(entry) for entry in value]
    return None if isinstance(value, float) and not isfinite(value) else value


def _written(value: Any, indent: str = "") -> str:
    """JSON text of dicts, lists and plain values; lists and dicts over several lines only where they have to be."""
    if not isinstance(value, dict | list) or not value:
        return json.dumps(value, ensure_ascii=False, allow_nan=False)
    deeper = f"{indent} "
    if isinstance(value, dict):
        opening, closing = "{", "}"
        parts = [f"{json.dumps(key, ensure_ascii=False)}: {_written(entry, deeper)}" for key, entry in value.items()]
    else:
        opening, closing = "[", "]"
        parts = [_written(entry, deeper) for entry in value]
    one_line = f"{opening}{', '.join(parts)}{closing}"
    if _is_numbers(value) or (len(one_line) <= _LINE and "\n" not in one_line):
        return one_line
    return f"{opening}\n{deeper}" + f",\n{deeper}".join(parts) + f"\n{indent}{closing}"


def _is_numbers(value: Any) -> bool:
    """Whether this is a number, or a list of numbers, however deep."""
    return all(map(_is_numbers, value)) if isinstance(value, list) else isinstance(value, int | float)


def _described(record: str, key: str, schema: dict[str, Any]) -> dict[str, Any]:
    """The schema of one key with its unit, its words and, for numbers by name, the null that stands for NaN."""
    schema = {name: value for name, value in schema.items() if name not in ("title", "default")}
    if schema.get("additionalProperties") == {"type": "number"}:
        schema["additionalProperties"] = {"type": ["number", "null"]}
    place = f"{record}.{key}"
    if place in _WORDS:
        schema["enum"] = _WORDS[place]
    meaning = _MEANINGS.get(place, _MEANINGS.get(key, ""))
    if description := "; ".join(filter(None, (meaning, f"in {unit(key)}" if unit(key) else ""))):
        schema["description"] = description
    return schema
