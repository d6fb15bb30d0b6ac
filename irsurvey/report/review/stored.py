"""OUT/review.json: all reviews of a report, in a file of their own, so that another run does not lose them."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from irsurvey import files
from irsurvey.errors import Fault, OutputError
from irsurvey.model import Review
from irsurvey.report import json, reading

NAME = "review.json"

_FORMAT = 1
_REMEDY = "put back the file as it was; without it every decision is lost"


@dataclass(frozen=True, slots=True)
class Stored:
    """What the file holds."""

    format: int
    reviews: tuple[Review, ...]


def stored(out: Path) -> tuple[Review, ...]:
    """The reviews kept in an output folder; none where nobody reviewed it.

    Raises OutputError where the file is damaged: what somebody decided is not thrown away without a word."""
    if not (out / NAME).exists():
        return ()
    held = reading.record(Stored, reading.contents(out / NAME, _REMEDY), NAME, _REMEDY)
    if held.format != _FORMAT:
        raise OutputError(Fault(f"{NAME}: format", str(_FORMAT), str(held.format), "update irsurvey"))
    return held.reviews


def store(reviews: tuple[Review, ...], out: Path) -> Path:
    """Write OUT/review.json, whole or not at all, and return its path."""
    files.write_text(out / NAME, json.text(Stored(_FORMAT, reviews)))
    return out / NAME
