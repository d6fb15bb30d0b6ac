"""The survey file as pydantic models: its keys, their types, limits, units and defaults; nothing is converted here."""

from __future__ import annotations

from typing import Annotated, Any, Literal

from pydantic import AfterValidator, Discriminator, Field, Strict, Tag, model_validator

from irsurvey.survey.defaults import defaults
from irsurvey.survey.fields import (
    FINITE,
    AirCelsius,
    Celsius,
    Counted,
    DateFormat,
    Day,
    Emissivity,
    Fraction,
    Moment,
    Name,
    NotNegative,
    Number,
    Percent,
    Positive,
    Table,
    Text,
    Whole,
    ascending,
    key,
    required,
    table_or_word,
    wrong,
)
from irsurvey.survey.schema_building import Element, Pair, Pascal, Season, Strip
from irsurvey.survey.schema_camera import Camera
from irsurvey.survey.schema_drawn import Area, KnownLength, KnownRectangle, Surface
from irsurvey.survey.schema_electrical import Asset, Circuit, Component, Window, WindowFrom

SKY_MODEL = "berdahl-martin"
"""The sky model that counts where none is named."""
Kind = Literal["building", "electrical"]
Side = Literal["inside", "outside"]
Method = Literal["envelope", "air-leakage", "roof-moisture", "contact", "voltage-driven", "pv"]
Reference = Annotated[
    Annotated[Literal["automatic"], Tag("<word>")] | Annotated[Area, Tag("<table>")], Discriminator(table_or_word)
]


class HalfWidth(Table):
    half_width: NotNegative = required("Half-width of a rectangular distribution; its standard uncertainty is a/√3")


Uncertain = Annotated[
    Annotated[NotNegative, Tag("<word>")] | Annotated[HalfWidth, Tag("<table>")], Discriminator(table_or_word)
]


class Correlation(Table):
    between: Annotated[tuple[Name, Name], Field(json_schema_extra={"uniqueItems": True})] = required(
        'Two inputs, by their keys in report.json: ["air_c", "reflected_c"], "emissivity:cover plate"'
    )
    coefficient: Annotated[float, Strict(), FINITE, Field(ge=-1, le=1)] = required(
        "Correlation coefficient of their errors; 0: none, as where nothing is stated"
    )


def _uncertainty(of: str, name: str = "") -> Any:
    """A key of [uncertainty]; its default is that of a stated value, from defaults.toml."""
    default = defaults("stated").get(name)
    if default is None:
        return key(f"Standard uncertainty of {of}")
    value = default.u if default.half_width is None else HalfWidth(half_width=default.half_width)
    return key(f"Standard uncertainty of {of}; default: {default.source}", value)


