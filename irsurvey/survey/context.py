"""What the frames of a survey share while they are resolved."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import tzinfo
from pathlib import Path

from irsurvey.errors import Fault
from irsurvey.model import Camera, Element
from irsurvey.survey.known import Known
from irsurvey.survey.log import Log


@dataclass(frozen=True, slots=True)
class Context:
    """What all frames share, and where faults and notices (frame, text) go.  `loads`: load logs by circuit.

    `unlogged`: why a condition of a frame, (id, key), could not be taken from a log that holds it.
    """

    folder: Path
    known: Known
    zone: tzinfo
    cameras: Mapping[str, Camera]
    elements: Mapping[str, Element]
    logs: Mapping[str, Log | None]
    loads: Mapping[str, Log | None]
    faults: list[Fault]
    notices: list[tuple[str, str]]
    is_ahead: bool = False
    unlogged: dict[tuple[str, str], str] = field(default_factory=dict)
