"""A component against its own past, and against its like all over the survey."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import UTC, datetime
from math import isfinite, nan, sqrt

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.inputs import named
from irsurvey.assess.criteria import criteria
from irsurvey.assess.population import LEAST_COUNT, alarm
from irsurvey.assess.severity import BELOW_AIR, LOW_LOAD, MIRRORS, NO_SOLUTION, REFLECTIVE, SATURATED, SIZE_LIMITED
from irsurvey.assess.trend import normalised_rise, theil_sen
from irsurvey.assess.twins import LEAST_LOAD, LOAD_EXPONENT, LOAD_EXPONENT_U, load_factor
from irsurvey.model import (
    BudgetTerm,
    ComponentReport,
    Earlier,
    Estimate,
    FrameReport,
    PopulationAlarm,
    Quantity,
    Scene,
    TrendReport,
)
from irsurvey.uncertainty import propagate

LEAST_POINTS = 3
"""Surveys that make a slope; two make a change."""
LOAD_U = 0.03 / 3**0.5
"""Relative standard uncertainty of load over rating in one survey [house]: a clamp meter beside live conductors
reads to within three percent, taken as rectangular and, as nobody says which meter it was, as each survey's own."""

_DAYS_PER_YEAR = 365.2425
_BY_VOLTAGE = ("voltage-driven",)
_SCALED = (
    *("emissivity", "window_transmittance", "window_reflectance"),
    *("atmosphere", "camera_gain", "size_of_source", "view_angle", "ifov"),
)
"""Inputs whose errors two surveys share, and that scale a rise: the same surface, window, lens and camera."""
_SHIFTED = ("camera_offset", "shading", "shading_x", "shading_y")
"""Those that shift it."""

_BOUNDS = {SATURATED, SIZE_LIMITED}
_UNUSABLE = {REFLECTIVE, MIRRORS, NO_SOLUTION, BELOW_AIR, LOW_LOAD}
"""Flags of readings that are no rise to compare: of a lightly loaded part, what it would be at rated load is too wide a
band to stand out by."""


def trend_of(
    component: ComponentReport, frame: FrameReport, history: Sequence[Earlier], taken: datetime | None
) -> TrendReport | None:
    """The rises of a component over its surveys, this one last; None where the history holds none before `taken`.

    Matched by the asset of the frame (none: rows without one) and the component's name.  Only rises over ambient air
    count, brought to rated load: surveys without load and rating, or below 40 % of it, where that would multiply the
    rise several times over, have no point.  What voltage drives, not current, is taken as it is.  Rows of the day of
    `taken` are this survey's own.  Without a usable rise now, or without `taken`, the points are those of the history
    and nothing is said of a change.

    The slope is that of Theil and Sen: its interval tells the scatter of the surveys alone.  The change since the last
    survey is propagated jointly: what both share (the surface's emissivity, window, lens, camera, load exponent) moves
    both, the rest of each u only one.  How much of an earlier u is shared follows from that of this survey; where it is
    not stated, it is taken as that of this survey.  Significant: |change| > 2 u.
    """
    earlier = sorted(
        (row for row in history if _is_of(row, component, frame) and _is_before(row.when, taken)),
        key=lambda row: _utc(row.when),
    )
    ratios = [_ratio(component, row.load, row.rated or component.rated_a) for row in earlier]
    past = [
        (row, row.delta_ambient, ratio)
        for row, ratio in zip(earlier, ratios, strict=True)
        if row.delta_ambient is not None and isfinite(ratio)
    ]
    if not past:
        return None
    points = [(row.when, _rise(delta, ratio)) for row, delta, ratio in past]
    now, ratio_now = component.delta_ambient_k, _ratio(component, component.load_a, component.rated_a)
    change = None
    if now is not None and taken is not None and isfinite(ratio_now):
        points.append((taken, _rise(now.value, ratio_now)))
        row, delta, ratio = past[-1]
        before = Estimate(delta, now.u if row.u is None else row.u)
        load_u = 0.0 if _is_voltage_driven(component) else LOAD_U
        budget = component.budgets.get("delta_ambient_k", ())
        change = _change((now, ratio_now), (before, ratio), budget, load_u)
    slope, low, high = _slope(points)
    is_known = change is not None and change.u is not None
    return TrendReport(
        points=tuple((when.date().isoformat(), rise) for when, rise in points),
        slope_k_per_year=slope,
        slope_low_k_per_year=low,
        slope_high_k_per_year=high,
        change_k=change,
        is_significant=abs(change.value) > 2 * (change.u or 0.0) if change is not None and is_known else None,
    )


def populations(frames: Sequence[FrameReport]) -> tuple[PopulationAlarm, ...]:
    """Of each group name with at least five comparable components over all electrical frames: which of them stand out.

    Compared by their rise over ambient air, brought to rated load; where fewer than five state load and rating, all as
    they are.  Readings that are bounds are held against the others but do not count as usual.  It raises only: who does
    not stand out is not cleared by that.
    """
    groups: dict[str, list[ComponentReport]] = {}
    for frame in frames:
        for component in frame.components if frame.kind == "electrical" else ():
            if component.group and component.delta_ambient_k is not None and not _UNUSABLE & set(component.flags):
                groups.setdefault(component.group, []).append(component)
    found = (_population(group, members) for group, members in groups.items())
    return tuple(one for one in found if one is not None)


