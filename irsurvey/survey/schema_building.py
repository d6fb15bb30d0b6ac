"""The building's part of the survey file: elements and their layers, strips, pressure pairs and seasons."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field, Strict, model_validator

from irsurvey.survey.defaults import defaults
from irsurvey.survey.fields import (
    FINITE,
    AirCelsius,
    Fraction,
    Name,
    NotNegative,
    Positive,
    Table,
    Text,
    key,
    required,
    wrong,
)
from irsurvey.survey.schema_drawn import Point

Pascal = Annotated[float, Strict(), FINITE, Field(ge=-1e5, le=1e5)]
UValue = Annotated[float, Strict(), FINITE, Field(gt=0, le=20)]  # a bare metal sheet has 1/(0.13 + 0.04) = 5.9
_THERMAL = ("conductivity_w_mk", "density_kg_m3", "specific_heat_j_kgk")


class Layer(Table):
    material: Name | None = key("A name from the table of building materials; values stated beside it count")
    thickness_m: Annotated[float, Strict(), FINITE, Field(gt=0, le=100)] | None = key("Thickness [m]")
    conductivity_w_mk: Positive | None = key("Thermal conductivity [W/(m K)]; default: the material's")
    density_kg_m3: Positive | None = key("Density [kg/m³]; default: the material's")
    specific_heat_j_kgk: Positive | None = key("Specific heat [J/(kg K)]; default: the material's")
    resistance_m2k_w: Positive | None = key("Thermal resistance [m² K/W], of an air layer; instead of all others")

    @model_validator(mode="after")
    def _is_complete(self) -> Layer:
        stated = [name for name in ("material", "thickness_m", *_THERMAL) if getattr(self, name) is not None]
        if self.resistance_m2k_w is not None:
            if stated:
                raise wrong("resistance_m2k_w alone", f"{', '.join(stated)} beside it", "drop one", of=tuple(stated))
            return self
        if self.thickness_m is None:
            remedy = "an air layer states resistance_m2k_w instead"
            raise wrong("thickness_m", "nothing", remedy, key="thickness_m", of=("resistance_m2k_w",))
        absent = [name for name in _THERMAL if getattr(self, name) is None]
        if self.material is None and absent:
            remedy = "name a material, or state what the layer is made of"
            raise wrong(absent[0], "nothing", remedy, key=absent[0], of=("material",))
        return self


class Element(Table):
    id: Name = required("Name of the element, unique")
    description: Text = key("What it is", "")
    layers: Annotated[list[Layer], Field(max_length=50)] = key("Its layers from inside to outside", [])
    mass: Literal["light", "medium", "heavy"] | None = key("How heavy it is built, where its layers are not known")
    u_value_w_m2k: UValue | None = key("Its U-value as designed or calculated [W/(m² K)]")
    area_m2: Positive | None = key("Area of the whole element [m²]")

    @model_validator(mode="after")
    def _has_one_mass(self) -> Element:
        if self.layers and self.mass is not None:
            raise wrong("either layers or mass", "both", "the layers say it", key="mass", of=("layers",))
        return self


class Strip(Table):
    name: Name | None = key("Name, unique in the frame; default: numbered")
    start: Point = required("Where the line across the bridge starts [x, y] in pixels", alias="from")
    to: Point = required("Where it ends [x, y] in pixels")
    width_px: Annotated[int, Strict(), Field(ge=1, le=999)] = key("Pixels read across the line, an odd number", 5)
    undisturbed: Literal["both", "from", "to"] = key("At which ends the wall is undisturbed", "both")

    @model_validator(mode="after")
    def _is_a_line(self) -> Strip:
        if self.start == self.to:
            raise wrong("two points", "one point twice", key="to")
        if self.width_px % 2 == 0:
            raise wrong("an odd number", str(self.width_px), "the line itself is the middle pixel", key="width_px")
        return self


class Pair(Table):
    frame: Name = required("Id of the frame of the same view without this pressure difference", alias="with")
    pressure_pa: Pascal = required("Pressure inside minus outside while this frame was taken [Pa]")

    @model_validator(mode="after")
    def _has_pressure(self) -> Pair:
        if self.pressure_pa == 0:
            remedy = "the frame with pressure names the one without"
            raise wrong("a pressure other than 0", "0", remedy, key="pressure_pa")
        return self


class OneSeason(Table):
    degree_days_kd: NotNegative | None = key("Degree days of a season [K d]; or temperatures and base_c")
    base_c: AirCelsius | None = key("Base temperature that degree days count from [°C]; with temperatures, required")
    temperatures: Name | None = key("CSV of a year: columns time and outdoor_air_c; degree days are summed from it")
    efficiency: Annotated[float, Strict(), FINITE, Field(gt=0, le=20)] = key(
        "Seasonal efficiency of the heating, or performance factor of a heat pump or of cooling", 1.0
    )
    price_per_kwh: NotNegative | None = key("Price of the energy bought, per kWh")
    currency: Text = key("Currency of that price; required with it", "")
    degree_days_fraction: Fraction = key(
        "Standard uncertainty of the degree days, relative", defaults("stated")["degree_days_fraction"].u
    )
    efficiency_fraction: Fraction = key(
        "Standard uncertainty of the efficiency, relative", defaults("stated")["efficiency_fraction"].u
    )
    price_fraction: Fraction = key(
        "Standard uncertainty of the price, relative", defaults("stated")["price_fraction"].u
    )

    @model_validator(mode="after")
    def _has_degree_days(self) -> OneSeason:
        if (self.degree_days_kd is None) == (self.temperatures is None):
            got = "neither" if self.temperatures is None else "both"
            of = ("degree_days_kd", "temperatures")
            raise wrong("either degree_days_kd or temperatures", got, "3000 K d, or a year's file", of=of)
        if self.temperatures is not None and self.base_c is None:
            raise wrong("base_c beside temperatures", "nothing", "such as 15.5", key="base_c", of=("temperatures",))
        if self.price_per_kwh is not None and not self.currency:
            remedy = 'such as currency = "EUR"'
            raise wrong("currency beside price_per_kwh", "nothing", remedy, key="currency", of=("price_per_kwh",))
        return self


class Season(Table):
    heating: OneSeason | None = key("What a heating season is worth; absent: no heating costs")
    cooling: OneSeason | None = key("What a cooling season is worth; absent: no cooling costs")
