"""What stored numbers mean: the plain scalings that agree with known temperatures, or that give ordinary ones."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from math import ceil, inf

from irsurvey.constants import ZERO_CELSIUS
from irsurvey.errors import Fault, UsageError

UNITS = {"C": (1.0, 0.0), "K": (1.0, ZERO_CELSIUS), "F": (1.8, 32.0)}
"""Unit of a survey's signal → (factor, shift) from °C."""

SCALES = {
    **dict.fromkeys((1.0, 0.1, 0.01, 0.001), 1),
    **dict.fromkeys((0.5, 0.4, 0.25, 0.2, 0.05, 0.04, 0.025, 0.02, 0.005, 0.004, 0.0025, 0.002), 2),
    **dict.fromkeys((2.0**-power for power in range(4, 11)), 3),
}
"""Steps that numbers are stored in (common practice) → how far they are from plain."""

WHOLE = (inf, 100.0, 50.0, 10.0, 5.0, 1.0)
"""An offset is a multiple of one of these: zero, then the rounder the plainer."""

ORDINARY_C = (-40.0, 60.0)

_KNOWN = re.compile(r"(?:(?P<file>.+):)?(?P<x>\d+),(?P<y>\d+)=(?P<celsius>[-+]?\d+(?:[.,](?P<decimals>\d+))?)")


@dataclass(frozen=True, slots=True)
class Known:
    """A pixel (x right, y down) whose temperature was seen, to ± `half` [°C]; `file` None: in the first frame."""

    file: str | None
    x: int
    y: int
    celsius: float
    half: float


@dataclass(frozen=True, slots=True)
class Scaling:
    """Temperature in `unit` = scale·stored + offset."""

    unit: str
    scale: float
    offset: float = 0.0

    def __str__(self) -> str:
        offset = f" {'-' if self.offset < 0 else '+'} {abs(self.offset):g}" if self.offset else ""
        return f"{self.unit} = {self.scale:g} × stored{offset}"

    def celsius(self, stored: float) -> float:
        """Temperature [°C] of a stored number."""
        factor, shift = UNITS[self.unit]
        return (self.scale * stored + self.offset - shift) / factor


def known_point(text: str) -> Known:
    """The point that "x,y=T" or "file:x,y=T" names.  Raises UsageError."""
    found = _KNOWN.fullmatch(text.strip())
    if found is None:
        remedy = "x from the left, y from the top, °C"
        raise UsageError(Fault("--known", 'a point as "240,320=21.3" or "f.tif:240,320=21.3"', f'"{text}"', remedy))
    half = 0.5 * 10.0 ** -len(found["decimals"] or "")  # what rounding to the digits written may hide
    return Known(found["file"], int(found["x"]), int(found["y"]), float(found["celsius"].replace(",", ".")), half)


def scalings(points: Sequence[tuple[float, float, float]], step: float) -> tuple[Scaling, ...]:
    """Every plain scaling that agrees with the points, the plainest first.

    A point is (stored number, temperature, half-width of what the temperature may be) [°C]; `step` is the
    rounding of the stored numbers.  Plain: a scale of `SCALES`, and the roundest offset that agrees.
    """
    found = []
    for order, (unit, (factor, shift)) in enumerate(UNITS.items()):
        for scale, oddness in SCALES.items():
            slack = scale * step / 2 + 1e-6
            low = max(factor * (celsius - half) + shift - scale * stored - slack for stored, celsius, half in points)
            high = min(factor * (celsius + half) + shift - scale * stored + slack for stored, celsius, half in points)
            for rank, whole in enumerate(WHOLE):
                offset = 0.0 if whole == inf else ceil(low / whole) * whole
                if low <= offset <= high:
                    found.append((oddness + rank, order, Scaling(unit, scale, offset)))
                    break
    return tuple(scaling for _, _, scaling in sorted(found, key=lambda entry: entry[:2]))


def ordinary(middle: float) -> tuple[Scaling, ...]:
    """Scalings in wide use (common practice) that make a frame with this median one of ordinary temperature."""
    wide = (Scaling("C", 1.0), *(Scaling("K", scale) for scale in (1.0, 0.01, 0.1, 0.04)))
    return tuple(scaling for scaling in wide if is_ordinary(scaling.celsius(middle)))


def is_ordinary(celsius: float) -> bool:
    """Whether the middle of a frame of a building or of switchgear may have this temperature (judgement)."""
    return ORDINARY_C[0] <= celsius <= ORDINARY_C[1]
