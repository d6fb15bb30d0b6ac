"""What a survey file says, resolved frame by frame and converted to SI: plain, frozen, picklable."""

from __future__ import annotations

from dataclasses import dataclass, field
from datetime import date, datetime

from irsurvey.model.quantities import Scene

Polygon = tuple[tuple[float, float], ...]
"""Corner points (x right, y down) in pixels; pixel centres at integers."""


@dataclass(frozen=True, slots=True)
class ReadOptions:
    """What a reader must be told because the file does not say it; None: not needed."""

    page: int | None = None
    array: str | None = None
    shape: tuple[int, int] | None = None  # rows, columns; headerless binary
    dtype: str | None = None  # numpy name without byte order: "uint16", "float32"
    byte_order: str | None = None  # "little" | "big"
    fill_values: tuple[float, ...] = ()  # stored numbers that mean "no data here"


@dataclass(frozen=True, slots=True)
class InCameraCorrection:
    """What the camera already corrected for, when it stores object temperatures; temperatures [K]."""

    emissivity: float
    reflected: float
    transmittance: float | None = None  # or the four below
    distance: float | None = None
    air: float | None = None
    relative_humidity: float | None = None  # 0…1
    pressure: float | None = None  # [Pa]


@dataclass(frozen=True, slots=True)
class ClosedForm:
    """Sakuma–Hattori calibration, counts = c/(exp(c₂/(a T + b)) − 1) + bias;  a [m], b [m K]."""

    a: float
    b: float
    c: float
    bias: float = 0.0


@dataclass(frozen=True, slots=True)
class Signal:
    """What a stored number means.  Temperatures: T [K] = scale·stored + offset, units already folded in.

    `quantity` is "apparent-temperature", "object-temperature" (with `assumed`) or "counts" (either
    gain and bias for L = gain·stored + bias [W m⁻² sr⁻¹], or `points` of (counts, blackbody [K]),
    or `closed_form`).
    """

    quantity: str
    scale: float = 1.0
    offset: float = 0.0
    assumed: InCameraCorrection | None = None
    gain: float | None = None
    bias: float = 0.0
    points: tuple[tuple[float, float], ...] = ()
    closed_form: ClosedForm | None = None


@dataclass(frozen=True, slots=True)
class Camera:
    """An infrared camera as the survey describes it."""

    name: str
    band: tuple[float, float]  # [m]
    signal: Signal
    ifov: float | None = None  # [rad]
    spot_pixels: int = 3
    noise: float | None = None  # NETD at 30 °C [K]
    accuracy: float = 2.0  # half-width [K]
    accuracy_fraction: float = 0.02  # half-width, of |°C|; the larger counts
    range: tuple[float, float] | None = None  # [K]; stored values at or beyond are saturated
    serial: str = ""
    lens: str = ""
    calibrated_on: date | None = None


@dataclass(frozen=True, slots=True)
class Surface:
    """A drawn area with optics of its own; `emissivity` and `reflected` are names in the Scene."""

    name: str
    polygon: Polygon
    role: str = "inspect"  # "inspect" | "ignore" | "reflector" | "known-temperature"
    emissivity: str = "emissivity"
    reflected: str = "reflected"
    temperature: str | None = None  # name in the Scene, role "known-temperature"
    material: str = ""


@dataclass(frozen=True, slots=True)
class JointShape:
    """What a joint is taken for when its heat is estimated; lengths [m], area [m²]."""

    form: str  # "cylinder" | "plate" | "sphere" | "area"
    diameter: float | None = None  # cylinder, sphere
    length: float | None = None  # cylinder; plate: its height
    width: float | None = None  # plate; both faces give off heat
    area: float | None = None  # of anything else, or instead of what the form gives


@dataclass(frozen=True, slots=True)
class Component:
    """A part of an electrical installation, drawn on a frame or found in it; currents [A]."""

    name: str
    polygon: Polygon
    group: str | None = None
    phase: str | None = None
    load: float | None = None
    rated: float | None = None
    emissivity: str = "emissivity"
    reflected: str = "reflected"
    limits: tuple[str, ...] = ()  # names of absolute limits; of several the lower counts
    shape: JointShape | None = None
    steady: float | None = None  # how long its load has been steady [s], from a log
    time_constant: float | None = None  # [s]
    is_found: bool = False  # by the program, not drawn


@dataclass(frozen=True, slots=True)
class KnownLength:
    """A length seen in the frame: two points [px]; metres are the Scene's `known_length`."""

    start: tuple[float, float]
    end: tuple[float, float]


@dataclass(frozen=True, slots=True)
class KnownRectangle:
    """Corners [px] of a rectangle, clockwise from top left; sides are the Scene's `known_width`, `known_height`."""

    corners: Polygon


@dataclass(frozen=True, slots=True)
class Strip:
    """A line drawn across a thermal bridge from `start` to `end` [px], read over `width` pixels across it.

    `undisturbed` says at which ends the wall is undisturbed: "both", "from" (the start) or "to" (the end).
    """

    name: str
    start: tuple[float, float]
    end: tuple[float, float]
    width: int = 5
    undisturbed: str = "both"


