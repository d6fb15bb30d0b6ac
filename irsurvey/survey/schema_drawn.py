"""What is drawn on a frame in the survey file: outlines, areas with optics of their own, known lengths."""

from __future__ import annotations

from itertools import combinations
from typing import Annotated, Literal

from pydantic import AfterValidator, Field, model_validator

from irsurvey.survey.fields import (
    Celsius,
    Coordinate,
    Emissivity,
    Name,
    Positive,
    Table,
    key,
    required,
    wrong,
)

Point = tuple[Coordinate, Coordinate]
_MOST_CORNERS = 500
"""Outlines of more are not searched for sides that cross: the search takes a time that grows with their square."""


def _turn(a: Point, b: Point, c: Point) -> float:
    """Twice the signed area of a triangle: above 0 where a, b, c turn clockwise in a picture."""
    return (b[0] - a[0]) * (c[1] - b[1]) - (b[1] - a[1]) * (c[0] - b[0])


def _uncrossed(corners: list[Point]) -> list[Point]:
    """A check of an outline: none of its sides crosses another, as what lies inside would then be open to doubt."""
    if len(corners) > _MOST_CORNERS:
        return corners
    sides = list(zip(corners, [*corners[1:], corners[0]], strict=True))
    for (one, (a, b)), (other, (c, d)) in combinations(enumerate(sides, 1), 2):
        if _turn(a, b, c) * _turn(a, b, d) < 0 and _turn(c, d, a) * _turn(c, d, b) < 0:
            raise wrong(
                "an outline that does not cross itself",
                f"side {one} from ({a[0]:g}, {a[1]:g}) across side {other} from ({c[0]:g}, {c[1]:g})",
                "list its corners one after the other around it",
            )
    return corners


Polygon = Annotated[list[Point], Field(min_length=3, max_length=10_000), AfterValidator(_uncrossed)]


class Area(Table):
    polygon: Polygon = required("Corners [[x, y], …] in pixels, x right, y down, at least 3")


class Drawn(Table):
    """An area drawn on a frame, with optics of its own where it states some."""

    name: Name | None = key("Name, unique in the frame; default: numbered")
    polygon: Polygon = required("Corners [[x, y], …] in pixels, x right, y down, at least 3")
    emissivity: Emissivity | None = key("Its own emissivity; default: the target's")
    emissivity_total: Emissivity | None = key("Its own total emissivity, for the exchange of heat; default: the band's")
    material: Name | None = key("A name from the table of materials; beside emissivity it only describes")
    reflected_c: Celsius | None = key("What it mirrors [°C]; default: the frame's")


class Surface(Drawn):
    role: Literal["inspect", "ignore", "reflector", "known-temperature"] = key(
        "inspect; ignore: no finding, no reference pixel; reflector: crumpled foil, measures reflected_c; "
        "known-temperature: fixes the frame's offset",
        "inspect",
    )
    temperature_c: Celsius | None = key("Its temperature [°C]; with role known-temperature, required")

    @model_validator(mode="after")
    def _temperature_goes_with_role(self) -> Surface:
        is_known = self.role == "known-temperature"
        if is_known and self.temperature_c is None:
            raise wrong(
                "temperature_c with role known-temperature",
                "nothing",
                "state it in °C",
                key="temperature_c",
                of=("role",),
            )
        if not is_known and self.temperature_c is not None:
            remedy = 'write role = "known-temperature" or drop it'
            got = f"{self.temperature_c:g}"
            raise wrong("no temperature_c with this role", got, remedy, key="temperature_c", of=("role",))
        return self


class KnownLength(Table):
    start: Point = required("One end [x, y] in pixels", alias="from")
    to: Point = required("Other end [x, y] in pixels")
    metres: Positive = required("Length between them [m]")

    @model_validator(mode="after")
    def _has_length(self) -> KnownLength:
        if self.start == self.to:
            raise wrong("two points", "one point twice", key="to")
        return self


class KnownRectangle(Table):
    corners: Annotated[list[Point], Field(min_length=4, max_length=4)] = required(
        "Its corners [[x, y], …] in pixels, clockwise from top left"
    )
    width_m: Positive = required("Top side [m]")
    height_m: Positive = required("Left side [m]")

    @model_validator(mode="after")
    def _could_be_one(self) -> KnownRectangle:
        a, b, c, d = self.corners
        turns = [_turn(*three) for three in ((a, b, c), (b, c, d), (c, d, a), (d, a, b))]
        if not (min(turns) > 0 or max(turns) < 0):
            expected = "corners one after the other around it"
            raise wrong(expected, "corners that are not, or three in line", "start at the top left", key="corners")
        return self
