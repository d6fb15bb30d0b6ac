"""What a frame may claim once its pixels are known: conditions alone do not make it quantitative."""

from __future__ import annotations

import numpy as np

from irsurvey.analysis.correction import Corrected
from irsurvey.analysis.regions import Screened
from irsurvey.assess.conditions import LEVELS
from irsurvey.texts import state


def limited(claim: tuple[str, str], corrected: Corrected, screened: Screened) -> tuple[str, str]:
    """The claim (level, one of `LEVELS`, and why) that the conditions leave, lowered to what the frame can carry.

    A frame without a single measurable pixel is not valid: its bounds stand, nothing else does.  One without a
    reference area is qualitative at most, as no number of it was compared with one.
    """
    if np.isnan(corrected.t).all():
        counts = (
            (corrected.saturated_pixels, "pixels_saturated"),
            (corrected.unsolved_pixels, "pixels_unsolved"),
            (corrected.without_data_pixels, "pixels_without_data"),
        )
        told = ", ".join(state(key, pixels=pixels) for pixels, key in counts if pixels)
        return _lower(claim, "not valid", state("nothing_measured", pixels=told))
    if screened.reference is None:
        return _lower(claim, "qualitative", state("nothing_compared"))
    return claim


def _lower(claim: tuple[str, str], most: str, why: str) -> tuple[str, str]:
    """A claim of at most this level; the reasons are those of the level that is left."""
    level, reason = claim
    if LEVELS.index(level) < LEVELS.index(most):
        return claim
    return most, f"{reason}; {why}" if level == most else why
