"""Heat through a thermal bridge, from temperatures or fluxes along a strip drawn across it.

A strip is n samples at equal steps along the last axis; each stands for one step, so that its length is n steps.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from irsurvey.heat import Numbers


def incidence_factor(t_profile: NDArray[np.float64], t_undisturbed: Numbers, t_air: Numbers) -> Numbers:
    """Incidence factor I_tb [–]: heat through the strip over that of the same strip of undisturbed wall.

    Σ(T_air − T)/(N (T_air − T_1D)), `t_profile` (…, n) and the others (…) [K]: Asdrubali, Baldinelli & Bianchi (2012),
    Applied Energy 97, 365 [M].  It takes one film coefficient for the whole strip, and surroundings at air temperature
    (or their environmental temperature for `t_air`).  A strip that ends before the wall is undisturbed understates it.
    NaN where the undisturbed wall is at air temperature."""
    undisturbed = t_air - t_undisturbed
    mean: Numbers = np.mean(t_profile, axis=-1)
    return (t_air - mean) / np.where(np.equal(undisturbed, 0), np.nan, undisturbed)[()]


def linear_transmittance(
    flux_profile: NDArray[np.float64], flux_undisturbed: Numbers, length: Numbers, delta_t: Numbers
) -> Numbers:
    """Linear thermal transmittance Ψ [W m⁻¹ K⁻¹]: the heat a bridge adds, per metre of it and kelvin of air.

    Σ(q − q_1D)·(length/n)/|ΔT|, which is q_tb/ΔT − U·l (ISO 10211:2017 [P]); `flux_profile` (…, n) [W m⁻²] positive
    out of the warm space, `length` [m] of the strip, n steps long, `delta_t` [K] between the air on both sides.  The
    same as U l (I_tb − 1).  NaN where ΔT is 0."""
    driving = np.abs(delta_t)
    mean: Numbers = np.mean(flux_profile, axis=-1)
    return (mean - flux_undisturbed) * length / np.where(np.equal(driving, 0), np.nan, driving)[()]
