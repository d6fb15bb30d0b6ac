"""How a number is shown to people: rounded once, here, with its unit and its expanded uncertainty."""

from __future__ import annotations

from decimal import ROUND_CEILING, ROUND_HALF_EVEN, Context, Decimal
from math import isfinite

from irsurvey.model import Estimate, Input

COVERAGE_FACTOR = 2.0
"""U = k·u with k = 2: about 95 % coverage where the result is nearly normal (JCGM 100:2008, 6.3.3)."""

_ANY_SIZE = Context(prec=700, rounding=ROUND_HALF_EVEN)  # the digits of any float before and after its point

NOTHING = "–"
"""What stands where there is no number."""

UNITS = {
    "w_m2": "W/m²",
    "g_m3": "g/m³",
    "m_s": "m/s",
    "per_pixel": "1/px",
    "percent": "%",
    "mrad": "mrad",
    "hpa": "hPa",
    "m2": "m²",
    "deg": "°",
    "pa": "Pa",
    "um": "µm",
    "a": "A",
    "c": "°C",
    "k": "K",
    "m": "m",
    "w": "W",
}
"""The ending of a key → the unit as people write it; longer endings first."""


def unit(key: str) -> str:
    """The unit that the ending of a key stands for: "delta_k" → "K"; "" where the number has none."""
    return next((symbol for ending, symbol in UNITS.items() if key.endswith(f"_{ending}")), "")


def plus_minus(value: float, expanded: float) -> str:
    """A value and its expanded uncertainty U: "3.14 ± 0.28".

    U keeps two significant digits and the value is rounded to the same decimal place, the one rule used
    everywhere (JCGM 100:2008, 7.2.6: at most two digits in U, the estimate rounded consistently with it)."""
    place = Decimal(f"{expanded:.1e}").as_tuple().exponent
    assert isinstance(place, int)  # only infinities and NaN have another exponent
    return f"{_rounded(value, place)}\u00a0±\u00a0{_rounded(expanded, place)}"


def shown(estimate: Estimate | None) -> str:
    """A result for people: value ± U (k = 2), the value alone where U is not known, "–" where there is none."""
    if estimate is None or not isfinite(estimate.value):
        return NOTHING
    if estimate.u is None or not isfinite(estimate.u) or estimate.u <= 0:
        return number(estimate.value)
    return plus_minus(estimate.value, COVERAGE_FACTOR * estimate.u)


def stated(entry: Input) -> str:
    """An input for people: value ± U (k = 2), or the value as it was stated where it carries no uncertainty."""
    return number(entry.value, 6) if entry.u <= 0 else shown(Estimate(entry.value, entry.u))


def number(value: float | None, digits: int = 4) -> str:
    """A number without a known uncertainty, to so many significant digits and no trailing zeros; "–" for none."""
    if value is None or not isfinite(value):
        return NOTHING
    if value == 0:
        return "0"
    place = Decimal(f"{value:.{digits - 1}e}").as_tuple().exponent
    assert isinstance(place, int)
    text = _rounded(value, place)
    return text.rstrip("0").rstrip(".") if "." in text else text


def rounded_up(value: float | None) -> str:
    """A smallest size or deviation, two significant digits and upwards, so that no more is promised than was seen."""
    if value is None or not isfinite(value) or value <= 0:
        return NOTHING
    return f"{Context(prec=2, rounding=ROUND_CEILING).create_decimal(repr(float(value))):f}"


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
    symbol = unit(key)
    space = "" if symbol == "°" else "\u00a0"
    return f"{text}{space}{symbol}" if symbol and text != NOTHING else text


def _rounded(value: float, place: int) -> str:
    """`value` to the decimal place 10^place, halves to even, positional, with a true minus sign and no minus zero."""
    rounded = Decimal(repr(float(value))).quantize(Decimal(1).scaleb(place), context=_ANY_SIZE)
    return f"{abs(rounded) if rounded == 0 else rounded:f}".replace("-", "\u2212")
