"""The electrical part of the survey file: components and their circuits, infrared windows, assets, earlier values."""

from __future__ import annotations

from typing import Annotated

from pydantic import Discriminator, Field, Strict, Tag, model_validator

from irsurvey.survey.fields import (
    FINITE,
    Celsius,
    Emissivity,
    Fraction,
    Name,
    NotNegative,
    Positive,
    Table,
    Text,
    Whole,
    key,
    required,
    table_or_word,
    wrong,
)
from irsurvey.survey.schema_drawn import Drawn, Polygon

Size = Annotated[float, Strict(), FINITE, Field(gt=0, le=10)]  # of a joint [m]: more are millimetres
Difference = Annotated[float, Strict(), FINITE, Field(ge=-2000, le=2000)]
_SHAPES = ("cylinder", "plate", "sphere", "area_m2")


class Cylinder(Table):
    diameter_m: Size = required("Its diameter [m]")
    length_m: Size = required("Its length [m]")


class Plate(Table):
    height_m: Size = required("Its height [m]; both faces give off heat")
    width_m: Size = required("Its width [m]")


class Sphere(Table):
    diameter_m: Size = required("Its diameter [m]")


class Component(Drawn):
    group: Name | None = key("Components alike, compared with each other")
    phase: Name | None = key("Phase")
    load_a: NotNegative | None = key("Current at the time [A]; default: the circuit's")
    rated_a: Positive | None = key("Rated current [A]; default: the circuit's")
    circuit: Name | None = key("Id of the circuit it belongs to")
    limits: list[Name] = key("Names of the absolute limits of what meets in it; of several the lowest counts", [])
    cylinder: Cylinder | None = key("The cylinder it is taken for when its heat is estimated")
    plate: Plate | None = key("The upright plate it is taken for when its heat is estimated")
    sphere: Sphere | None = key("The sphere it is taken for when its heat is estimated")
    area_m2: Annotated[float, Strict(), FINITE, Field(gt=0, le=100)] | None = key(
        "Its surface that gives off heat [m²], where it is none of these"
    )
    time_constant_min: Positive | None = key("Its thermal time constant [min]; default: the circuit's")

    @model_validator(mode="after")
    def _has_one_shape(self) -> Component:
        stated = [name for name in _SHAPES if getattr(self, name) is not None]
        if len(stated) > 1:
            raise wrong(f"one of {', '.join(_SHAPES)}", " and ".join(stated), "drop the others", of=tuple(stated))
        return self


class Circuit(Table):
    id: Name = required("Name of the circuit, unique")
    load_a: (
        Annotated[
            Annotated[NotNegative, Tag("<word>")] | Annotated[dict[Name, NotNegative], Tag("<table>")],
            Discriminator(table_or_word),
        ]
        | None
    ) = key('Current at the time [A], one number or by phase: { "1" = 200, "2" = 195 }')
    rated_a: Positive | None = key("Rated current [A]")
    log: Name | None = key("CSV time series of its load: columns `time` and load_a, or load_a_1 for phase 1")
    time_constant_min: Positive | None = key("Thermal time constant of its components [min]")


class Window(Table):
    transmittance: Emissivity | None = key(
        "Transmittance of the infrared window in the camera's band; required, or measured by window_from"
    )
    reflectance: Fraction = key("Its reflectance", 0.0)
    temperature_c: Celsius | None = key("Its temperature [°C]; default: the air")
    ambient_c: Celsius | None = key("What it mirrors towards the camera [°C]; default: the air")

    @model_validator(mode="after")
    def _is_possible(self) -> Window:
        total = (self.transmittance or 0.0) + self.reflectance
        if total > 1 + 1e-9:  # decimal fractions that add up to 1 may exceed it by rounding
            raise wrong("transmittance + reflectance of at most 1", f"{total:g}", "the rest of 1 is its emissivity")
        return self


class WindowFrom(Table):
    without: Name = required("Id of the frame that shows the reference without the window")
    through: Name = required("Id of the frame that shows the same reference through the window")
    polygon: Polygon = required("Corners [[x, y], …] in pixels of a warm or cold reference, where it is in both frames")

    @model_validator(mode="after")
    def _are_two(self) -> WindowFrom:
        if self.without == self.through:
            remedy = "one without the window, one through it"
            raise wrong("two frames", f"{self.through} twice", remedy, key="through", of=("without",))
        return self


class Asset(Table):
    id: Name = required("Name of the asset, unique")
    description: Text = key("What it is", "")
    location: Text = key("Where it is", "")
    criticality: Whole | None = key("Importance, as the owner ranks it")
    not_inspected: Name | None = key("Why it was not inspected; absent: it was")


class EarlierRow(Table):
    """A row of the history file; its date is read beside it."""

    asset: Text = key("Id of the asset", "")
    component: Name = required("Name of the component, as drawn now")
    delta_ambient_k: Difference | None = key("Its rise over the ambient air [K]")
    delta_similar_k: Difference | None = key("Its difference from its coolest twin [K]")
    load_a: NotNegative | None = key("Current then [A]")
    rated_a: Positive | None = key("Rated current then [A]")
    u_k: NotNegative | None = key("Standard uncertainty of the differences [K]")