class Uncertainty(Table):
    emissivity: Uncertain | None = _uncertainty("emissivities that are stated as numbers", "emissivity")
    emissivity_total: Uncertain | None = _uncertainty(
        "total emissivities; where none is stated, of its difference from that in the band (0.02)", "emissivity_total"
    )
    reflected_k: Uncertain | None = _uncertainty("the reflected apparent temperature [K], ±5 outside", "reflected_k")
    air_k: Uncertain | None = _uncertainty("the air on the path [K]", "air_k")
    relative_humidity_percent: Uncertain | None = _uncertainty("humidity [points]", "relative_humidity_percent")
    distance_m: Uncertain | None = _uncertainty("the distance [m]; or distance_fraction")
    distance_fraction: Uncertain | None = _uncertainty("the distance, relative to it", "distance_fraction")
    pressure_hpa: Uncertain | None = _uncertainty("the air pressure [hPa]", "pressure_hpa")
    atmosphere_fraction: Uncertain | None = _uncertainty("the air path's absorptance, relative", "atmosphere_fraction")
    window_transmittance: Uncertain | None = _uncertainty("the window's transmittance", "window_transmittance")
    window_reflectance: Uncertain | None = _uncertainty("the window's reflectance", "window_reflectance")
    window_k: Uncertain | None = _uncertainty("the window's temperature [K]", "window_k")
    window_ambient_k: Uncertain | None = _uncertainty("what the window mirrors [K]", "window_ambient_k")
    indoor_air_k: Uncertain | None = _uncertainty("the indoor air [K]", "indoor_air_k")
    outdoor_air_k: Uncertain | None = _uncertainty("the outdoor air [K]", "outdoor_air_k")
    outdoor_24h_k: Uncertain | None = _uncertainty("the day's extremes outdoors [K]", "outdoor_24h_k")
    ambient_k: Uncertain | None = _uncertainty("the air where an electrical part sits [K]", "ambient_k")
    mean_radiant_k: Uncertain | None = _uncertainty("the mean radiant temperature [K]", "mean_radiant_k")
    ground_k: Uncertain | None = _uncertainty("the ground [K]", "ground_k")
    sky_k: Uncertain | None = _uncertainty("the sky [K]", "sky_k")
    sky_model_k: Uncertain | None = _uncertainty("a sky that is modelled [K]; default: the model's own")
    cloud_fraction: Uncertain | None = _uncertainty("the cloud cover, of the whole sky", "cloud_fraction")
    tilt_deg: Uncertain | None = _uncertainty("the surface's tilt [°]", "tilt_deg")
    indoor_relative_humidity_percent: Uncertain | None = _uncertainty(
        "the humidity of the room air [points]", "indoor_relative_humidity_percent"
    )
    outdoor_relative_humidity_percent: Uncertain | None = _uncertainty(
        "the humidity of the outdoor air [points]", "outdoor_relative_humidity_percent"
    )
    u_value_fraction: Uncertain | None = _uncertainty("U-values of elements, relative", "u_value_fraction")
    wind_m_s: Uncertain | None = _uncertainty("the wind speed [m/s]; or wind_fraction")
    wind_fraction: Uncertain | None = _uncertainty("the wind speed, relative to it", "wind_fraction")
    irradiance_fraction: Uncertain | None = _uncertainty("the irradiance, relative to it", "irradiance_fraction")
    pressure_pa: Uncertain | None = _uncertainty("the pressure difference [Pa]", "pressure_pa")
    convection_fraction: Uncertain | None = _uncertainty("the film coefficient, relative", "convection_fraction")
    ifov_fraction: Uncertain | None = _uncertainty("the camera's IFOV, relative to it", "ifov_fraction")
    view_angle_deg: Uncertain | None = _uncertainty("the view angle [°]", "view_angle_deg")
    known_length_m: Uncertain | None = _uncertainty("known lengths [m]; or known_length_fraction")
    known_length_fraction: Uncertain | None = _uncertainty("known lengths, relative to them", "known_length_fraction")
    known_temperature_k: Uncertain | None = _uncertainty("known surface temperatures [K]", "known_temperature_k")
    shading_k: Uncertain | None = _uncertainty("what the camera reads in corners against the centre [K]", "shading_k")
    shading_tilt_k: Uncertain | None = _uncertainty(
        "what the camera reads at each edge against the centre [K]", "shading_tilt_k"
    )
    outline_px: Uncertain | None = _uncertainty("where an outline lies, drawn or found [pixels]", "outline_px")
    size_of_source_fraction: Uncertain | None = _uncertainty(
        "a small region's contrast, relative to what blur could take from it", "size_of_source_fraction"
    )
    correlations: list[Correlation] = key(
        "Inputs whose errors go together; of a pair stated at several levels the lowest counts", []
    )

    @model_validator(mode="after")
    def _one_of_each(self) -> Uncertainty:
        for pair in (
            ("distance_m", "distance_fraction"),
            ("wind_m_s", "wind_fraction"),
            ("known_length_m", "known_length_fraction"),
        ):
            if self.model_fields_set.issuperset(pair):
                raise wrong("one of the two", " and ".join(pair), "drop one", key=pair[1])
        return self


