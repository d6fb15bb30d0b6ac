"""How a number is shown to people: rounded once, here, with its unit and its expanded uncertainty."""

from __future__ import annotations

from dataclasses import dataclass
from decimal import ROUND_CEILING, ROUND_HALF_EVEN, Context, Decimal
from math import copysign, isfinite, log10
from typing import Final

from irsurvey import texts
from irsurvey.model import Estimate, Input
from irsurvey.units import UNITS


@dataclass(frozen=True, slots=True)
class Style:
    """How numbers and days are written for people; never for machines: reports and tables of data stay as they are."""

    units: str = "si"  # "si" | "us"
    decimal_comma: bool = False
    date_format: str = "%Y-%m-%d"


SI: Final = Style()
"""Metric units, a decimal point, ISO 8601 days: what counts where a survey asks for nothing else."""


@dataclass(frozen=True, slots=True)
class Scale:
    """A unit: what it is called, and how a number of the SI unit becomes one of it: factor · value + shift."""

    symbol: str
    factor: float = 1.0
    shift: float = 0.0


COVERAGE_FACTOR = 2.0
"""U = k·u with k = 2: about 95 % coverage where the result is nearly normal (JCGM 100:2008, 6.3.3)."""

_ANY_SIZE = Context(prec=700, rounding=ROUND_HALF_EVEN)  # the digits of any float before and after its point

NOTHING = "–"
"""What stands where there is no number."""

_FOOT, _INCH, _MILE = 0.3048, 0.0254, 1609.344  # m, exact (NIST SP 811, 2008, B.8)
_BTU = 1055.05585262 / 3600  # W of 1 Btu/h, International Table (NIST SP 811, B.8)
_GRAIN = 0.06479891  # g, exact
_INCH_OF_MERCURY = 33.86389  # hPa, conventional (NIST SP 811, B.8)

_US: Final = {
    "°C": Scale("°F", 1.8, 32.0),
    "K": Scale("°F", 1.8),
    "K·d": Scale("°F·d", 1.8),
    "K/m": Scale("°F/ft", 1.8 * _FOOT),
    "K/px": Scale("°F/px", 1.8),
    "K/year": Scale("°F/year", 1.8),
    "m": Scale("ft", 1 / _FOOT),
    "m²": Scale("ft²", 1 / _FOOT**2),
    "cm²": Scale("in²", 1e-4 / _INCH**2),
    "m/s": Scale("mph", 3600 / _MILE),
    "hPa": Scale("inHg", 1 / _INCH_OF_MERCURY),
    "g/m³": Scale("gr/ft³", _FOOT**3 / _GRAIN),
    "W": Scale("Btu/h", 1 / _BTU),
    "W/K": Scale("Btu/(h·°F)", 1 / (1.8 * _BTU)),
    "W/m²": Scale("Btu/(h·ft²)", _FOOT**2 / _BTU),
    "W/(m·K)": Scale("Btu/(h·ft·°F)", _FOOT / (1.8 * _BTU)),
    "W/(m²·K)": Scale("Btu/(h·ft²·°F)", _FOOT**2 / (1.8 * _BTU)),
    "m²·K/W": Scale("h·ft²·°F/Btu", 1.8 * _BTU / _FOOT**2),
}
"""Unit of the SI → what stands for it in the United States; what is not here is the same there."""
_SAME_EVERYWHERE = ("irradiance_w_m2", "power_w")
"""Endings of keys that keep their unit: what a solar trade and an electrician read in watts there as well."""

SMALL_AREA_M2 = 0.01
"""Areas below it are shown in cm², or square inches."""

_OF_A_DIFFERENCE = {"°C": "K", "%": "points"}
"""Units in which a change is not told as the number itself is: 45 % and 50 % are 5 points apart, or 11 %."""


def expressed(symbol: str, style: Style = SI) -> Scale:
    """How a number with a unit of the SI is shown in a style."""
    return _US.get(symbol, Scale(symbol)) if style.units == "us" else Scale(symbol)


