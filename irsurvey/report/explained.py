"""How the numbers of a document read, and where all of them are."""

from __future__ import annotations

from irsurvey import numbers
from irsurvey.numbers import SI, Style
from irsurvey.texts import say


def numbers_how(*, style: Style = SI) -> str:
    """What ±, temperatures, differences and the sign of a heat flux mean, in a style."""
    temperature, difference = (numbers.unit(key, style=style) for key in ("air_c", "delta_k"))
    units = say("units_differ", temperature=temperature, difference=difference)
    if temperature == difference:
        kelvin = numbers.number(numbers.scale("delta_k", style).factor, style=style)
        units = say("units_same", temperature=temperature, difference=difference, kelvin=kelvin)
    return say("numbers_how", units=units)


def beside_files(*, style: Style = SI) -> str:
    """The key of the sentence on the files that hold all numbers, which are in SI units whatever the style."""
    return "beside_files" if style.units == SI.units else "beside_files_si"