class Conditions(Table):
    air_c: AirCelsius | None = key("Air along the path [°C]; required at some level")
    relative_humidity_percent: Percent | None = key(
        "Relative humidity of that air [%]", defaults("assumed")["relative_humidity_percent"].value
    )
    pressure_hpa: Annotated[float, Strict(), FINITE, Field(ge=300, le=1100)] | None = key(
        "Air pressure [hPa]", defaults("assumed")["pressure_hpa"].value
    )
    reflected_c: Celsius | None = key("Reflected apparent temperature [°C]; required, or measured in a frame")
    reflected_from: Name | None = key("Id of the frame whose reflector surface measures it")
    distance_m: Annotated[float, Strict(), FINITE, Field(ge=0, le=100_000)] | None = key(
        "Distance from camera to surface [m]; required at some level"
    )
    view_angle_deg: Annotated[float, Strict(), FINITE, Field(ge=0, le=85)] | None = key(
        "Angle between line of sight and the surface's normal [°]", defaults("assumed")["view_angle_deg"].value
    )
    tilt_deg: Annotated[float, Strict(), FINITE, Field(ge=0, le=180)] | None = key(
        "Which way the surface faces [°]: 0 up, 90 a wall, 180 down; default of method roof-moisture outside: 0",
        defaults("assumed")["tilt_deg"].value,
    )
    indoor_air_c: AirCelsius | None = key("Indoor air [°C]; building, required for envelope claims")
    outdoor_air_c: AirCelsius | None = key("Outdoor air [°C]; building, required for envelope claims")
    outdoor_24h_c: Annotated[tuple[AirCelsius, AirCelsius], AfterValidator(ascending)] | None = key(
        "Lowest and highest outdoor air of the last 24 h [°C]"
    )
    indoor_relative_humidity_percent: Percent | None = key("Relative humidity of the room air [%]")
    outdoor_relative_humidity_percent: Percent | None = key("Relative humidity of the outdoor air [%]")
    humidity_class: Annotated[int, Strict(), Field(ge=1, le=5)] | None = key(
        "Humidity class of the rooms (ISO 13788), 1 to 5, where the room air was not measured"
    )
    wind_m_s: Annotated[float, Strict(), FINITE, Field(ge=0, le=100)] | None = key(
        "Wind speed [m/s]; absent means not recorded, never 0"
    )
    ambient_c: AirCelsius | None = key("Electrical: air where the part sits [°C]; default: air_c")
    mean_radiant_c: Celsius | None = key("Mean radiant temperature of what the surface faces [°C]; default: the air")
    ground_c: Celsius | None = key("Ground in front of the surface, broadband [°C]")
    sky_c: Celsius | None = key("Sky, broadband [°C]; default outside: modelled")
    sky_model: Name | None = key("Model of a sky that was not measured, by name", SKY_MODEL)
    cloud_fraction: Fraction | None = key(
        "Share of the sky under cloud; the default counts where the sky is modelled",
        defaults("assumed")["cloud_fraction"].value,
    )
    hours_since_sun: NotNegative | None = key("Hours since the sun last shone on the surface; default: the log's")
    hours_since_rain: NotNegative | None = key("Hours since rain last wetted the surface; default: the log's")
    hours_difference_held: NotNegative | None = key(
        "Hours that indoor and outdoor air have been at least 10 K apart; default: the log's"
    )
    hours_steady: NotNegative | None = key("Hours that the outdoor air has been steady; default: the log's")
    hours_furniture_clear: NotNegative | None = key("Hours since furniture was moved away from the surface")
    unheated_before: Annotated[bool, Strict()] | None = key("Whether the building was unheated before the survey")
    irradiance_w_m2: NotNegative | None = key("Irradiance on the surface [W/m²]")
    pressure_pa: Pascal | None = key("Pressure inside minus outside [Pa]; default of a pair: the pair's")
    convection: Name | None = key(
        "Correlation of the film coefficient, by name; default of buildings: iso-6946, for ceilings and floors "
        "seen from inside iso-6946-up or -down by the way the heat flows; electrical: churchill-chu"
    )
    surface_height_m: Positive | None = key(
        "Height of the surface, for correlations that need it [m]; default: 2.5 (buildings), 0.1 (electrical)"
    )
    log: Name | None = key(
        "CSV time series: a column `time` and columns named as these keys, or rain_mm (since the reading before)"
    )

    @model_validator(mode="after")
    def _one_source_of_reflected(self) -> Conditions:
        if self.reflected_c is not None and self.reflected_from is not None:
            raise wrong("either reflected_c or reflected_from", "both", "drop one", key="reflected_from")
        return self


