"""How a number is shown to people: rounded once, here, with its unit and its expanded uncertainty."""

from __future__ import annotations

from decimal import ROUND_CEILING, ROUND_HALF_EVEN, Context, Decimal
from math import copysign, isfinite, log10

from irsurvey.model import Estimate, Input

COVERAGE_FACTOR = 2.0
"""U = k·u with k = 2: about 95 % coverage where the result is nearly normal (JCGM 100:2008, 6.3.3)."""

_ANY_SIZE = Context(prec=700, rounding=ROUND_HALF_EVEN)  # the digits of any float before and after its point

NOTHING = "–"
"""What stands where there is no number."""

UNITS = {
    "m2k_w": "m²·K/W",
    "w_m2k": "W/(m²·K)",
    "w_m2": "W/m²",
    "w_mk": "W/(m·K)",
    "w_k": "W/K",
    "kwh": "kWh",
    "kd": "K·d",
    "g_m3": "g/m³",
    "m_s": "m/s",
    "k_per_m": "K/m",
    "k_per_px": "K/px",
    "per_pixel": "1/px",
    "percent": "%",
    "k_per_year": "K/year",
    "uohm": "µΩ",
    "mv": "mV",
    "mrad": "mrad",
    "hpa": "hPa",
    "m2": "m²",
    "deg": "°",
    "pa": "Pa",
    "px": "px",
    "um": "µm",
    "a": "A",
    "c": "°C",
    "k": "K",
    "m": "m",
    "w": "W",
}
"""The ending of a key → the unit as people write it; longer endings first."""


SMALL_AREA_M2 = 0.01
"""Areas below it are shown in cm²."""

_OF_A_DIFFERENCE = {"°C": "K", "%": "points"}
"""Units in which a change is not told as the number itself is: 45 % and 50 % are 5 points apart, or 11 %."""


def unit(key: str) -> str:
    """The unit that the ending of a key stands for: "delta_k" → "K"; "" where the number has none.

    What follows a colon names whose number it is: "temperature_c:plate" → "°C"."""
    stem = key.partition(":")[0]
    return next((symbol for ending, symbol in UNITS.items() if stem.endswith(f"_{ending}")), "")


def difference_unit(key: str) -> str:
    """The unit of a change of that number, and of its uncertainty: "air_c" → "K"."""
    return _OF_A_DIFFERENCE.get(unit(key), unit(key))


def plus_minus(value: float, expanded: float) -> str:
    """A value and its expanded uncertainty U: "3.14 ± 0.28".

    The one rule used everywhere: U keeps two significant digits, rounded to the nearest, and the value is
    rounded to the same decimal place.  JCGM 100:2008, 7.2.6: at most two digits in U, the estimate consistent
    with it.  To the nearest rather than up: the usual rules of rounding, as ILAC-P14:01/2013, 6.3 b asks."""
    place = _place(expanded, 2)
    return f"{_rounded(value, place)}\u00a0±\u00a0{_rounded(expanded, place)}"


def shown(estimate: Estimate | None) -> str:
    """A result for people: value ± U (k = 2), the value alone where U is not known, "–" where there is none."""
    if estimate is None or not isfinite(estimate.value):
        return NOTHING
    if estimate.u is None or not isfinite(estimate.u) or estimate.u <= 0:
        return number(estimate.value)
    return plus_minus(estimate.value, COVERAGE_FACTOR * estimate.u)


def measured(estimate: Estimate | None, key: str, *, unit: bool = True) -> str:
    """A result for people with the unit its key ends in; small areas in cm², named even in a column of m²."""
    if estimate is not None and _is_small_area(estimate.value, key):
        return with_symbol(shown(_scaled(estimate, 1e4)), "cm²")
    return with_unit(shown(estimate), key) if unit else shown(estimate)


def interval_of(estimate: Estimate | None, key: str) -> str:
    """The 95 % interval beside what `measured` shows, in the same unit; "" where ± U tells it."""
    if estimate is not None and _is_small_area(estimate.value, key):
        return interval(_scaled(estimate, 1e4))
    return interval(estimate)


def magnitude(estimate: Estimate | None) -> str:
    """A result too uncertain for its digits: "of the order of 100", its nearest power of ten; "at most about 500",
    its upper end rounded up, where its standard uncertainty exceeds it, so that it may be nothing; "–" for none."""
    if estimate is None or estimate.u is None or not (isfinite(estimate.value) and isfinite(estimate.u)):
        return NOTHING
    if estimate.u < abs(estimate.value):
        power = Decimal(1).scaleb(round(log10(abs(estimate.value))))
        return f"of the order of {_rounded(copysign(float(power), estimate.value), min(power.adjusted(), 0))}"
    most = estimate.value + COVERAGE_FACTOR * estimate.u
    if most <= 0:
        return NOTHING
    return f"at most about {Context(prec=1, rounding=ROUND_CEILING).create_decimal(repr(most)):f}"


