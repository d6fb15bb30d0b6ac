"""What a face in the open sees: shares of its view by tilt, for the heat it radiates.

Tilt [rad] is that of the outward normal from the zenith: 0 faces up, π/2 is a wall, π faces down; NaN outside 0…π.
Open country is taken: no buildings opposite, the horizon free.
"""

from __future__ import annotations

import numpy as np

from irsurvey.heat import Numbers


def sky_share(tilt: Numbers) -> Numbers:
    """View factor of the sky, ½(1 + cos tilt): 1 facing up, ½ for a wall.  Exact for an unobstructed horizon."""
    return (1 + _cosine(tilt)) / 2


def ground_share(tilt: Numbers) -> Numbers:
    """View factor of the ground, ½(1 − cos tilt): what is not sky."""
    return (1 - _cosine(tilt)) / 2


def sky_beta(tilt: Numbers) -> Numbers:
    """The part β = √(½(1 + cos tilt)) of the sky seen that counts as sky; 1 − β of it is near the horizon, at air
    temperature.  Walton (1983), NBSSIR 83-2655 [S]."""
    return np.sqrt(sky_share(tilt))


def faces(tilt: Numbers) -> tuple[Numbers, Numbers, Numbers]:
    """Shares (sky, air, ground) of the view, adding up to 1.  Walton (1983) [S].

    A wall: 0.354, 0.146, 0.5; facing up: 1, 0, 0; facing down: 0, 0, 1."""
    sky, beta = sky_share(tilt), sky_beta(tilt)
    return sky * beta, sky * (1 - beta), ground_share(tilt)


def _cosine(tilt: Numbers) -> Numbers:
    return np.cos(np.where(np.greater_equal(tilt, 0) & np.less_equal(tilt, np.pi), tilt, np.nan)[()])
