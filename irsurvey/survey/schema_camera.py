"""The camera's part of the survey file: what it is and what its stored numbers mean."""

from __future__ import annotations

from itertools import pairwise
from typing import Annotated, Literal

from pydantic import AfterValidator, Discriminator, Field, Strict, Tag, model_validator

from irsurvey.survey.fields import (
    FINITE,
    AirCelsius,
    Celsius,
    Day,
    Emissivity,
    Fraction,
    NotNegative,
    Number,
    Percent,
    Positive,
    Table,
    Text,
    ascending,
    key,
    required,
    wrong,
)

_AS_SET = "state what the camera was set to"


class Assumed(Table):
    """What a camera that stores object temperatures has already corrected with."""

    emissivity: Emissivity = required("Emissivity set in the camera")
    reflected_c: Celsius | None = key("Reflected apparent temperature set in the camera [°C]; idle at emissivity 1")
    transmittance: Emissivity | None = key("Air path transmittance set in the camera; or distance_m")
    distance_m: NotNegative | None = key("Distance set in the camera [m]; 0: no air path")
    air_c: AirCelsius | None = key("Air temperature set in the camera [°C]; needed at a distance")
    relative_humidity_percent: Percent | None = key("Relative humidity set in the camera [%]; needed at a distance")
    pressure_hpa: Annotated[float, Strict(), FINITE, Field(ge=300, le=1100)] | None = key(
        "Air pressure set in the camera [hPa]", 1013.25
    )

    @model_validator(mode="after")
    def _is_complete(self) -> Assumed:
        if (self.transmittance is None) == (self.distance_m is None):
            got = "neither" if self.distance_m is None else "both"
            remedy = "distance_m = 0 where the camera left the air out"
            raise wrong("either transmittance or distance_m", got, remedy, of=("transmittance", "distance_m"))
        if self.reflected_c is None and self.emissivity < 1:
            raise wrong("reflected_c, as emissivity is below 1", "nothing", _AS_SET, key="reflected_c")
        for name in ("air_c", "relative_humidity_percent"):
            if self.distance_m and getattr(self, name) is None:
                raise wrong(f"{name}, as distance_m is above 0", "nothing", _AS_SET, key=name)
        return self


class SakumaHattori(Table):
    a_um: Positive = required("A [µm] of counts = C/(exp(c₂/(A T + B)) − 1) + bias")
    b_um_k: Number = required("B [µm K]")
    c: Positive = required("C [counts]")
    bias: Number = key("Counts of a target that radiates nothing", 0.0)


class Calibration(Table):
    points: Annotated[list[tuple[Number, Celsius]], Field(min_length=3, max_length=10_000)] | None = key(
        "[[counts, blackbody °C], …], at least 3, monotonic"
    )
    sakuma_hattori: SakumaHattori | None = key("Closed form instead of points")

    @model_validator(mode="after")
    def _is_one_and_monotonic(self) -> Calibration:
        if (self.points is None) == (self.sakuma_hattori is None):
            got = "neither" if self.points is None else "both"
            raise wrong("either points or sakuma_hattori", got, of=("points", "sakuma_hattori"))
        by_temperature = sorted(self.points or [], key=lambda point: point[1])
        steps = [
            ((hotter[0] > colder[0]) - (hotter[0] < colder[0])) * (hotter[1] > colder[1])
            for colder, hotter in pairwise(by_temperature)
        ]
        if steps and set(steps) not in ({1}, {-1}):
            raise wrong("counts that only rise or only fall with temperature", "counts that do not", key="points")
        return self


class _Temperatures(Table):
    unit: Literal["K", "C", "F"] = required("Unit of scale · stored + offset")
    scale: Positive = key("Temperature per stored step", 1.0)
    offset: Number = key("Temperature of a stored 0", 0.0)


class ApparentTemperature(_Temperatures):
    quantity: Literal["apparent-temperature"] = required("Blackbody-equivalent at the camera, nothing corrected")


class ObjectTemperature(_Temperatures):
    quantity: Literal["object-temperature"] = required("Already corrected in the camera; undone with `assumed`")
    assumed: Assumed = required("What the camera corrected with")


class Counts(Table):
    quantity: Literal["counts"] = required("Counts proportional to band radiance, or calibrated")
    unit: Literal["K", "C", "F"] | None = key("Idle: counts have none")
    gain: Number | None = key("Band radiance per count [W m⁻² sr⁻¹]; or calibration")
    bias: Number = key("Band radiance of a stored 0 [W m⁻² sr⁻¹], with gain", 0.0)
    calibration: Calibration | None = key("Calibration instead of gain and bias")

    @model_validator(mode="after")
    def _is_one(self) -> Counts:
        if (self.gain is None) == (self.calibration is None):
            got = "neither" if self.gain is None else "both"
            raise wrong("either gain or calibration", got, key="gain", of=("calibration",))
        if self.gain == 0:
            raise wrong("a gain other than 0", "0", "band radiance per count", key="gain")
        if self.calibration is not None and "bias" in self.model_fields_set:
            raise wrong("no bias beside a calibration", str(self.bias), "a closed form has its own", key="bias")
        return self


def _quantity(value: object) -> str:
    quantity = value.get("quantity") if isinstance(value, dict) else getattr(value, "quantity", None)
    return f"<{quantity}>"


Signal = Annotated[
    Annotated[ApparentTemperature, Tag("<apparent-temperature>")]
    | Annotated[ObjectTemperature, Tag("<object-temperature>")]
    | Annotated[Counts, Tag("<counts>")],
    Discriminator(_quantity),
]


Micrometres = Annotated[float, Strict(), FINITE, Field(ge=0.7, le=50)]


class Camera(Table):
    band_um: Annotated[tuple[Micrometres, Micrometres], AfterValidator(ascending)] = required(
        "Spectral band [µm], short and long limit"
    )
    signal: Signal = required("What a stored number means")
    ifov_mrad: Annotated[float, Strict(), FINITE, Field(gt=0, le=100)] | None = key(
        "Instantaneous field of view of a pixel [mrad]; required for areas and spot sizes"
    )
    spot_pixels: Annotated[int, Strict(), Field(ge=1, le=100)] = key("Measurement spot, pixels across", 3)
    noise_k: Annotated[float, Strict(), FINITE, Field(gt=0, le=5)] | None = key(
        "Noise (NETD) at 30 °C [K]; without it, estimated from the frame"
    )
    accuracy_k: NotNegative = key("Accuracy, half-width, rectangular [K]", 2.0)
    accuracy_fraction: Fraction = key("Accuracy, half-width, of |°C|; the larger of both counts", 0.02)
    range_c: Annotated[tuple[Number, Number], AfterValidator(ascending)] | None = key(
        "Range [°C]; stored values at or beyond it are saturated"
    )
    fill_values: list[Number] = key("Stored numbers that mean: no data", [])
    serial: Text = key("Serial number", "")
    lens: Text = key("Lens", "")
    calibrated_on: Day | None = key("Date of the last calibration")