def interval(estimate: Estimate | None) -> str:
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
    return f"{_rounded(low, place)} to {_rounded(high, place)} (95\u00a0%)"


def signed(value: float, digits: int = 2) -> str:
    """A change, to so many significant digits and with its sign: "+0.5", "−1.3"."""
    return f"+{number(value, digits)}" if value > 0 else number(value, digits)


def stated(entry: Input) -> str:
    """An input for people: value ± U (k = 2), or the value as it was stated where it carries no uncertainty."""
    return number(entry.value, 6) if entry.u <= 0 else shown(Estimate(entry.value, entry.u))


def number(value: float | None, digits: int = 4) -> str:
    """A number without a known uncertainty, to so many significant digits and no trailing zeros; "–" for none."""
    if value is None or not isfinite(value):
        return NOTHING
    if value == 0:
        return "0"
    text = _rounded(value, _place(value, digits))
    return text.rstrip("0").rstrip(".") if "." in text else text


def grouped(count: int) -> str:
    """A count, its digits in threes: "20 000"."""
    return f"{count:,}".replace(",", "\u202f")


def rounded_up(value: float | None) -> str:
    """A smallest size or deviation, two significant digits and upwards, so that no more is promised than was seen."""
    if value is None or not isfinite(value) or value <= 0:
        return NOTHING
    return f"{Context(prec=2, rounding=ROUND_CEILING).create_decimal(repr(float(value))):f}"


def least_area(square_metres: float) -> str:
    """A smallest area, rounded up, with its unit."""
    if square_metres < SMALL_AREA_M2:
        return with_symbol(rounded_up(float(f"{square_metres * 1e4:.9g}")), "cm²")  # 0.0011 m² are 11 cm², not 12
    return with_symbol(rounded_up(square_metres), "m²")


def area_range(value: float, low: float, high: float) -> str:
    """An area and what it may be, in one unit: "0.35 m² (0.12 to 0.9 m²)"."""
    factor, symbol = (1e4, "cm²") if max(value, low, high) < SMALL_AREA_M2 else (1.0, "m²")
    middle, least, most = (number(area * factor, 2) for area in (value, low, high))
    return f"{with_symbol(middle, symbol)} ({least} to {with_symbol(most, symbol)})"


def decimals(value: float | None, places: int) -> str:
    """A number to so many decimal places, for columns and scales; "–" for none."""
    return NOTHING if value is None or not isfinite(value) else _rounded(value, -places)


def percent(fraction: float | None) -> str:
    """A probability in whole percent; what is not quite 0 or 1 is never shown as if it were."""
    if fraction is None or not isfinite(fraction):
        return NOTHING
    if 0 < fraction < 0.005:
        return "<\u00a01\u00a0%"
    if 0.995 < fraction < 1:
        return ">\u00a099\u00a0%"
    return f"{_rounded(100 * fraction, 0)}\u00a0%"


def with_unit(text: str, key: str) -> str:
    """The number, a space that does not break, and the unit its key ends in."""
    return with_symbol(text, unit(key))


def with_symbol(text: str, symbol: str) -> str:
    """The number, a space that does not break, and a unit; the number alone where there is no unit."""
    space = "" if symbol == "°" else "\u00a0"
    return f"{text}{space}{symbol}" if symbol and text != NOTHING else text


def _scaled(estimate: Estimate, factor: float) -> Estimate:
    """A result in a unit that is 1/factor of its own."""
    drawn = estimate.interval_95
    return Estimate(
        estimate.value * factor,
        None if estimate.u is None else estimate.u * factor,
        drawn and (drawn[0] * factor, drawn[1] * factor),
    )


def _is_small_area(value: float, key: str) -> bool:
    return unit(key) == "m²" and 0 < value < SMALL_AREA_M2


def _place(value: float, digits: int) -> int:
    """The decimal place 10^place of the last of so many significant digits, after rounding to them."""
    place = Decimal(f"{value:.{digits - 1}e}").as_tuple().exponent
    assert isinstance(place, int)  # only infinities and NaN have another exponent
    return place


def _rounded(value: float, place: int) -> str:
    """`value` to the decimal place 10^place, halves to even, positional, with a true minus sign and no minus zero."""
    rounded = Decimal(repr(float(value))).quantize(Decimal(1).scaleb(place), context=_ANY_SIZE)
    return f"{abs(rounded) if rounded == 0 else rounded:f}".replace("-", "\u2212")