@dataclass(frozen=True, slots=True)
class Layer:
    """One layer of a building element; an air layer has a resistance alone."""

    material: str = ""
    thickness: float = 0.0  # [m]
    conductivity: float | None = None  # [W m⁻¹ K⁻¹]
    density: float | None = None  # [kg m⁻³]
    specific_heat: float | None = None  # [J kg⁻¹ K⁻¹]
    resistance: float | None = None  # [m² K W⁻¹], instead of the four above


@dataclass(frozen=True, slots=True)
class Element:
    """A building element, such as an outer wall or a roof; layers from inside to outside."""

    id: str
    description: str = ""
    layers: tuple[Layer, ...] = ()
    mass: str | None = None  # "light" | "medium" | "heavy", where layers are not known
    u_value: float | None = None  # as designed or calculated [W m⁻² K⁻¹]
    area: float | None = None  # of the whole element [m²]


@dataclass(frozen=True, slots=True)
class Season:
    """What a heating or a cooling season is worth; `how` says where the degree days come from."""

    sense: str  # "heating" | "cooling"
    degree_days: float  # [K d]
    degree_days_u: float  # standard uncertainty, relative
    how: str
    efficiency: float = 1.0  # of the heating; of cooling, its seasonal performance factor
    efficiency_u: float = 0.0  # relative
    price: float | None = None  # per kWh
    price_u: float = 0.0  # relative
    currency: str = ""


@dataclass(frozen=True, slots=True)
class Detection:
    """When a deviation counts; None: the default of the kind of survey."""

    min_delta: float | None = None  # [K]
    min_pixels: int = 25
    min_area: float | None = None  # [m²]; where given, counts instead of min_pixels


@dataclass(frozen=True, slots=True)
class WindowFrames:
    """Two frames of one warm or cold reference, without and through the infrared window: they measure its τ."""

    without: FrameTask
    through: FrameTask
    polygon: Polygon  # of the reference, in both


@dataclass(frozen=True, slots=True)
class Pair:
    """The frame of the same view without the pressure difference that this one was taken with."""

    partner: FrameTask
    pressure: float  # inside minus outside while this frame was taken [Pa]


@dataclass(frozen=True, slots=True)
class FrameTask:
    """Everything known about one frame before its pixels are read."""

    id: str
    file: str  # as written in the survey, relative to it, with forward slashes
    path: str  # where it lies on this machine; never written to an output
    kind: str  # "building" | "electrical"
    method: str  # "envelope" | "air-leakage" | "roof-moisture" | "contact" | "voltage-driven" | "pv"
    camera: Camera
    scene: Scene
    viewed_from: str | None = None  # building: "inside" | "outside"
    read: ReadOptions = field(default_factory=ReadOptions)
    surfaces: tuple[Surface, ...] = ()
    components: tuple[Component, ...] = ()
    reference: Polygon | None = None  # None: automatic
    inspect: Polygon | None = None
    has_window: bool = False
    known_scale: KnownLength | KnownRectangle | None = None
    detection: Detection = field(default_factory=Detection)
    convection: str = "iso-6946"
    surface_height: float = 2.5  # [m], for convection correlations
    criteria: tuple[str, ...] = ()
    standards: tuple[str, ...] = ()  # whose requirements on the conditions count; empty: those of the method
    strips: tuple[Strip, ...] = ()
    pair: Pair | None = None
    element: Element | None = None
    history: tuple[tuple[str, float], ...] = ()  # what logs tell of the time before, by requirement key
    sky_model: str = "berdahl-martin"
    own_criteria: tuple[tuple[str, str], ...] = ()  # (name, text) of criteria files of the survey's own
    find_components: bool = False  # segment warm parts where none are drawn
    window_frames: WindowFrames | None = None
    humidity_class: int | None = None  # ISO 13788, 1…5, where the room air was not measured
    orientation: str = ""
    reflected_from: str | None = None  # id of the frame whose reflector serves this one
    group: str | None = None
    label: str = ""
    asset: str | None = None
    notes: str = ""
    photo: str | None = None  # relative, as written
    photo_path: str | None = None
    taken: datetime | None = None  # with time zone


@dataclass(frozen=True, slots=True)
class Asset:
    """One thing on the round, inspected or not."""

    id: str
    description: str = ""
    location: str = ""
    criticality: int | None = None
    not_inspected: str | None = None


@dataclass(frozen=True, slots=True)
class Earlier:
    """One earlier value of a component, from a history file; temperatures differences [K], currents [A]."""

    when: datetime
    asset: str
    component: str
    delta_ambient: float | None = None
    delta_similar: float | None = None
    load: float | None = None
    rated: float | None = None
    u: float | None = None  # standard uncertainty of the differences


@dataclass(frozen=True, slots=True)
class Survey:
    """A whole survey, ready to run."""

    title: str
    folder: str  # where survey.toml lies; never written to an output
    tasks: tuple[FrameTask, ...]
    date: date | None = None
    timezone: str | None = None
    about: tuple[tuple[str, str], ...] = ()  # free text of [survey]: ("surveyor", "…"), …
    assets: tuple[Asset, ...] = ()
    elements: tuple[Element, ...] = ()
    seasons: tuple[Season, ...] = ()
    history: tuple[Earlier, ...] = ()
    as_read: str = "{}"  # the survey file as JSON text, for the report
    notices: tuple[str, ...] = ()  # what `check` lists beside faults
