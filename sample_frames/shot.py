"""One frame of a survey before it is taken: the subject, the camera, the air, and what goes wrong."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

from camera_model import Air, Camera, Window
from painting import Field, Subject


@dataclass(frozen=True)
class Shot:
    """Everything that makes one frame."""

    id: str
    file: str  # its suffix says how it is encoded
    camera: Camera
    air: Air
    subject: Subject
    sound: bool
    shading_k: float = 0.0
    offset_k: float = 0.0
    window: Window | None = None
    pixel_area_m2: Field | None = None  # of each pixel, where it is not (IFOV × distance)²
    method: str = "contact"  # of an electrical frame
    ambient_c: float | None = None  # air where the electrical parts sit
    mean_radiant_c: float | None = None  # of what they face; as warm as that air where not given
    wind_m_s: float | None = None  # outdoors
    irradiance_w_m2: float | None = None
    more: dict[str, Any] = field(default_factory=dict)  # what else is true about it, by its name in truth.json
