"""Quantities within sentences written in SI units, as the style of a document shows them."""

from __future__ import annotations

import re
from datetime import date
from functools import cache
from typing import Final

from irsurvey import numbers
from irsurvey.numbers import SI, Style
from irsurvey.report.style import day
from irsurvey.texts import say

_UNITS: Final = {
    **{symbol: symbol for symbol in ("°C", "K", "m²", "cm²", "m/s", "m", "W/K", "W/(m²·K)", "m²·K/W")},
    "m² K/W": "m²·K/W",
}
"""Units as sentences write them → as `numbers` does; not W/m², which in a sentence is irradiance."""
_NUMBER = r"(?<![\w.,])[-\u2212]?\d+(?:\.\d+)?"
_QUOTED = r"“[^”]*”"
_BOUND = r"[\d.]+/U = "
"""How a bound was worked out of U in SI units."""
_DECIMAL = re.compile(rf"{_QUOTED}|(?P<number>(?<![\w.,:])\d+\.\d+)(?!\.?\w)")
_DAY = re.compile(rf"{_QUOTED}|(?<![\w.-])(?P<day>\d{{4}}-\d\d-\d\d)(?!\.?\w|-)")
_LEAST_DIGITS, _DIGITS_OF_U = 3, 2


def in_style(text: str, style: Style = SI) -> str:
    """A sentence with its quantities and days as a style shows them; names in “…” are left alone.

    A number keeps its significant digits, at least three, and U its two.  What already is in that style stays."""
    if style.units == "us":
        text = _quantity().sub(lambda found: _requantified(found, style), text)
    if style.decimal_comma:
        text = _DECIMAL.sub(lambda found: found[0].replace(".", ",") if found["number"] else found[0], text)
    if style.date_format != SI.date_format:
        text = _DAY.sub(lambda found: _dated(found, style), text)
    return text


@cache
def _quantity() -> re.Pattern[str]:
    """A quantity, or two with one unit: a range in the words of the records or of the documents."""
    between = re.escape(say("from_to", low="\n", high="\n").split("\n")[1])
    return re.compile(
        rf"{_QUOTED}|{_BOUND}"
        rf"|(?P<first>{_NUMBER})(?:(?P<joint>[ \u00a0]±[ \u00a0]| to | and |{between})(?P<second>{_NUMBER}))?[ \u00a0]"
        rf"(?P<unit>{'|'.join(re.escape(unit) for unit in sorted(_UNITS, key=len, reverse=True))})(?![\w/²·])"
    )


def _dated(found: re.Match[str], style: Style) -> str:
    try:
        return day(date.fromisoformat(found["day"]), style=style) if found["day"] else found[0]
    except ValueError:
        return found[0]


def _requantified(found: re.Match[str], style: Style) -> str:
    """One quantity of a sentence in the unit of a style."""
    if found["unit"] is None:
        return found[0] if found[0].startswith("“") else ""
    to = numbers.expressed(_UNITS[found["unit"]], style)
    first, second = found["first"], found["second"]
    value = to.factor * _parsed(first) + to.shift
    if found.string[: found.start()].endswith("±"):
        return numbers.with_symbol(numbers.number(to.factor * _parsed(first), _DIGITS_OF_U), to.symbol)
    if second is None:
        return numbers.with_symbol(numbers.number(value, _digits(first)), to.symbol)
    if "±" in found["joint"]:
        return numbers.with_symbol(numbers.plus_minus(value, to.factor * _parsed(second)), to.symbol)
    other = numbers.number(to.factor * _parsed(second) + to.shift, _digits(second))
    return f"{numbers.number(value, _digits(first))}{found['joint']}{numbers.with_symbol(other, to.symbol)}"


def _parsed(text: str) -> float:
    return float(text.replace("\u2212", "-"))


def _digits(text: str) -> int:
    """Significant digits of a number as written, three at least."""
    return max(_LEAST_DIGITS, len(re.sub(r"\D", "", text).lstrip("0")))
