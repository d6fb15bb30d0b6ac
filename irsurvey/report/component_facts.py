"""Numbers of an electrical component as lines people read: load, wind, limits, the heat of its joint, its trend."""

from __future__ import annotations

from collections.abc import Iterator
from math import inf

from irsurvey import numbers
from irsurvey.assess.limits import limits
from irsurvey.model import Band, ComponentReport, Estimate, JointHeat, TrendReport
from irsurvey.report import results, texts
from irsurvey.report.facts import Fact

_CALM = {"delta_similar_in_calm_k": "delta_similar_k", "delta_ambient_in_calm_k": "delta_ambient_k"}
"""A difference brought to 1 m/s of wind → as it was measured."""
_MARGINS = ("above_limit_k", "above_allowed_k")
_AT_LEAST = ("excess_resistance_uohm", "voltage_drop_mv", "yearly_loss_kwh")
"""Of the heat of a joint: what heat that flows off along the conductor makes larger still."""
_ESTIMATE = "an estimate"


def of_component(item: ComponentReport) -> tuple[Fact, ...]:
    """Load and rise at rated load, wind, comparison with its twin and neighbours, absolute limit and margins.

    Nothing where there is but the load, which the table of components tells."""
    told = (*_rated(item), *_in_calm(item), *_compared(item), *_limit(item))
    load = results.load(item, item.load_a, item.rated_a)
    return (Fact("Load", load), *told) if told and load else told


def of_joint(item: ComponentReport) -> tuple[Fact, ...]:
    """The heat its joint gives off and what follows from it: estimates, all of them."""
    return tuple(_joint(item.joint, item)) if item.joint else ()


def of_trend(trend: TrendReport) -> tuple[Fact, ...]:
    """Slope of its rise over the surveys, change since the last one, and whether that is more than its uncertainty."""
    return tuple(_trend(trend))


def _rated(item: ComponentReport) -> Iterator[Fact]:
    if item.at_rated_load:
        bands = {"similar": item.at_rated_load.delta_similar_k, "ambient": item.at_rated_load.delta_ambient_k}
        told = [
            f"{_band(band, 'delta_k', 2)} {texts.basis(basis)}"
            for basis, band in bands.items()
            if band and not band.low == band.high == 0  # the coolest twin itself
        ]
        if told:
            yield Fact("Rise at rated load", "; ".join(told), texts.remark("rated"))


def _in_calm(item: ComponentReport) -> Iterator[Fact]:
    for key, measured in _CALM.items():
        if getattr(item, key):
            as_read = results.reading(item, measured)
            yield Fact(texts.name(key), _reading(item, key), f"{as_read} as measured; {texts.remark('wind')}")


def _compared(item: ComponentReport) -> Iterator[Fact]:
    for key in ("relative_difference_percent", "delta_neighbours_k"):
        if getattr(item, key):
            yield Fact(texts.name(key), _reading(item, key), texts.remark(key))


def _limit(item: ComponentReport) -> Iterator[Fact]:
    if limit := item.limit:
        rise = limit.rise_k
        allowed = f"{numbers.with_symbol(numbers.number(rise), 'K')} above ambient air at rated load; " if rise else ""
        text = numbers.with_symbol(numbers.number(limit.max_c), "°C")
        known = limits().get(limit.name)
        yield Fact("Absolute limit", f"{text}, {known.what if known else limit.name}", f"{allowed}{limit.source}")
        if limit.allowed_now_c:
            yield Fact("Allowed now", _band(limit.allowed_now_c, "allowed_now_c", 3), texts.remark("allowed"))
    for key in _MARGINS:
        margin: Estimate | None = getattr(item, key)
        if margin:
            yield Fact(texts.name(key), _reading(item, key), _side(item, key, margin))


def _side(item: ComponentReport, key: str, margin: Estimate) -> str:
    """On which side of a limit a reading lies; a bound that lies below it tells nothing."""
    reach = inf if margin.u is None else numbers.COVERAGE_FACTOR * margin.u
    if margin.value > reach:
        return texts.remark("above")
    if results.is_bound(item, key):
        return texts.remark("bound")
    return texts.remark("below" if margin.value < -reach else "near")


def _joint(joint: JointHeat, item: ComponentReport) -> Iterator[Fact]:
    is_bound = results.is_bound(item, "max_c")
    yield Fact("Taken for", texts.form(joint.form))
    for key in ("power_w", "excess_power_w", *_AT_LEAST, "film_coefficient_w_m2k"):
        text = numbers.measured(getattr(joint, key), key)
        if text == numbers.NOTHING:
            continue
        at_least = "at least " if key in _AT_LEAST or (is_bound and key != "film_coefficient_w_m2k") else ""
        yield Fact(texts.name(key), f"{at_least}{text}, {_ESTIMATE}")


def _trend(trend: TrendReport) -> Iterator[Fact]:
    slope = numbers.measured(trend.slope_k_per_year, "slope_k_per_year")
    low, high = trend.slope_low_k_per_year, trend.slope_high_k_per_year
    if slope != numbers.NOTHING:
        ends = ""
        if low is not None and high is not None:
            way = "rises" if low > 0 else "falls" if high < 0 else "level"
            ends = f"{_band(Band(low, high), 'slope_k_per_year', 2)} (95\u00a0%): {texts.remark(way)}"
        yield Fact(texts.name("trend_slope"), slope, ends)
    change = numbers.measured(trend.change_k, "change_k")
    if change != numbers.NOTHING:
        told = {None: "", True: "significant", False: "insignificant"}[trend.is_significant]
        yield Fact(texts.name("trend_change"), change, texts.remark(told))


def _band(band: Band, key: str, digits: int) -> str:
    """A range with the unit of its key: "32.1 to 35.9 °C"."""
    return numbers.with_unit(f"{numbers.number(band.low, digits)} to {numbers.number(band.high, digits)}", key)


def _reading(item: ComponentReport, key: str) -> str:
    """One number with its unit and, where it was drawn, its interval."""
    drawn = results.interval(item, key)
    return f"{results.reading(item, key)}; {drawn}" if drawn else results.reading(item, key)
