"""What the tables of the survey file are made of: kinds of number and text with limits, and descriptions of keys.

A default says what counts when a key stands at no level; `None` means absent.  What was stated is told by
`model_fields_set`, so a default never overrides a level above.
"""

from __future__ import annotations

import datetime
import re
from typing import Annotated, Any

from pydantic import AfterValidator, BaseModel, ConfigDict, Field, Strict, WithJsonSchema
from pydantic_core import PydanticCustomError


def wrong(expected: str, got: str, remedy: str = "", *, key: str = "", of: tuple[str, ...] = ()) -> PydanticCustomError:
    """A fault found by a table's own check, at its `key` or the table; `of` are other keys it would not be without."""
    details = {"expected": expected, "got": got, "remedy": remedy, "key": key, "of": of}
    return PydanticCustomError("survey", "{expected}", details)


def key(description: str, default: Any = None, **constraints: Any) -> Any:
    """A key that may be absent."""
    return Field(default, description=description, **constraints)


def required(description: str, **constraints: Any) -> Any:
    """A key that must stand in its table."""
    return Field(description=description, **constraints)


class Table(BaseModel):
    """A TOML table: an unknown key is a fault."""

    model_config = ConfigDict(extra="forbid", frozen=True)

    def stated(self) -> dict[str, Any]:
        """What the file says in this table, without defaults."""
        return {name: getattr(self, name) for name in type(self).model_fields if name in self.model_fields_set}


def table_or_word(value: object) -> str:
    """The tag, in a union, of what may be a table or one word or number."""
    return "<table>" if isinstance(value, dict | BaseModel) else "<word>"


def ascending(limits: tuple[float, float]) -> tuple[float, float]:
    """A check of two limits: the first below the second."""
    if limits[0] >= limits[1]:
        raise wrong("[lower, higher]", f"[{limits[0]:g}, {limits[1]:g}]", "put the lower one first")
    return limits


def _sensible(moment: datetime.datetime) -> datetime.datetime:
    if not 1900 <= moment.year < 2200:
        raise wrong("a year from 1900 to 2199", str(moment.year))
    return moment


def _a_day(pattern: str) -> str:
    """A check of how days are written: each part once, and nothing that would need a language."""
    parts = sorted(re.findall("%(.?)", pattern.replace("%y", "%Y")))
    if parts != ["Y", "d", "m"]:
        raise wrong("%d, %m and %Y or %y, each once", repr(pattern), "such as %d.%m.%Y")
    return pattern


FINITE = Field(allow_inf_nan=False)
LARGEST = 1e12
"""Beyond this a positive number is a slip of the pen; it keeps sums and unit conversions finite."""
Text = Annotated[str, Strict()]
Name = Annotated[str, Strict(), Field(min_length=1)]
Number = Annotated[float, Strict(), FINITE]
Positive = Annotated[float, Strict(), FINITE, Field(gt=0, le=LARGEST)]
NotNegative = Annotated[float, Strict(), FINITE, Field(ge=0, le=LARGEST)]
Fraction = Annotated[float, Strict(), FINITE, Field(ge=0, le=1)]
Percent = Annotated[float, Strict(), FINITE, Field(ge=0, le=100)]
Emissivity = Annotated[float, Strict(), FINITE, Field(gt=0, le=1)]
Celsius = Annotated[float, Strict(), FINITE, Field(ge=-120, le=1500)]  # where the radiance table covers 150…1800 K
AirCelsius = Annotated[float, Strict(), FINITE, Field(ge=-80, le=100)]  # a value in kelvin is outside
Coordinate = Annotated[float, Strict(), FINITE, Field(ge=-0.5)]
Whole = Annotated[int, Strict(), Field(ge=0, le=2**31)]
Counted = Annotated[int, Strict(), Field(ge=1, le=2**31)]
Day = Annotated[datetime.date, Strict(), WithJsonSchema({"type": "string", "pattern": r"^\d{4}-\d\d-\d\d$"})]
DateFormat = Annotated[
    str,
    Strict(),
    Field(max_length=40),
    AfterValidator(_a_day),
    WithJsonSchema(
        {"type": "string", "maxLength": 40, "pattern": "^(?=.*%d)(?=.*%m)(?=.*%[Yy])[^%]*(%[dmYy][^%]*){3}$"}
    ),
]
Moment = Annotated[
    datetime.datetime,
    Strict(),
    AfterValidator(_sensible),
    WithJsonSchema({"type": "string", "pattern": r"^\d{4}-\d\d-\d\d[T ]\d\d:\d\d"}),
]
