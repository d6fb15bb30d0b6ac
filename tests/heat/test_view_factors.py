"""View factors against the integral that defines them, and Walton's division of the sky."""

from __future__ import annotations

import numpy as np
import pytest

from irsurvey.heat.view_factors import faces, ground_share, sky_beta, sky_share

TILTS = np.radians([0.0, 15.0, 45.0, 60.0, 90.0, 120.0, 180.0])


def seen_above_horizon(tilt: float) -> float:
    """The view factor by its definition: cos θ/π over the directions above both the face and the horizon."""
    steps = 400
    height = (np.arange(steps) + 0.5) / steps  # cosine of the angle from the zenith
    around = (np.arange(2 * steps) + 0.5) / (2 * steps) * 2 * np.pi
    level = np.sqrt(1 - height**2)
    cosine = height[:, None] * np.cos(tilt) + level[:, None] * np.cos(around) * np.sin(tilt)
    return float(np.maximum(cosine, 0).mean() * 2)


def test_the_share_of_the_sky_is_the_integral_over_it() -> None:
    """Midpoint rule over 400 × 800 directions: 1e-4."""
    for tilt in TILTS:
        assert sky_share(tilt) == pytest.approx(seen_above_horizon(tilt), abs=1e-4)


def test_a_wall_sees_half_sky_half_ground_and_a_roof_the_sky_alone() -> None:
    assert sky_share(np.pi / 2) == pytest.approx(0.5, rel=1e-12)
    assert ground_share(np.pi / 2) == pytest.approx(0.5, rel=1e-12)
    assert faces(0.0) == pytest.approx((1.0, 0.0, 0.0), abs=1e-12)
    assert faces(np.pi) == pytest.approx((0.0, 0.0, 1.0), abs=1e-12)


def test_waltons_wall_has_0_354_sky_0_146_air_and_0_5_ground() -> None:
    """β = √½ of the half that is sky; Walton (1983) [S], three digits by hand [C]."""
    assert sky_beta(np.pi / 2) == pytest.approx(0.7071, abs=5e-5)
    assert faces(np.pi / 2) == pytest.approx((0.354, 0.146, 0.5), abs=5e-4)


def test_shares_are_within_0_and_1_and_add_up() -> None:
    sky, air, ground = faces(TILTS)
    np.testing.assert_allclose(sky + air + ground, 1, rtol=1e-12)
    for share in (sky, air, ground):
        assert ((share >= 0) & (share <= 1)).all()


def test_outside_half_a_turn_is_nan_and_arrays_give_what_numbers_give() -> None:
    tilts = np.array([-0.1, 0.0, 1.0, 3.2, np.nan])
    for function in (sky_share, ground_share, sky_beta):
        np.testing.assert_array_equal(function(tilts), [function(float(tilt)) for tilt in tilts])
        np.testing.assert_array_equal(np.isnan(function(tilts)), [True, False, False, True, True])
