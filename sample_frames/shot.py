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
    more: dict[str, Any] = field(default_factory=dict)  # what else is true about it, by its name in truth.json