def scale(key: str, style: Style = SI) -> Scale:
    """How the number of a key is shown in a style."""
    stem = key.partition(":")[0]
    return Scale(_symbol(stem)) if stem.endswith(_SAME_EVERYWHERE) else expressed(_symbol(stem), style)


def difference_scale(key: str, style: Style = SI) -> Scale:
    """How a change of that number, or its uncertainty, is shown: "air_c" as K, or °F."""
    symbol = _symbol(key.partition(":")[0])
    return expressed(_OF_A_DIFFERENCE.get(symbol, symbol), style) if symbol in _OF_A_DIFFERENCE else scale(key, style)


def unit(key: str, *, style: Style = SI) -> str:
    """The unit that the ending of a key stands for: "delta_k" → "K"; "" where the number has none.

    What follows a colon names whose number it is: "temperature_c:plate" → "°C"."""
    return scale(key, style).symbol


def difference_unit(key: str, *, style: Style = SI) -> str:
    """The unit of a change of that number, and of its uncertainty: "air_c" → "K"."""
    return difference_scale(key, style).symbol


def converted(value: float, key: str, *, style: Style = SI) -> float:
    """The number of a key in the unit that a style shows it in."""
    to = scale(key, style)
    return to.factor * value + to.shift


def plus_minus(value: float, expanded: float, *, style: Style = SI) -> str:
    """A value and its expanded uncertainty U: "3.14 ± 0.28".

    The one rule used everywhere: U keeps two significant digits, rounded to the nearest, and the value is
    rounded to the same decimal place.  JCGM 100:2008, 7.2.6: at most two digits in U, the estimate consistent
    with it.  To the nearest rather than up: the usual rules of rounding, as ILAC-P14:01/2013, 6.3 b asks."""
    place = _place(expanded, 2)
    return f"{_rounded(value, place, style)}\u00a0±\u00a0{_rounded(expanded, place, style)}"


def shown(estimate: Estimate | None, *, style: Style = SI) -> str:
    """A result for people: value ± U (k = 2), the value alone where U is not known, "–" where there is none."""
    if estimate is None or not isfinite(estimate.value):
        return NOTHING
    if estimate.u is None or not isfinite(estimate.u) or estimate.u <= 0:
        return number(estimate.value, style=style)
    return plus_minus(estimate.value, COVERAGE_FACTOR * estimate.u, style=style)


def measured(estimate: Estimate | None, key: str, *, unit: bool = True, style: Style = SI) -> str:
    """A result for people with the unit its key ends in; small areas in cm², named even in a column of m²."""
    if estimate is not None and _is_small_area(estimate.value, key):
        small = expressed("cm²", style)
        return with_symbol(shown(_scaled(estimate, Scale("", 1e4 * small.factor)), style=style), small.symbol)
    to = scale(key, style)
    text = shown(estimate and _scaled(estimate, to), style=style)
    return with_symbol(text, to.symbol) if unit else text


def interval_of(estimate: Estimate | None, key: str, *, style: Style = SI) -> str:
    """The 95 % interval beside what `measured` shows, in the same unit; "" where ± U tells it."""
    if estimate is None:
        return ""
    if _is_small_area(estimate.value, key):
        return interval(_scaled(estimate, Scale("", 1e4 * expressed("cm²", style).factor)), style=style)
    return interval(_scaled(estimate, scale(key, style)), style=style)


def magnitude(estimate: Estimate | None, *, style: Style = SI) -> str:
    """A result too uncertain for its digits: "of the order of 100", its nearest power of ten; "at most about 500",
    its upper end rounded up, where its standard uncertainty exceeds it, so that it may be nothing; "–" for none."""
    if estimate is None or estimate.u is None or not (isfinite(estimate.value) and isfinite(estimate.u)):
        return NOTHING
    if estimate.u < abs(estimate.value):
        power = Decimal(1).scaleb(round(log10(abs(estimate.value))))
        nearest = copysign(float(power), estimate.value)
        return texts.say("order_of", value=_rounded(nearest, min(power.adjusted(), 0), style))
    most = estimate.value + COVERAGE_FACTOR * estimate.u
    if most <= 0:
        return NOTHING
    return texts.say("at_most_about", value=_upwards(most, 1, style))


