"""One frame of a survey before it is taken: the subject, the camera, the air, and what goes wrong."""

from __future__ import annotations

from dataclasses import dataclass

from camera_model import Air, Camera, Window
from painting import Subject


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