class Target(Table):
    emissivity: Emissivity | None = key("Emissivity in the camera's band", defaults("assumed")["emissivity"].value)
    material: Name | None = key("A name from the table of materials; beside emissivity it only describes")
    emissivity_total: Emissivity | None = key(
        "Total hemispherical emissivity, for the exchange of heat; default: that in the band"
    )


class Detection(Table):
    min_delta_k: Positive | None = key(
        "Smallest ΔT that counts [K]; default, building: max(1.0, 5 × noise in object temperature); "
        "electrical: max(2.0, 5 × noise)"
    )
    min_pixels: Counted = key("Smallest region [pixels]; or min_area_m2", 25)
    min_area_m2: Positive | None = key("Smallest region [m²]; counts instead of min_pixels")


class Level(Table):
    """What a group and a frame may both say; a frame overrides its group, a group the survey."""

    kind: Kind | None = key("building or electrical; default: the level above")
    viewed_from: Side | None = key("Building: inside or outside; default: the level above")
    method: Method | None = key("Method; default: the level above")
    camera: Name | None = key("Name of the camera; default: the only one")
    element: Name | None = key("Id of the building element it shows")
    orientation: Text | None = key("Which way that faces, such as north")
    reference: Reference | None = key("Reference area or automatic; default: the level above")
    conditions: Conditions = key("Conditions that differ from the level above", Conditions())
    target: Target = key("Emissivity or material, where it differs from the level above", Target())
    detection: Detection = key("Detection limits that differ from the level above", Detection())
    uncertainty: Uncertainty = key("Uncertainties that differ from the level above", Uncertainty())
    inspect: Area | None = key("Inspect only inside this area; default: everywhere")
    window: Window | None = key("Infrared window in the path; default: none")
    window_from: WindowFrom | None = key("Two frames of one reference that measure the window's transmittance")
    surface: list[Surface] = key("Areas with optics or a role of their own", [])
    component: list[Component] = key("Electrical components", [])
    find_components: Annotated[bool, Strict()] = key(
        "Electrical: whether warm parts are looked for where no component is drawn", False
    )
    page: Whole | None = key("TIFF: page, from 0; needed where several could be the frame")
    array: Name | None = key("NPZ: name of the array; needed where it holds several")
    shape: tuple[Counted, Counted] | None = key("Raw binary: rows and columns")
    dtype: (
        Literal[
            "uint8", "uint16", "uint32", "uint64", "int8", "int16", "int32", "int64", "float16", "float32", "float64"
        ]
        | None
    ) = key("Raw binary: number type")
    byte_order: Literal["little", "big"] | None = key("Raw binary: byte order")
    fill_values: list[Number] | None = key("Stored numbers that mean: no data; default: the camera's")


class Group(Level):
    id: Name = required("Name of the group, unique")
    frames: Name | None = key("Glob for its frames, such as north/*.tif; default: frames name their group")


class Frame(Level):
    id: Name | None = key("Unique, [A-Za-z0-9._-], at most 64 characters; default: the file's name without ending")
    file: Name | None = key("Raw file, relative to the survey file; required unless a group's glob finds it by id")
    photo: Name | None = key("Photograph, relative to the survey file")
    group: Name | None = key("Id of its group; default: the group whose glob finds its file")
    label: Text = key("What it shows, for people", "")
    asset: Name | None = key("Id of its asset")
    notes: Text = key("Notes", "")
    taken: Moment | None = key("Date and time; without an offset it is local time in survey.timezone")
    known_length: KnownLength | None = key("A length in the picture: scale instead of distance × IFOV")
    known_rectangle: KnownRectangle | None = key("A rectangle in the picture: scale by rectification")
    strip: list[Strip] = key("Lines across thermal bridges", [])
    pair: Pair | None = key("The frame of the same view without pressure difference, to be compared with")

    @model_validator(mode="after")
    def _has_one_scale(self) -> Frame:
        if self.known_length is not None and self.known_rectangle is not None:
            raise wrong("either known_length or known_rectangle", "both", "drop one", key="known_rectangle")
        return self