def interval(estimate: Estimate | None, *, style: Style = SI) -> str:
    """The 95 % interval of a result, to the place of its U, where ± U does not tell it: "15.1 to 16.6 (95 %)"; else "".

    ± U tells it where both arms are alike and no longer than U: first order, a rectangular input dominating.
    """
    if estimate is None or estimate.interval_95 is None or not all(isfinite(end) for end in estimate.interval_95):
        return ""
    low, high = estimate.interval_95
    if not high > low:
        return ""
    expanded = COVERAGE_FACTOR * estimate.u if estimate.u else (high - low) / 2
    arms = estimate.value - low, high - estimate.value
    if estimate.u and abs(arms[0] - arms[1]) <= 1e-3 * expanded and max(arms) <= expanded:
        return ""
    place = _place(expanded, 2)
    return texts.say("interval_95", low=_rounded(low, place, style), high=_rounded(high, place, style))


def signed(value: float, digits: int = 2, *, style: Style = SI) -> str:
    """A change, to so many significant digits and with its sign: "+0.5", "−1.3"."""
    return f"+{number(value, digits, style=style)}" if value > 0 else number(value, digits, style=style)


def stated(entry: Input, key: str = "", *, style: Style = SI) -> str:
    """An input for people: value ± U (k = 2), or the value as it was stated where it carries no uncertainty."""
    to = scale(key, style)
    if entry.u > 0:
        return shown(_scaled(Estimate(entry.value, entry.u), to), style=style)
    return number(to.factor * entry.value + to.shift, 6 if to.factor == 1 else 4, style=style)


def given(value: float, u: float, key: str, *, style: Style = SI) -> str:
    """The number of a key and its standard uncertainty as value ± U (k = 2), with its unit."""
    return measured(Estimate(value, u), key, style=style)


def told(value: float | None, key: str, digits: int = 4, *, style: Style = SI) -> str:
    """The number of a key without a known uncertainty, to so many significant digits, with its unit; "–" for none."""
    return NOTHING if value is None else in_symbol(value, scale(key, style), digits, style=style)


def in_symbol(value: float, to: Scale, digits: int = 4, *, style: Style = SI) -> str:
    """A number of the SI in a unit of a style, to so many significant digits, with that unit; "–" for none."""
    return with_symbol(number(to.factor * value + to.shift, digits, style=style), to.symbol)


def number(value: float | None, digits: int = 4, *, style: Style = SI) -> str:
    """A number without a known uncertainty, to so many significant digits and no trailing zeros; "–" for none."""
    if value is None or not isfinite(value):
        return NOTHING
    if value == 0:
        return "0"
    text = _rounded(value, _place(value, digits))
    return _pointed(text.rstrip("0").rstrip(".") if "." in text else text, style)


def grouped(count: int) -> str:
    """A count, its digits in threes: "20 000"."""
    return f"{count:,}".replace(",", "\u202f")


def rounded_up(value: float | None, *, style: Style = SI) -> str:
    """A smallest size or deviation, two significant digits and upwards, so that no more is promised than was seen."""
    if value is None or not isfinite(value) or value <= 0:
        return NOTHING
    return _upwards(float(value), 2, style)


def least(value: float | None, key: str, *, style: Style = SI) -> str:
    """The same of a key, with its unit."""
    to = scale(key, style)
    return with_symbol(rounded_up(None if value is None else _tidy(to.factor * value), style=style), to.symbol)