def _population(group: str, members: Sequence[ComponentReport]) -> PopulationAlarm | None:
    loaded = [one for one in members if isfinite(_ratio(one, one.load_a, one.rated_a))]
    is_rated = len(loaded) >= LEAST_COUNT
    compared = loaded if is_rated else members

    def rise(one: ComponentReport) -> float:
        value = one.delta_ambient_k.value if one.delta_ambient_k else nan
        return _rise(value, _ratio(one, one.load_a, one.rated_a)) if is_rated else value

    usual = [rise(one) for one in compared if not _BOUNDS & set(one.flags)]
    how, level = alarm(usual)
    if not isfinite(level):
        return None
    return PopulationAlarm(group, len(compared), how, level, tuple(one.key for one in compared if rise(one) > level))


def _rise(delta: float, ratio: float) -> float:
    return float(normalised_rise(delta, ratio)[0])


def _ratio(component: ComponentReport, load: float | None, rated: float | None) -> float:
    """Load over rating; NaN where not known or too low to extrapolate from; 1 where no current makes the heat."""
    if _is_voltage_driven(component):
        return 1.0
    ratio = load / rated if load is not None and rated else nan
    return ratio if ratio >= LEAST_LOAD else nan


def _is_voltage_driven(component: ComponentReport) -> bool:
    known = criteria()
    return any(known[one.criterion].methods == _BY_VOLTAGE for one in component.assessments if one.criterion in known)


def _is_of(row: Earlier, component: ComponentReport, frame: FrameReport) -> bool:
    return row.component == component.name and row.asset == (frame.asset or "")


def _utc(when: datetime) -> datetime:
    return when if when.tzinfo else when.replace(tzinfo=UTC)


def _is_before(when: datetime, taken: datetime | None) -> bool:
    """On an earlier day, in the time zone of `taken`; a date without a zone is a day of that zone."""
    if taken is None:
        return True
    there = when.astimezone(taken.tzinfo) if when.tzinfo and taken.tzinfo else when
    return there.date() < taken.date()


def _slope(points: Sequence[tuple[datetime, float]]) -> tuple[Estimate | None, float | None, float | None]:
    """Slope [K per year] and the ends of its 95 % interval, where there are enough points."""
    if len(points) < LEAST_POINTS:
        return None, None, None
    years = [_utc(when).timestamp() / 86_400 / _DAYS_PER_YEAR for when, _ in points]
    slope, low, high = theil_sen(years, [rise for _, rise in points])
    if not isfinite(slope):
        return None, None, None
    if not isfinite(low):
        return Estimate(slope, None), None, None
    return Estimate(slope, (high - low) / (2 * 1.96), (low, high)), low, high


def _change(
    now: tuple[Estimate, float], then: tuple[Estimate, float], budget: Sequence[BudgetTerm], load_u: float
) -> Estimate | None:
    """Rise at rated load now minus then [K]; each a rise and the load ratio it was seen at, `budget` that of now."""
    (delta, ratio_now), (before, ratio_then) = now, then
    if delta.u is None or before.u is None:
        return Estimate(_rise(delta.value, ratio_now) - _rise(before.value, ratio_then), None)
    scaled, shifted = (delta.u * sqrt(share) for share in _shares(budget))
    relative = scaled / abs(delta.value) if delta.value else 0.0

    def model(values: Mapping[str, NDArray[np.float64]]) -> NDArray[np.float64]:
        def at_rated(value: float, ratio: float, name: str) -> NDArray[np.float64]:
            rise = value * (1 + values["scaled"]) + values["shifted"] + values[name]
            return np.asarray(rise / load_factor(ratio * (1 + values[f"load {name}"]), values["load_exponent"]))

        return at_rated(delta.value, ratio_now, "now") - at_rated(before.value, ratio_then, "before")

    scene = Scene(
        (
            Quantity("load_exponent", LOAD_EXPONENT, LOAD_EXPONENT_U, distribution="rectangular"),
            Quantity("scaled", 0.0, relative),
            Quantity("shifted", 0.0, shifted),
            Quantity("now", 0.0, _rest(delta.u, scaled, shifted)),
            Quantity("before", 0.0, _rest(before.u, relative * abs(before.value), shifted)),
            Quantity("load now", 0.0, load_u),
            Quantity("load before", 0.0, load_u),
        )
    )
    return propagate(model, scene).estimates()[0]


def _shares(budget: Sequence[BudgetTerm]) -> tuple[float, float]:
    """Shares of the variance that come from inputs two surveys share: what scales the rise, and what shifts it."""
    bases = [(named(term.input).partition(":")[0], term.share) for term in budget]
    scaled, shifted = (sum(share for base, share in bases if base in names) for names in (_SCALED, _SHIFTED))
    return max(scaled, 0.0), max(shifted, 0.0)


def _rest(u: float, *shared: float) -> float:
    return sqrt(max(u**2 - sum(part**2 for part in shared), 0.0))
