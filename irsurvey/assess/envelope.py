"""Which numbers of an envelope may be given at all, and what would make those possible that may not."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import isfinite
from typing import Final

from irsurvey.model.quantities import Estimate
from irsurvey.texts import state

LEAST_KNOWN: Final = 1.0
"""Expanded uncertainty (k = 2) over the value, above which a thermal transmittance is no number any more."""

INCREASE: Final = "u_value_increase_w_m2k"
SIMPLE: Final = "u_value_simple_w_m2k"


@dataclass(frozen=True, slots=True)
class Face:
    """What decides whether a face allows a thermal transmittance."""

    viewed_from: str | None
    is_sunlit: bool
    sky_is_known: bool  # outdoors: what it radiates to and the wind were recorded
    is_overcast: bool


def refusal(key: str, estimate: Estimate, face: Face) -> str | None:
    """Why a thermal transmittance (a key of report.json) is not given, and what would make it possible; or None.

    What two areas share cancels in the increase over a reference area: the sky does not make it invalid.
    """
    if face.is_sunlit:
        return state("face_sunlit")
    if face.viewed_from == "outside" and key != INCREASE and not face.is_overcast:
        if key == SIMPLE:
            return state("face_open_sky")
        if not face.sky_is_known:
            return state("face_unknown_sky")
    if not estimate.value > 0 and key != INCREASE:
        return state("no_heat_passes")
    if estimate.u is None or not isfinite(estimate.u):
        return state("no_uncertainty")
    if 2 * estimate.u > LEAST_KNOWN * abs(estimate.value):
        share = 200 * estimate.u / abs(estimate.value) if estimate.value else float("inf")
        return state("too_uncertain", share=f"{share:.0f}") if share < 1000 else state("far_too_uncertain")
    return None


def given(numbers: Mapping[str, Estimate | None], face: Face) -> tuple[dict[str, Estimate | None], dict[str, str]]:
    """The numbers that may be given (others None), and the refusals by key."""
    refusals = {
        key: why
        for key, estimate in numbers.items()
        if estimate is not None and (why := refusal(key, estimate, face)) is not None
    }
    return {key: None if key in refusals else estimate for key, estimate in numbers.items()}, refusals