def least_area(square_metres: float, *, style: Style = SI) -> str:
    """A smallest area, rounded up, with its unit."""
    if square_metres < SMALL_AREA_M2:
        to = expressed("cm²", style)
        return with_symbol(rounded_up(_tidy(square_metres * 1e4 * to.factor), style=style), to.symbol)
    return least(square_metres, "area_m2", style=style)


def area_range(value: float, low: float, high: float, *, style: Style = SI) -> str:
    """An area and what it may be, in one unit: "0.35 m² (0.12 to 0.9 m²)"."""
    is_small = max(value, low, high) < SMALL_AREA_M2
    to = expressed("cm²" if is_small else "m²", style)
    factor = to.factor * (1e4 if is_small else 1.0)
    middle, lowest, most = (number(area * factor, 2, style=style) for area in (value, low, high))
    return f"{with_symbol(middle, to.symbol)} ({texts.say('from_to', low=lowest, high=with_symbol(most, to.symbol))})"


def decimals(value: float | None, places: int, *, style: Style = SI) -> str:
    """A number to so many decimal places, for columns and scales; "–" for none."""
    return NOTHING if value is None or not isfinite(value) else _rounded(value, -places, style)


def percent(fraction: float | None) -> str:
    """A probability in whole percent; what is not quite 0 or 1 is never shown as if it were."""
    if fraction is None or not isfinite(fraction):
        return NOTHING
    if 0 < fraction < 0.005:
        return "<\u00a01\u00a0%"
    if 0.995 < fraction < 1:
        return ">\u00a099\u00a0%"
    return f"{_rounded(100 * fraction, 0)}\u00a0%"


def with_unit(text: str, key: str, *, style: Style = SI) -> str:
    """The number, a space that does not break, and the unit its key ends in."""
    return with_symbol(text, unit(key, style=style))


def with_symbol(text: str, symbol: str) -> str:
    """The number, a space that does not break, and a unit; the number alone where there is no unit."""
    space = "" if symbol == "°" else "\u00a0"
    return f"{text}{space}{texts.symbol(symbol)}" if symbol and text != NOTHING else text


def _symbol(stem: str) -> str:
    return next((symbol for ending, symbol in UNITS.items() if stem.endswith(f"_{ending}")), "")


def _scaled(estimate: Estimate, to: Scale) -> Estimate:
    """A result in another unit."""
    if to.factor == 1 and to.shift == 0:
        return estimate
    drawn = estimate.interval_95
    return Estimate(
        to.factor * estimate.value + to.shift,
        None if estimate.u is None else to.factor * estimate.u,
        drawn and (to.factor * drawn[0] + to.shift, to.factor * drawn[1] + to.shift),
    )


def _is_small_area(value: float, key: str) -> bool:
    return unit(key) == "m²" and 0 < value < SMALL_AREA_M2


def _place(value: float, digits: int) -> int:
    """The decimal place 10^place of the last of so many significant digits, after rounding to them."""
    place = Decimal(f"{value:.{digits - 1}e}").as_tuple().exponent
    assert isinstance(place, int)  # only infinities and NaN have another exponent
    return place


def _rounded(value: float, place: int, style: Style = SI) -> str:
    """`value` to the decimal place 10^place, halves to even, positional, with a true minus sign and no minus zero."""
    rounded = Decimal(repr(float(value))).quantize(Decimal(1).scaleb(place), context=_ANY_SIZE)
    return _pointed(f"{abs(rounded) if rounded == 0 else rounded:f}".replace("-", "\u2212"), style)


def _upwards(value: float, digits: int, style: Style) -> str:
    """A positive number to so many significant digits, never below it."""
    return _pointed(f"{Context(prec=digits, rounding=ROUND_CEILING).create_decimal(repr(value)):f}", style)


def _tidy(value: float) -> float:
    """Without the last digits that a conversion leaves: 0.0011 m² are 11 cm², not 12."""
    return float(f"{value:.9g}")


def _pointed(text: str, style: Style) -> str:
    return text.replace(".", ",") if style.decimal_comma else text
