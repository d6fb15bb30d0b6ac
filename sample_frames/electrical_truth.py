"""What is true about electrical parts beside their temperatures: rises, loads, classes by ANSI/NETA, heat, limits."""

from __future__ import annotations

from statistics import median
from typing import Any

import joint_heat
from painting import Part
from shot import Shot

EXPONENTS = (1.6, 2.0)  # a rise grows with load^n
LIKE_LOADS = 1.03  # largest over smallest load of twins that are compared as they are
MIDDLE_EXPONENT = 1.8  # by which they are brought to one load where they are not
LEAST_LOAD = 0.40  # of rated load: below it nothing is cleared
# Upper ends of the classes [K] and their urgencies: ANSI/NETA Table 100.18, the gaps between its whole kelvins closed.
SIMILAR = ((3.0, 1), (15.0, 2), (float("inf"), 4))
AMBIENT = ((10.0, 1), (20.0, 2), (40.0, 3), (float("inf"), 4))


def components(shot: Shot, found: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """The temperatures of a frame's parts, in their order, with all that follows from them."""
    parts = shot.subject.parts
    return [one | _facts(shot, k, parts, found) for k, one in enumerate(found)]


def urgency(rise_k: float, column: tuple[tuple[float, int], ...]) -> int:
    """The urgency of a rise that was not rounded before."""
    return 0 if rise_k < 1.0 else next(grade for edge, grade in column if rise_k <= edge)


def wind_factor(wind_m_s: float) -> float:
    """Rise at 1 m/s over that in this wind, up to 7 m/s."""
    return max(wind_m_s, 1.0) ** 0.448


def _facts(shot: Shot, k: int, parts: tuple[Part, ...], found: list[dict[str, Any]]) -> dict[str, Any]:
    part, ambient_c = parts[k], shot.ambient_c
    if ambient_c is None:
        return {}
    rise = found[k]["max_c"] - ambient_c
    facts: dict[str, Any] = {"group": part.group, "load_a": part.load_a, "rated_a": part.rated_a}
    facts["delta_ambient_k"] = round(rise, 2)
    if shot.method == "contact":
        facts |= _by_load(shot, k, parts, found, rise)
    if part.joint is not None:
        facts["joint"] = _joint(shot, k, parts, found)
    if part.limit is not None:
        facts["limit"] = _limit(part, rise, found[k]["max_c"])
    if shot.method == "voltage-driven":
        facts["delta_similar_k"] = round(found[k]["max_c"] - min(one["max_c"] for one in found), 2)
    if shot.irradiance_w_m2 is not None:
        healthy = median(one["max_c"] for one, other in zip(found, parts, strict=True) if other.pattern is None)
        facts["delta_neighbours_k"] = round((found[k]["max_c"] - healthy) * 1000 / shot.irradiance_w_m2, 2)
        facts["pattern"] = part.pattern
    return facts


def _by_load(shot: Shot, k: int, parts: tuple[Part, ...], found: list[dict[str, Any]], rise: float) -> dict[str, Any]:
    """Against the coolest twin at one load, at rated load, in calm, and the classes of both columns."""
    part, twins = parts[k], _twins(k, parts)
    loads = [parts[j].load_a for j in twins]
    stated = [load for load in loads if load]
    differ = bool(stated) and max(stated) > LIKE_LOADS * min(stated)

    def to_load(of: int, wanted: float | None) -> float:
        factor = (wanted / parts[of].load_a) ** MIDDLE_EXPONENT if differ and wanted and parts[of].load_a else 1.0
        return (found[of]["max_c"] - shot.ambient_c) * factor

    facts: dict[str, Any] = {"normalised": differ}
    facts["delta_similar_k"] = round(rise - min(to_load(j, part.load_a) for j in twins), 2) if len(twins) > 1 else None
    worst = {"similar": facts["delta_similar_k"], "ambient": rise}
    if shot.wind_m_s is not None:
        worst = {name: None if one is None else one * wind_factor(shot.wind_m_s) for name, one in worst.items()}
        facts |= {f"delta_{name}_in_calm_k": round(one, 2) for name, one in worst.items() if one is not None}
    if part.load_a and part.rated_a:
        ratio = part.load_a / part.rated_a
        facts["load_ratio"] = round(ratio, 4)
        facts["is_low_load"], facts["is_overload"] = ratio < LEAST_LOAD, ratio > 1.0
        facts["delta_ambient_at_rated_k"] = sorted(round(rise / ratio**n, 2) for n in EXPONENTS)
    if worst["similar"] is not None:
        facts["urgency_by_neta_similar"] = urgency(worst["similar"], SIMILAR)
    facts["urgency_by_neta_ambient"] = urgency(worst["ambient"], AMBIENT)
    return facts


def _twins(k: int, parts: tuple[Part, ...]) -> list[int]:
    """Places of the parts of one group, its own among them."""
    return [j for j, other in enumerate(parts) if other.group is not None and other.group == parts[k].group]


def _joint(shot: Shot, k: int, parts: tuple[Part, ...], found: list[dict[str, Any]]) -> dict[str, Any]:
    """Heat by the mean temperature of the part's surface, and what it has over the coolest twin's."""
    part = parts[k]

    def power(of: int) -> float:
        around = (shot.ambient_c, shot.ambient_c if shot.mean_radiant_c is None else shot.mean_radiant_c)
        return joint_heat.power(part.joint, found[of]["mean_c"], *around, part.emissivity, shot.wind_m_s)

    coolest = min(_twins(k, parts), key=lambda j: found[j]["max_c"])
    excess = power(k) - power(coolest)
    facts = part.joint | {"power_w": round(power(k), 3), "excess_power_w": round(excess, 3)}
    return facts | {"excess_resistance_uohm": round(1e6 * excess / part.load_a**2, 2)} if part.load_a else facts


def _limit(part: Part, rise: float, max_c: float) -> dict[str, Any]:
    """An absolute limit (highest temperature, rise at rated load) and the rise allowed at this load."""
    highest_c, rise_k = part.limit
    ratio = min(part.load_a / part.rated_a, 1.0)
    allowed = sorted(rise_k * ratio**n for n in EXPONENTS)
    return {
        "max_c": highest_c,
        "rise_k": rise_k,
        "above_limit_k": round(max_c - highest_c, 2),
        "allowed_rise_k": [round(one, 2) for one in allowed],
        "above_allowed_k": [round(rise - one, 2) for one in reversed(allowed)],
    }