class About(Table):
    title: Name = required("Title of the survey")
    kind: Kind | None = key("building or electrical; required here or in every group")
    viewed_from: Side = key("Building: inside or outside; default of method roof-moisture: outside", "inside")
    method: Method | None = key(
        "Building: envelope, air-leakage or roof-moisture, default envelope; "
        "electrical: contact, voltage-driven or pv, default contact"
    )
    camera: Name | None = key("Name of the camera; default: the only one")
    reference: Reference | None = key("Reference area or automatic, as at the top of the file", "automatic")
    date: Day | None = key("Date of the survey")
    timezone: Name | None = key("Time zone of local times, such as Europe/Vienna; without one they are read as UTC")
    display_units: Literal["si", "us"] = key(
        "Units of what people read, us: °F, ft, Btu/h; report.json, findings.csv and this file stay as they are", "si"
    )
    decimal_comma: Annotated[bool, Strict()] = key(
        "Whether people read 0,5 or 0.5; tables of data keep the point", False
    )
    date_format: DateFormat = key("How people read days, of %d, %m and %Y or %y: %d.%m.%Y", "%Y-%m-%d")
    criteria: list[Name] = key(
        "Names of criteria, or a file of the site's own such as site.toml; default: those of the kind and method", []
    )
    standards: list[Name] = key("Standards whose requirements on the conditions count; default: the method's", [])
    frame_table: Name | None = key("CSV of frames, as at the top of the file")
    history: Name | None = key("CSV of earlier values, as at the top of the file")
    surveyor: Text = key("Who surveyed", "")
    qualification: Text = key("The surveyor's qualification", "")
    client: Text = key("For whom", "")
    site: Text = key("Where", "")
    construction: Text = key("How it is built", "")
    limitations: Text = key("What could not be seen or done", "")
    standard: Text = key("The standard the survey follows, and departures from it", "")
    test_description: Text = key("How the survey was done", "")
    supplementary: Text = key("Measurements beside thermography", "")
    influences: Text = key("What may have influenced the result", "")
    signed_by: Text = key("Who signs the report", "")
    notes: Text = key("Notes", "")


class Document(Table):
    """An irsurvey survey file.  A default of null means: absent."""

    format: Literal[1] = key("Format of this file", 1)
    survey: About = required("The survey as a whole")
    camera: Camera | None = key("The camera; or several under cameras")
    cameras: dict[Name, Camera] = key("Cameras by name", {})
    conditions: Conditions = key("Conditions of the whole survey", Conditions())
    target: Target = key("Emissivity or material of what is seen", Target())
    uncertainty: Uncertainty = key("Standard uncertainties (k = 1), or { half_width = … }", Uncertainty())
    detection: Detection = key("When a deviation counts", Detection())
    reference: Reference | None = key("Reference area of every frame; default: automatic")
    group: list[Group] = key("Groups of frames: a room, an elevation, a panel", [])
    frame: list[Frame] = key("Frames", [])
    frame_table: Name | None = key("CSV with one frame a row, columns named as its keys (conditions.distance_m)")
    history: Name | None = key("CSV of earlier values: columns date, asset, component, delta_ambient_k …")
    element: list[Element] = key("Building elements: an outer wall, a roof", [])
    season: Season = key("What heating and cooling seasons are worth", Season())
    circuit: list[Circuit] = key("Circuits and their loads", [])
    asset: list[Asset] = key("Assets of the round", [])
