"""Numbers of an electrical component as lines people read: load, wind, limits, the heat of its joint, its trend."""

from __future__ import annotations

from collections.abc import Iterator
from math import inf

from irsurvey import numbers, texts
from irsurvey.assess.limits import limits
from irsurvey.model import Band, ComponentReport, Estimate, JointHeat, TrendReport
from irsurvey.numbers import SI, Style
from irsurvey.report import results
from irsurvey.report.facts import Fact
from irsurvey.report.sentences import in_style
from irsurvey.texts import say

_CALM = {"delta_similar_in_calm_k": "delta_similar_k", "delta_ambient_in_calm_k": "delta_ambient_k"}
"""A difference brought to 1 m/s of wind → as it was measured."""
_MARGINS = ("above_limit_k", "above_allowed_k")
_AT_LEAST = ("excess_resistance_uohm", "voltage_drop_mv", "yearly_loss_kwh")
"""Of the heat of a joint: what heat that flows off along the conductor makes larger still."""


def of_component(item: ComponentReport, *, style: Style = SI) -> tuple[Fact, ...]:
    """Load and rise at rated load, wind, comparison with its twin and neighbours, absolute limit and margins.

    Nothing where there is but the load, which the table of components tells."""
    told = (*_rated(item, style), *_in_calm(item, style), *_compared(item, style), *_limit(item, style))
    load = results.load(item, item.load_a, item.rated_a, style=style)
    return (Fact(say("load"), load), *told) if told and load else told


def of_joint(item: ComponentReport, *, style: Style = SI) -> tuple[Fact, ...]:
    """The heat its joint gives off and what follows from it: estimates, all of them."""
    return tuple(_joint(item.joint, item, style)) if item.joint else ()


def of_trend(trend: TrendReport, *, style: Style = SI) -> tuple[Fact, ...]:
    """Slope of its rise over the surveys, change since the last one, and whether that is more than its uncertainty."""
    return tuple(_trend(trend, style))


def _rated(item: ComponentReport, style: Style) -> Iterator[Fact]:
    if item.at_rated_load:
        bands = {"similar": item.at_rated_load.delta_similar_k, "ambient": item.at_rated_load.delta_ambient_k}
        told = [
            f"{_band(band, 'delta_k', 2, style)} {texts.basis(basis)}"
            for basis, band in bands.items()
            if band and not band.low == band.high == 0  # the coolest twin itself
        ]
        if told:
            yield Fact(say("rise_at_rated_load"), "; ".join(told), in_style(texts.remark("rated"), style))


def _in_calm(item: ComponentReport, style: Style) -> Iterator[Fact]:
    for key, measured in _CALM.items():
        if getattr(item, key) and not (measured == "delta_similar_k" and results.is_coolest(item)):
            as_read = results.reading(item, measured, style=style)
            name = in_style(texts.name(key), style)
            note = say("as_measured", delta=as_read, remark=texts.remark("wind"))
            yield Fact(name, _reading(item, key, style), note)


def _compared(item: ComponentReport, style: Style) -> Iterator[Fact]:
    for key in ("relative_difference_percent", "delta_neighbours_k"):
        if getattr(item, key) and not (key == "relative_difference_percent" and results.is_coolest(item)):
            yield Fact(in_style(texts.name(key), style), _reading(item, key, style), in_style(texts.remark(key), style))


def _limit(item: ComponentReport, style: Style) -> Iterator[Fact]:
    if limit := item.limit:
        rise = limit.rise_k
        told = numbers.told(rise, "rise_k", style=style)
        source = say("allowed_rise", rise=told, source=limit.source) if rise else limit.source
        text = numbers.told(limit.max_c, "max_c", style=style)
        known = limits().get(limit.name)
        yield Fact(say("absolute_limit"), f"{text}, {known.what if known else limit.name}", source)
        if limit.allowed_now_c:
            yield Fact(
                say("allowed_now"),
                _band(limit.allowed_now_c, "allowed_now_c", 3, style),
                in_style(texts.remark("allowed"), style),
            )
    for key in _MARGINS:
        margin: Estimate | None = getattr(item, key)
        if margin:
            yield Fact(texts.name(key), _reading(item, key, style), _side(item, key, margin))


def _side(item: ComponentReport, key: str, margin: Estimate) -> str:
    """On which side of a limit a reading lies; a bound that lies below it tells nothing."""
    reach = inf if margin.u is None else numbers.COVERAGE_FACTOR * margin.u
    if margin.value > reach:
        return texts.remark("above")
    if results.is_bound(item, key):
        return texts.remark("bound")
    return texts.remark("below" if margin.value < -reach else "near")


def _joint(joint: JointHeat, item: ComponentReport, style: Style) -> Iterator[Fact]:
    is_bound = results.is_bound(item, "max_c")
    yield Fact(say("taken_for"), texts.form(joint.form))
    for key in ("power_w", "excess_power_w", *_AT_LEAST, "film_coefficient_w_m2k"):
        text = numbers.measured(getattr(joint, key), key, style=style)
        if text == numbers.NOTHING:
            continue
        if key in _AT_LEAST or (is_bound and key != "film_coefficient_w_m2k"):
            text = say("at_least", value=text)
        yield Fact(texts.name(key), say("estimate_of", what=text))


def _trend(trend: TrendReport, style: Style) -> Iterator[Fact]:
    slope = numbers.measured(trend.slope_k_per_year, "slope_k_per_year", style=style)
    low, high = trend.slope_low_k_per_year, trend.slope_high_k_per_year
    if slope != numbers.NOTHING:
        ends = ""
        if low is not None and high is not None:
            way = "rises" if low > 0 else "falls" if high < 0 else "level"
            first, last = _ends(Band(low, high), "slope_k_per_year", 2, style)
            ends = say("slope_ends", low=first, high=last, remark=texts.remark(way))
        yield Fact(texts.name("trend_slope"), slope, ends)
    change = numbers.measured(trend.change_k, "change_k", style=style)
    if change != numbers.NOTHING:
        told = {None: "", True: "significant", False: "insignificant"}[trend.is_significant]
        yield Fact(texts.name("trend_change"), change, texts.remark(told))


def _band(band: Band, key: str, digits: int, style: Style) -> str:
    """A range with the unit of its key: "32.1 to 35.9 °C"."""
    low, high = _ends(band, key, digits, style)
    return say("from_to", low=low, high=high)


def _ends(band: Band, key: str, digits: int, style: Style) -> tuple[str, str]:
    """The ends of a range, the unit behind the last."""
    low, high = (
        numbers.number(numbers.converted(end, key, style=style), digits, style=style) for end in (band.low, band.high)
    )
    return low, numbers.with_unit(high, key, style=style)


def _reading(item: ComponentReport, key: str, style: Style) -> str:
    """One number with its unit and, where it was drawn, its interval."""
    text, drawn = results.reading(item, key, style=style), results.interval(item, key, style=style)
    return f"{text}; {drawn}" if drawn else text
